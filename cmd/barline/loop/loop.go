// Package loop runs the effects of the core: it takes events from the
// instruments, the clock and the person, folds them into the experiment one
// by one, and does what each step asks for: writes the record, sends commands,
// rings the bell, publishes a snapshot for the screen.
//
// One goroutine owns the state. Whatever may be slow, the disk, a line, the
// screen, the curve of predictions, runs beside it and is never waited for.
package loop

import (
	"context"
	"errors"
	"fmt"
	"runtime/debug"
	"slices"
	"sync/atomic"
	"time"

	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/clock"
	"barline/model/emission"
	"barline/model/limit"
	"barline/model/live"
	"barline/model/reading"
)

// Book is the logbook as the loop uses it.
type Book interface {
	// Append queues a record and does not wait for the disk.
	Append(at reading.Stamp, kind string, data any) (seq uint64, err error)
	// Sync returns when all that was appended is on the disk.
	Sync() error
	// Health says how the writing fares.
	Health() live.RecordHealth
}

// Wire takes commands to the instruments. No method blocks; each command
// is answered by Loop.Answer.
type Wire interface {
	Setpoint(command uint64, sp limit.Setpoint)
	Hold(command uint64, sp limit.Setpoint)
	Order(command uint64, o limit.Order)
}

// Curve fills dst with predictions over pressure, with the calibration in use
// laid over; nil where there is none.
type Curve func(in emission.Input, use *calibration.Calibration, dst []emission.CurvePoint)

// Options is what a loop is made of.
type Options struct {
	Bench *bench.Bench
	Core  *live.Core
	State live.State
	Clock clock.Clock
	Book  Book
	Wire  Wire
	Curve Curve // called on a goroutine of its own
	// Keep keeps calibrations where the next start finds them, and Fit fits
	// one on rows of a scan, on a goroutine of its own; either may be nil.
	Keep func(live.Keep) error
	Fit  func(rows []live.StepData) (*calibration.Calibration, error)

	Folder    string // where the logbook is
	Simulated bool
	ReadOnly  bool
	// Resonances are shown on the emission map.
	Resonances []live.Span
	// Unfinished is what an earlier session left; it is only shown.
	Unfinished *live.Unfinished
	Capture    time.Duration // bench time for which every reading is recorded
	Bell       func()
	Seen       func(live.Event) // every event before it is folded, for a capture of all
	Call       func(live.Call)  // must not block
	Fares      func() []live.Fare
	Attach     Attach // keeps the spectra of rows; nil: they are not kept
	// Broken is told of a panic beside the loop; nil lets the program end.
	Broken func(where string, value any, stack []byte)
}

const (
	tickEvery   = 50 * time.Millisecond // bench time
	redrawEvery = 33 * time.Millisecond // wall time
)

// Loop is one running experiment.
type Loop struct {
	opt     Options
	queue   *queue
	state   live.State
	history history
	records *deadbands
	fx      []live.Effect
	taken   []live.Event
	gate    *gate
	curve   atomic.Pointer[[]emission.CurvePoint]
	curveIn emission.Input
	curveOf *calibration.Calibration
	curving atomic.Bool
	dropped uint64
	spectra spectra
	keeper  keeper

	propagated  atomic.Pointer[live.Propagated]
	propagation atomic.Pointer[live.Propagation]

	snapshot atomic.Pointer[live.Snapshot]
	changed  chan struct{}
}

// New returns a loop that has not started.
func New(opt Options) *Loop {
	l := &Loop{
		opt: opt, queue: newQueue(), state: opt.State,
		history: newHistory(), records: newDeadbands(opt.Bench, opt.Capture), changed: make(chan struct{}, 1),
	}
	l.state.Now, l.state.Record = opt.Clock.Now(), opt.Book.Health()
	l.keeper = keeper{attach: opt.Attach, loop: l}
	l.gate = &gate{caught: l.caught, rows: &l.keeper, book: opt.Book, wire: opt.Wire, answer: l.Answer, now: opt.Clock.Now}
	l.publish()
	return l
}

// caught is deferred by every goroutine beside the loop.
func (l *Loop) caught(where string) {
	if l.opt.Broken == nil {
		return
	}
	if v := recover(); v != nil {
		l.opt.Broken(where, v, debug.Stack())
	}
}

