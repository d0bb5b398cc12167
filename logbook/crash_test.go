package logbook

import (
	"flag"
	"fmt"
	"math/rand/v2"
	"strings"
	"sync/atomic"
	"syscall"
	"testing"
	"time"
)

var (
	crashSeed    = flag.Uint64("crash-seed", 0, "run only the story of this seed")
	crashStories = flag.Int("crash-stories", 2000, "how many stories to run, of about two and a half crashes each")
)

// TestCrashes cuts the power, fails syncs and fills the disk at random places,
// many times over, and asks each time for every record that was acknowledged.
func TestCrashes(t *testing.T) {
	if *crashSeed != 0 {
		crashStory(t, *crashSeed)
		return
	}
	const lanes = 4
	n := *crashStories
	if testing.Short() {
		n /= 10
	}
	var crashes atomic.Int64
	t.Cleanup(func() { t.Logf("%d crashes in %d stories", crashes.Load(), n) })
	for lane := range lanes {
		t.Run(fmt.Sprintf("lane%d", lane), func(t *testing.T) {
			t.Parallel()
			for seed := lane + 1; seed <= n; seed += lanes {
				if crashes.Add(crashStory(t, uint64(seed))); t.Failed() {
					t.Fatalf("again with: go test ./logbook -run TestCrashes -crash-seed %d", seed)
				}
			}
		})
	}
}

// acknowledged is what a disk must still hold, and where it may be damaged
// because nothing there was.
type acknowledged struct {
	text    map[uint64]string
	excused map[string]bool
}

// crashStory lets several programs die one after the other and returns how
// many did.
func crashStory(t *testing.T, seed uint64) (crashes int64) {
	r := rand.New(rand.NewPCG(seed, 1))
	d := newMemDisk(rand.New(rand.NewPCG(seed, 2))) // its own: it is asked from another goroutine
	acked := acknowledged{text: map[uint64]string{}, excused: map[string]bool{}}
	at := time.Duration(0)
	for range 1 + r.IntN(4) {
		if r.IntN(5) > 0 {
			d.cutAt = 1 + r.IntN(40)
		}
		if r.IntN(3) == 0 {
			d.fault = faults(r)
		}
		runAndDie(d, r, &acked, &at)
		d = d.crash()
		crashes++
		expectAcked(t, d, &acked)
	}
	b, err := open(d, Options{untidy: true})
	if err != nil {
		t.Errorf("seed %d does not open: %v\n%s", seed, err, d.dump())
		return crashes
	}
	seq, err := b.Append(stampAt(at), "note", map[string]string{"text": "last"})
	if err != nil {
		t.Errorf("seed %d: %v", seed, err)
	}
	acked.text[seq] = `{"text":"last"}`
	if err := b.Close(); err != nil {
		t.Errorf("seed %d: %v", seed, err)
	}
	expectAcked(t, d, &acked)
	return crashes
}

// faults draws a failing disk: for a while it is full, or syncs fail.
func faults(r *rand.Rand) func(string) error {
	from, to := r.IntN(30), r.IntN(60)
	full := r.IntN(2) == 0
	n := 0
	return func(op string) error {
		if n++; n < from || n >= to {
			return nil
		}
		switch {
		case full && (op == "write" || op == "create"):
			return syscall.ENOSPC
		case !full && op == "sync":
			return syscall.EIO
		}
		return nil
	}
}

// runAndDie is one run of a program until the power fails or it ends.
func runAndDie(d *memDisk, r *rand.Rand, acked *acknowledged, at *time.Duration) {
	b, err := open(d, Options{
		CommitEvery:  time.Hour,
		SegmentBytes: int64(600 + r.IntN(3000)),
		MemoryBytes:  2000 + r.IntN(20000),
		untidy:       true, // so that a seed always tells the same story
	})
	if err != nil {
		return
	}
	waiting := map[uint64]string{}
	for range r.IntN(40) {
		if *at += time.Second; r.IntN(30) == 0 {
			*at += 24 * time.Hour
		}
		text := fmt.Sprintf(`{"text":"%d %s"}`, r.Uint64(), strings.Repeat("x", r.IntN(100)))
		kind := "reading"
		if r.IntN(10) == 0 {
			kind = "step" // not one that starts a commit by itself, at a time of its own
		}
		if seq, err := b.Append(stampAt(*at), kind, brokenAppender(text)); err == nil {
			waiting[seq] = text
		}
		if r.IntN(4) == 0 && b.Sync() == nil {
			for seq, text := range waiting {
				acked.text[seq] = text
			}
			clear(waiting)
		}
	}
	if r.IntN(3) == 0 && b.Close() == nil {
		for seq, text := range waiting {
			acked.text[seq] = text
		}
		return
	}
	d.mu.Lock()
	d.cutAt = d.ops // cut now, if it was not yet
	d.mu.Unlock()
	b.Close()
}

// expectAcked reads d as found and reports what was acknowledged and is not
// there, and damage that a crash does not excuse.
func expectAcked(t *testing.T, d *memDisk, acked *acknowledged) {
	t.Helper()
	got := map[uint64]string{}
	last := uint64(0)
	for rec, err := range records(d, Filter{}) {
		if err != nil {
			continue
		}
		if rec.Seq <= last {
			t.Errorf("record %d after %d", rec.Seq, last)
		}
		last = rec.Seq
		got[rec.Seq] = string(rec.Data)
	}
	for seq, text := range acked.text {
		if got[seq] != text {
			t.Errorf("record %d: %q, acknowledged as %q\n%s", seq, got[seq], text, d.dump())
			return
		}
	}
	report, err := verify(d, true)
	if err != nil {
		t.Error(err)
	}
	if report.Records != uint64(len(got)) {
		t.Errorf("verify counts %d records, the reader %d\n%s", report.Records, len(got), d.dump())
	}
	high := uint64(0)
	for seq := range acked.text {
		high = max(high, seq)
	}
	for _, damage := range report.Damage {
		place := fmt.Sprint(damage.Segment, damage.Offset)
		if damage.After >= high {
			acked.excused[place] = true
		}
		if !acked.excused[place] && damage.Kind != Torn {
			t.Errorf("%v\n%s", damage, d.dump())
		}
	}
}
