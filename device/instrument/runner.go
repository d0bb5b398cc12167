package instrument

import (
	"context"
	"errors"
	"fmt"
	"runtime/debug"
	"time"

	"barline/device/link"
	"barline/model/clock"
	"barline/model/limit"
	"barline/model/reading"
)

// Sink takes what a Runner finds out. None of its methods may block.
type Sink interface {
	Reading(r reading.Reading)
	// Link says that the line came up or was lost, and why.
	Link(instrument string, up bool, reason string, at reading.Stamp)
	// Answer says how the command with this number fared; nil is well.
	Answer(command uint64, err error, at reading.Stamp)
}

// Open opens the line to an instrument, such as the method of link.Opener.
type Open func(context.Context) (link.Line, error)

// Back-off between attempts to open a line, wall time. A cable that is plugged
// in again should be seen within a second.
const (
	firstBackOff   = 50 * time.Millisecond
	longestBackOff = 500 * time.Millisecond
)

// lookEvery is how often an idle line is looked at, wall time: a cable pulled
// between two polls is seen within this.
const lookEvery = 250 * time.Millisecond

// silentPolls is how many polls without a single answer make the Runner open
// the line anew: a connection whose other end vanished looks just silent.
const silentPolls = 10

// Runner owns the line of one instrument.
type Runner struct {
	instrument *Instrument
	open       Open
	clock      clock.Clock
	sink       Sink
	every      time.Duration // bench time
	commands   queue
	panicked   func(value any, stack []byte)

	readings []reading.Reading
}

// NewRunner returns a Runner for in. Where a broken assumption panics,
// panicked is called on the Runner's goroutine and Run returns; nil lets the
// panic pass.
func NewRunner(in *Instrument, open Open, c clock.Clock, sink Sink, panicked func(value any, stack []byte)) *Runner {
	r := &Runner{instrument: in, open: open, clock: c, sink: sink, panicked: panicked, every: in.spec.Every.Duration()}
	if r.every <= 0 {
		r.every = time.Second
	}
	r.commands.bell = make(chan struct{}, 1)
	return r
}

// Set queues a setpoint. The answer goes to the sink under the same number.
// It may be called from any goroutine and does not block.
func (r *Runner) Set(number uint64, s limit.Setpoint) {
	r.add(command{number: number, setpoint: s, kind: setKind})
}

// Move queues an order. The answer goes to the sink under the same number. It
// may be called from any goroutine and does not block.
func (r *Runner) Move(number uint64, o limit.Order) {
	r.add(command{number: number, order: o, kind: moveKind})
}

func (r *Runner) add(c command) {
	if refused := r.commands.add(c); refused != nil {
		r.sink.Answer(c.number, refused, r.clock.Now())
	}
}

// Hold queues HOLD before everything else. Commands that wait are dropped and
// answered with ErrSuperseded. It may be called from any goroutine and does
// not block.
func (r *Runner) Hold(number uint64, s limit.Setpoint) {
	for _, c := range r.commands.hold(command{number: number, setpoint: s, kind: holdKind}) {
		r.sink.Answer(c.number, ErrSuperseded, r.clock.Now())
	}
}

// Run opens the line and keeps it open until ctx ends. When it returns nothing
// of it is left running, and every command has been answered.
func (r *Runner) Run(ctx context.Context) {
	defer func() {
		if v := recover(); v != nil {
			if r.panicked == nil {
				panic(v)
			}
			r.panicked(v, debug.Stack())
		}
	}()
	defer r.refuseAll(errors.New("the instrument is no longer served"))
	down := "" // the reason that was reported last
	for wait := firstBackOff; ctx.Err() == nil; {
		line, err := r.open(ctx)
		if err != nil {
			if reason := err.Error(); reason != down && ctx.Err() == nil {
				r.sink.Link(r.instrument.Name(), false, reason, r.clock.Now())
				down = reason
			}
			r.wait(ctx, wait)
			wait = min(2*wait, longestBackOff)
			continue
		}
		wait, down = firstBackOff, ""
		r.sink.Link(r.instrument.Name(), true, "", r.clock.Now())
		err = r.use(ctx, line)
		if ctx.Err() != nil {
			return
		}
		down = err.Error()
		r.sink.Link(r.instrument.Name(), false, down, r.clock.Now())
		r.wait(ctx, firstBackOff)
	}
}

