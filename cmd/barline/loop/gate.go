package loop

import (
	"fmt"
	"sync"
	"time"

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
	rows   *keeper            // of the rows before what passes; nil where none are kept

	waiting chan passing // nil until started: commands then pass in place

	mu   sync.Mutex // orders what passes against HOLD
	held uint64     // number of the last HOLD
}

type passing struct {
	command uint64
	send    func()
	after   <-chan struct{} // closed when the row before it is recorded; nil where none waits
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
	g.let(passing{command: command, send: func() { g.wire.Setpoint(command, sp) }})
}

func (g *gate) order(command uint64, o limit.Order) {
	g.let(passing{command: command, send: func() { g.wire.Order(command, o) }})
}

func (g *gate) let(p passing) {
	if g.rows != nil {
		p.after = g.rows.last
	}
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
	if !standing(p.after) {
		g.answer(p.command, fmt.Errorf("not sent: the row before it did not reach the disk within %v", rowPatience), g.now())
		return
	}
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

// rowPatience is how long a command waits for a row before it, wall time.
const rowPatience = 5 * time.Second

// standing waits until a row is recorded and reports whether it is.
func standing(recorded <-chan struct{}) bool {
	if recorded == nil {
		return true
	}
	late := time.NewTimer(rowPatience)
	defer late.Stop()
	select {
	case <-recorded:
		return true
	case <-late.C:
		return false
	}
}

func (g *gate) hold(command uint64, sp limit.Setpoint) {
	g.mu.Lock()
	defer g.mu.Unlock()
	g.held = command
	g.wire.Hold(command, sp)
}
