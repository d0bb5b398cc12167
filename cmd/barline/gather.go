package main

import (
	"errors"
	"sync"

	"barline/device/instrument"
	"barline/model/reading"
)

// gather makes one answer of those of several instruments to one command. A
// HOLD that one controller took and a valve did not must not look taken.
type gather struct {
	instrument.Sink
	mu      sync.Mutex
	waiting map[uint64]*answers
}

type answers struct {
	left int
	errs []error
}

func newGather(next instrument.Sink) *gather {
	return &gather{Sink: next, waiting: map[uint64]*answers{}}
}

// expect says, before it is sent, that n instruments will answer a command.
func (g *gather) expect(command uint64, n int) {
	g.mu.Lock()
	defer g.mu.Unlock()
	g.waiting[command] = &answers{left: n}
}

// Answer implements instrument.Sink.
func (g *gather) Answer(command uint64, err error, at reading.Stamp) {
	g.mu.Lock()
	w := g.waiting[command]
	if w != nil {
		w.errs = append(w.errs, err)
		if w.left--; w.left > 0 {
			g.mu.Unlock()
			return
		}
		delete(g.waiting, command)
		err = errors.Join(w.errs...)
	}
	g.mu.Unlock()
	g.Sink.Answer(command, err, at)
}
