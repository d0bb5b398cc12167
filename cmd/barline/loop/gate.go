package loop

import (
	"fmt"
	"sync"

	"barline/model/limit"
	"barline/model/reading"
)

// gate stands between the core and the wire. A setpoint passes only after the
// record of it is on the disk; HOLD passes at once and turns back every
// setpoint that is still waiting.
type gate struct {
	book   Book
	wire   Wire
	answer func(command uint64, err error, at reading.Stamp)
	now    func() reading.Stamp
	caught func(where string) // deferred

	waiting chan passing // nil until started: setpoints then pass in place

	mu   sync.Mutex // orders a setpoint that passes against HOLD
	held uint64     // number of the last HOLD
}

type passing struct {
	command  uint64
	setpoint limit.Setpoint
}

// start lets setpoints wait for the disk on a goroutine of their own. The
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
	p := passing{command, sp}
	if g.waiting == nil {
		g.pass(p)
		return
	}
	select {
	case g.waiting <- p:
	default:
		g.answer(command, fmt.Errorf("not sent: %d setpoints wait for the disk already", cap(g.waiting)), g.now())
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
	g.wire.Setpoint(p.command, p.setpoint)
}

func (g *gate) hold(command uint64, sp limit.Setpoint) {
	g.mu.Lock()
	defer g.mu.Unlock()
	g.held = command
	g.wire.Hold(command, sp)
}