// wait passes the time until the next attempt to open the line. Commands that
// come meanwhile are refused at once: one that is sent when the line comes
// back would surprise.
func (r *Runner) wait(ctx context.Context, d time.Duration) {
	timer := time.NewTimer(d)
	defer timer.Stop()
	for {
		r.refuseAll(fmt.Errorf("no line to %s", r.instrument.Name()))
		select {
		case <-ctx.Done():
			return
		case <-timer.C:
			return
		case <-r.commands.bell:
		}
	}
}

func (r *Runner) refuseAll(reason error) {
	for c, ok := r.commands.next(); ok; c, ok = r.commands.next() {
		r.sink.Answer(c.number, reason, r.clock.Now())
	}
}

// use serves an open line and closes it, also where serving panics.
func (r *Runner) use(ctx context.Context, line link.Line) (err error) {
	defer func() { err = errors.Join(err, line.Close()) }()
	return r.serve(ctx, line)
}

// serve uses an open line until it is gone or ctx ends.
func (r *Runner) serve(ctx context.Context, line link.Line) error {
	freed := make(chan struct{})
	stop := context.AfterFunc(ctx, func() {
		defer close(freed)
		_ = line.Close() // frees a read that waits; Run closes it again and reports
	})
	defer func() {
		if !stop() {
			<-freed
		}
	}()
	r.instrument.Opened()
	if r.instrument.Streams() {
		return r.listen(ctx, line)
	}
	next := r.clock.Now().Mono
	for silent := 0; ctx.Err() == nil; {
		answered := r.instrument.Counts().Answered
		for i := range r.instrument.protocol.steps() {
			if err := r.obey(line); err != nil {
				return err
			}
			var err error
			r.readings, err = r.instrument.protocol.step(i, line, r.clock.Now, r.readings[:0])
			r.pass()
			if err != nil {
				return err
			}
			if ctx.Err() != nil {
				return ctx.Err()
			}
		}
		if silent++; r.instrument.Counts().Answered != answered {
			silent = 0
		}
		if silent >= silentPolls {
			return fmt.Errorf("no answer to %d polls: opening the line anew", silent)
		}
		now := r.clock.Now().Mono
		next = max(next+r.every, now) // a poll that took too long is not made up for
		if err := r.rest(ctx, line, r.clock.Wall(next-now)); err != nil {
			return err
		}
	}
	return ctx.Err()
}

// blockEvery is how long a stream is left to gather bytes, wall time: a read
// for every line of a fast one would cost more than the lines.
const blockEvery = 8 * time.Millisecond

func (r *Runner) listen(ctx context.Context, line link.Line) error {
	timer := time.NewTimer(blockEvery)
	defer timer.Stop()
	for ctx.Err() == nil {
		if err := r.obey(line); err != nil {
			return err
		}
		var err error
		r.readings, err = r.instrument.Drain(line, r.clock.Now, r.readings[:0])
		r.pass()
		if err != nil {
			return err
		}
		timer.Reset(blockEvery)
		select {
		case <-ctx.Done():
		case <-timer.C:
		}
	}
	return ctx.Err()
}

func (r *Runner) pass() {
	r.instrument.counts.passed(r.readings)
	for _, x := range r.readings {
		r.sink.Reading(x)
	}
}

// rest passes the time until the next poll, watching for commands and for the
// line to go.
func (r *Runner) rest(ctx context.Context, line link.Line, d time.Duration) error {
	const least = time.Millisecond // also where bench time stands still
	end := time.Now().Add(max(d, least))
	timer := time.NewTimer(0)
	defer timer.Stop()
	for {
		left := time.Until(end)
		if left <= 0 {
			return nil
		}
		timer.Reset(min(left, lookEvery))
		select {
		case <-ctx.Done():
			return ctx.Err()
		case <-r.commands.bell:
			if err := r.obey(line); err != nil {
				return err
			}
		case <-timer.C:
			if time.Until(end) <= 0 {
				return nil
			}
			if err := r.instrument.protocol.idle(line); errors.Is(err, errLost) {
				return err
			}
		}
	}
}

// obey carries out the commands that wait. Its error says that the line is
// gone; the command's own error goes to the sink.
func (r *Runner) obey(line link.Line) error {
	for c, ok := r.commands.next(); ok; c, ok = r.commands.next() {
		var err error
		switch c.kind {
		case setKind:
			err = r.instrument.Set(line, c.setpoint)
		case moveKind:
			err = r.instrument.Move(line, c.order)
		case holdKind:
			err = r.instrument.Hold(line, c.setpoint)
		}
		r.sink.Answer(c.number, err, r.clock.Now())
		if errors.Is(err, errLost) {
			return err
		}
	}
	return nil
}
