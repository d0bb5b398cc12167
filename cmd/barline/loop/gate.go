package loop

import (
	"fmt"
	"sync"

	"barline/model/limit"
	"barline/model/reading"
)

// gate stands between the core and the wire. A setpoint or an order passes only
// after the record of it is on the disk; HOLD passes at once and turns back
// everything that is still waiting.
type gate struct {
	book   Book
	wire   Wire
	answer func(command uint64, err error, at reading.Stamp)
	now    func() reading.Stamp
	caught func(where string) // deferred

	waiting chan passing // nil until started: commands then pass in place

	mu   sync.Mutex // orders what passes against HOLD
	held uint64     // number of the last HOLD
}

type passing struct {
	command uint64
	send    func()
}

// start lets commands wait for the disk on a goroutine of their own. The
// returned function ends it.
func (g *gate) start() (stop func()) {
	waiting := make(chan passing, 16)
	g.waiting = waiting
	done := make(chan struct{})
	go func() {
		defer close(done)
		defer g.caught("the gate before the wire")
		for p := range waiting {
			g.pass(p)
		}
	}()
	return func() {
		close(waiting)
		<-done
	}
}

func (g *gate) setpoint(command uint64, sp limit.Setpoint) {
	g.let(passing{command, func() { g.wire.Setpoint(command, sp) }})
}

func (g *gate) order(command uint64, o limit.Order) {
	g.let(passing{command, func() { g.wire.Order(command, o) }})
}

func (g *gate) let(p passing) {
	if g.waiting == nil {
		g.pass(p)
		return
	}
	select {
	case g.waiting <- p:
	default:
		g.answer(p.command, fmt.Errorf("not sent: %d commands wait for the disk already", cap(g.waiting)), g.now())
	}
}

func (g *gate) pass(p passing) {
	if err := g.book.Sync(); err != nil {
		g.answer(p.command, fmt.Errorf("not sent: it could not be recorded: %w", err), g.now())
		return
	}
	g.mu.Lock()
	defer g.mu.Unlock()
	if p.command < g.held {
		return // HOLD came in between
	}
	p.send()
}

func (g *gate) hold(command uint64, sp limit.Setpoint) {
	g.mu.Lock()
	defer g.mu.Unlock()
	g.held = command
	g.wire.Hold(command, sp)
}
