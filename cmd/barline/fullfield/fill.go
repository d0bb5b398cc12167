package fullfield

import (
	"context"
	"runtime"
	"sync"

	"barline/model/anchor"
)

// Fill carries out tasks on all cores and returns their nodes, in no order. It
// keeps each in the store, where there is one, as soon as it is known, so that
// a fill that was stopped goes on where it was. said is called with how many
// are done, from one goroutine at a time. All goroutines have ended when it
// returns.
func Fill(ctx context.Context, b *anchor.Bench, store *Store, tasks []anchor.Task, said func(done int)) ([]anchor.Node, error) {
	ctx, stop := context.WithCancel(ctx)
	defer stop()
	var (
		mu     sync.Mutex
		nodes  []anchor.Node
		failed error
		next   int
		all    sync.WaitGroup
	)
	// take returns the next task, or false where there is none.
	take := func() (anchor.Task, bool) {
		mu.Lock()
		defer mu.Unlock()
		if next >= len(tasks) || ctx.Err() != nil {
			return anchor.Task{}, false
		}
		next++
		return tasks[next-1], true
	}
	put := func(n anchor.Node, err error) {
		mu.Lock()
		defer mu.Unlock()
		if err == nil && store != nil {
			err = store.Add(n)
		}
		if err != nil {
			if failed == nil {
				failed = err
			}
			stop()
			return
		}
		nodes = append(nodes, n)
		said(len(nodes))
	}
	for range min(runtime.GOMAXPROCS(0), len(tasks)) {
		all.Go(func() {
			for t, ok := take(); ok; t, ok = take() {
				put(b.Compute(ctx, t, nil))
			}
		})
	}
	all.Wait()
	if failed == nil && len(nodes) < len(tasks) {
		failed = ctx.Err()
	}
	return nodes, failed
}
