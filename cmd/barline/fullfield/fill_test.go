package fullfield

import (
	"context"
	"errors"
	"testing"

	"go.uber.org/goleak"

	"barline/model/anchor"
)

func TestFillKeepsWhatItFound(t *testing.T) {
	defer goleak.VerifyNone(t)
	b, folder := short(t), t.TempDir()
	tasks := b.Plan(nil, anchor.Round(370))[:5]
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	some, err := Fill(ctx, b, open(t, folder, "abc"), tasks, func(done int) {
		if done == 2 {
			cancel()
		}
	})
	if !errors.Is(err, context.Canceled) || len(some) < 2 || len(some) == len(tasks) {
		t.Fatalf("stopped after two: %d nodes, %v", len(some), err)
	}
	kept, _ := load(t, open(t, folder, "abc"))
	if len(kept) != len(some) {
		t.Errorf("%d nodes kept, want %d", len(kept), len(some))
	}
	last := 0
	rest, err := Fill(context.Background(), b, nil, tasks, func(done int) { last = done })
	if err != nil || len(rest) != len(tasks) || last != len(tasks) {
		t.Errorf("%d of %d nodes, said %d, %v", len(rest), len(tasks), last, err)
	}
}