// Snapshot returns the newest picture of the experiment.
func (l *Loop) Snapshot() *live.Snapshot { return l.snapshot.Load() }

// Changed receives when there is a newer snapshot than the last one received.
func (l *Loop) Changed() <-chan struct{} { return l.changed }

// Do hands in an intent. It does not wait for its effect.
func (l *Loop) Do(in live.Intent) { l.queue.push(live.Asked{At: l.opt.Clock.Now(), Intent: in}) }

// Reading hands in a reading.
func (l *Loop) Reading(r reading.Reading) { l.queue.push(live.Read{Reading: r}) }

// Link hands in a change of the line to an instrument.
func (l *Loop) Link(instrument string, up bool, reason string, at reading.Stamp) {
	l.queue.push(live.LinkChanged{At: at, Instrument: instrument, Up: up, Reason: reason})
}

// Answer hands in an instrument's answer to a command.
func (l *Loop) Answer(command uint64, err error, at reading.Stamp) {
	e := live.Answered{At: at, Command: command}
	if err != nil {
		e.Err = err.Error()
	}
	l.queue.push(e)
}

// Run folds events until ctx ends, then holds the bench, waits until the
// controller has confirmed it (at most for a second) and returns.
func (l *Loop) Run(ctx context.Context) {
	stopKeeper := l.keeper.start()
	stopGate := l.gate.start()
	defer func() { stopGate(); stopKeeper() }()
	tick := time.NewTicker(max(time.Millisecond, l.opt.Clock.Wall(tickEvery)))
	defer tick.Stop()
	redraw := time.NewTicker(redrawEvery)
	defer redraw.Stop()

	dirty := true
	var shown time.Time // when the last snapshot was published, on the wall
	show := func() {
		if dirty && time.Since(shown) >= redrawEvery {
			l.publish()
			dirty, shown = false, time.Now()
		}
	}
	drain := func() { dirty = l.drain() || dirty }
	for ctx.Err() == nil {
		select {
		case <-ctx.Done():
		case <-l.queue.ready:
			drain()
			show() // what comes after a pause is on the screen at once
		case <-tick.C:
			drain()
			l.tick()
			dirty = true
		case <-redraw.C:
			show()
		}
	}
	l.rest(drain)
	l.publish()
}

// drain folds all events that wait and reports whether there were any.
func (l *Loop) drain() bool {
	l.taken, l.dropped = l.queue.take(l.taken)
	for _, e := range l.taken {
		l.handle(e)
	}
	return len(l.taken) > 0
}

// Turn folds all events that wait, one tick of bench time, and publishes. It
// is for those who drive the loop on a clock of their own instead of Run.
func (l *Loop) Turn() {
	l.drain()
	l.tick()
	l.publish()
}

// rest brings the bench to HOLD at the end of a run.
func (l *Loop) rest(drain func()) {
	drain()
	if l.opt.ReadOnly || !l.opt.Core.Controlled() {
		return
	}
	l.handle(live.Asked{At: l.opt.Clock.Now(), Intent: live.Hold{}})
	deadline := time.NewTimer(time.Second)
	defer deadline.Stop()
	for l.state.Unconfirmed() {
		select {
		case <-l.queue.ready:
			drain()
		case <-deadline.C:
			return
		}
	}
}

// tick folds one tick of bench time.
func (l *Loop) tick() {
	if h := l.opt.Book.Health(); h.Writing != l.state.Record.Writing || h.Reason != l.state.Record.Reason {
		l.handle(live.RecordChanged{At: l.opt.Clock.Now(), Health: h})
	} else {
		l.state.Record = h
	}
	l.handle(live.Tick{At: l.opt.Clock.Now()})
	l.refreshCurve()
}

// handle folds one event and carries out what follows, in order.
func (l *Loop) handle(e live.Event) {
	switch e := e.(type) {
	case measured:
		l.spectra.see(e.spectrum, l.opt.Core.Progress(&l.state))
		return
	case kept:
		l.history.line(e.at, live.KindStep, e.row)
		return
	}
	if l.opt.Seen != nil {
		l.opt.Seen(e)
	}
	l.fx = l.opt.Core.Step(&l.state, e, l.fx[:0])
	if r, ok := e.(live.Read); ok {
		// History and record hold what the core made of it. It is asked after the
		// step: before, it would judge by an earlier time.
		r.Reading = l.opt.Core.Judge(&l.state, r.Reading)
		l.history.reading(&l.state, r.Reading)
		if data, due := l.records.due(r.Reading); due {
			_ = l.record(r.Reading.Taken, live.KindReading, data) // Health counts what was refused
		}
	}
	var unrecorded error // a record that must stand before what follows it
	for _, f := range l.fx {
		switch f := f.(type) {
		case live.Record:
			var err error
			if row, ok := f.Data.(live.StepData); ok {
				err = l.row(f.At, row)
			} else {
				err = l.record(f.At, f.Kind, f.Data)
			}
			if err != nil && f.Sync {
				unrecorded = err
			}
		case live.SendSetpoint:
			if unrecorded != nil {
				l.Answer(f.Command, fmt.Errorf("not sent: it could not be recorded: %w", unrecorded), l.opt.Clock.Now())
				continue
			}
			l.gate.setpoint(f.Command, f.Setpoint)
		case live.SendOrder:
			if unrecorded != nil {
				l.Answer(f.Command, fmt.Errorf("not sent: it could not be recorded: %w", unrecorded), l.opt.Clock.Now())
				continue
			}
			l.gate.order(f.Command, f.Order)
		case live.SendHold:
			l.gate.hold(f.Command, f.Setpoint)
		case live.Bell:
			if l.opt.Bell != nil {
				l.opt.Bell()
			}
		case live.Fit:
			l.fit()
		case live.Keep:
			if l.opt.Keep != nil {
				if err := l.opt.Keep(f); err != nil {
					l.Do(live.Note{Text: fmt.Sprintf("the calibration is in the record, and could not be kept beside it: %v", err)})
				}
			}
		case live.Call:
			if l.opt.Call != nil {
				l.opt.Call(f)
			}
		default:
			panic(fmt.Sprintf("loop: unknown effect %T", f))
		}
	}
	if m, ok := e.(live.ModelChanged); ok && m.Predictor != nil {
		l.curveIn = emission.Input{} // the curve is drawn anew
	}
	if _, ok := e.(live.Tick); ok {
		l.history.tick(&l.state)
	}
}

func (l *Loop) record(at reading.Stamp, kind live.Kind, data any) error {
	// A refused record shows in Health, which the next tick brings to the core.
	_, err := l.opt.Book.Append(at, string(kind), data)
	if err == nil && kind != live.KindReading && kind != live.KindPrediction && kind != live.KindMeans {
		l.history.line(at, kind, data)
	}
	return err
}

// Model hands in a predictor that knows more than the one before, or how far
// one has come.
func (l *Loop) Model(e live.ModelChanged) { l.queue.push(e) }

// Calibrations hands in what an earlier run has kept.
func (l *Loop) Calibrations(e live.CalibrationsFound) { l.queue.push(e) }

// fit fits the rows of now beside the loop.
func (l *Loop) fit() {
	answer := func(c *calibration.Calibration, err error) {
		e := live.Fitted{At: l.opt.Clock.Now(), Calibration: c}
		if err != nil {
			e.Calibration, e.Err = nil, err.Error()
		}
		l.queue.push(e)
	}
	if l.opt.Fit == nil {
		answer(nil, errors.New("this program cannot fit"))
		return
	}
	rows := slices.Clone(l.history.rows)
	go func() { answer(l.opt.Fit(rows)) }()
}

// Tell hands in what a record says that another core did.
func (l *Loop) Tell(e live.Told) { l.queue.push(e) }

// Line shows a line of a record that was written elsewhere. It is for those
// who drive the loop by Turn.
func (l *Loop) Line(at reading.Stamp, kind live.Kind, text string) { l.history.text(at, kind, text) }

// Row shows a row of a scan that was recorded elsewhere, as Line does.
func (l *Loop) Row(r live.StepData) { l.history.row(r) }

// State returns a copy of the experiment. It is for those who drive the loop
// by Turn.
func (l *Loop) State() live.State { return l.state }
