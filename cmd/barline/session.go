package main

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"sync"
	"sync/atomic"
	"time"

	"github.com/mattn/go-isatty"

	"barline/cmd/barline/loop"
	"barline/device/instrument"
	"barline/logbook"
	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/clock"
	"barline/model/emission"
	"barline/model/live"
)

// session is one experiment, from the opening of its logbook to the closing
// of it.
type session struct {
	bench     *bench.Bench
	text      []byte // of the bench file, which goes whole into the record
	predictor *emission.Predictor
	core      *live.Core
	state     live.State

	folder    string
	clock     clock.Clock
	speed     float64
	opener    func(bench.Instrument) (instrument.Open, error)
	simulated bool
	anchors   bool          // full-field runs are computed beside it
	noCharts  bool          // for slow lines
	greet     bool          // whoever looks may be new
	resumes   bool          // what was left unfinished is taken up, and not offered
	capture   time.Duration // bench time for which every reading is recorded
	stderr    io.Writer
	broken    breakdown // set while it runs
}

// front shows a running experiment to somebody until it is over.
type front func(ctx context.Context, l *loop.Loop) error

// Data of the records that open and close a session.
type (
	startData struct {
		Version   string  `json:"version"`
		Bench     string  `json:"bench"`
		Simulated bool    `json:"simulated,omitempty"`
		Speed     float64 `json:"speed"`
	}
	configurationData struct {
		Digest string `json:"digest"`
		Text   string `json:"text"`
	}
	captureData struct {
		Always   bool    `json:"always,omitempty"`
		Duration float64 `json:"duration_s,omitempty"`
	}
	stopData struct {
		Reason string `json:"reason"`
	}
)

// newSession makes what a bench file describes. It takes a good part of a
// second of computing, which is why bench time begins afterwards.
func newSession(b *bench.Bench, text []byte) (*session, error) {
	setup, err := emission.SetupFromBench(b)
	if err != nil {
		return nil, coded{exitUsage, err}
	}
	predictor, err := emission.NewPredictor(setup)
	if err != nil {
		return nil, coded{exitUsage, err}
	}
	core, state, err := live.New(b, &guided{estimate: predictor})
	if err != nil {
		return nil, coded{exitUsage, err}
	}
	return &session{bench: b, text: text, predictor: predictor, core: core, state: state}, nil
}

// run opens the logbook and the lines, shows the experiment through f until f
// returns or ctx ends, holds the bench and closes the record.
func (s *session) run(ctx context.Context, f front) (err error) {
	// A broken assumption of ours anywhere ends at broken: it holds what can be
	// held, closes the record, gives the terminal back, and says so.
	var broken breakdown
	left := s.offer()
	book, err := logbook.Open(s.folder, logbook.Options{
		Compress: s.bench.Logbook.Compress,
		Panicked: func(value any, stack []byte) { broken("the logbook", value, stack) },
	})
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, book.Close()) }()
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	var newest atomic.Pointer[guided]
	newest.Store(&guided{estimate: s.predictor.Clone()})
	base := s.predictor.Clone() // before the loop begins to ask its own
	w := &wire{now: s.clock.Now}
	calls := newCaller(s.bench.Alarms.OnAlarm, s.stderr)
	l := loop.New(loop.Options{
		Bench: s.bench, Core: s.core, State: s.state, Clock: s.clock, Book: lent{book}, Wire: w,
		Curve: func(in emission.Input, use *calibration.Calibration, dst []emission.CurvePoint) {
			newest.Load().with(use).curve(dst, s.core.Limits().Lowest().Max, in)
		},
		Keep: s.keep,
		Fit: func(rows []live.StepData) (*calibration.Calibration, error) {
			return s.fitRows(newest.Load(), rows, s.clock.Now().UTC)
		},
		Bell:       s.bell,
		Unfinished: left,
		Call:       calls.call,
		Fares:      w.fares,
		Broken:     func(where string, value any, stack []byte) { broken(where, value, stack) },
		Attach:     book.Attach,
		Folder:     s.folder, Simulated: s.simulated, Capture: s.capture, Resonances: resonances(s.predictor),
	})
	if !s.anchors {
		l.Propagation(live.Propagation{Why: "full-field runs are computed beside a screen only"})
	}
	w.answer = l.Answer
	s.recall(l)

	var panicked sync.Once
	broken = func(where string, value any, stack []byte) {
		panicked.Do(func() {
			w.Hold(holdOfPanic, s.core.Limits().Freeze(l.Snapshot().Core))
			cancel(fmt.Errorf("%s broke down: %v\n%s", where, value, stack))
		})
	}
	if err := s.open(book); err != nil {
		return err
	}
	lines, err := s.lines(l, w, broken)
	if err != nil {
		return err
	}
	// The lines outlive the loop, so that its last HOLD reaches them.
	linesCtx, closeLines := context.WithCancel(context.WithoutCancel(ctx))
	var served sync.WaitGroup
	for _, r := range lines {
		served.Go(func() { r.Run(linesCtx) })
	}
	served.Go(func() { broken.guard("the calls of alarms", func() { calls.serve(ctx) }) })
	looped := make(chan struct{})
	go func() {
		defer close(looped)
		whole := false
		broken.guard("the loop", func() { l.Run(ctx); whole = true })
		if !whole {
			<-time.After(panicGrace) // for HOLD to reach the wire
		}
	}()
	if s.anchors {
		s.anchor(ctx, base, l, &newest, &served, broken)
	}
	s.broken = broken
	err = f(ctx, l)
	cancel(context.Canceled)
	<-looped
	closeLines()
	served.Wait()
	reason := "asked for"
	if cause := context.Cause(ctx); cause != nil && !errors.Is(cause, context.Canceled) {
		err, reason = errors.Join(err, cause), "broken assumption"
	}
	_, stopErr := book.Append(s.clock.Now(), string(live.KindStop), stopData{Reason: reason})
	return errors.Join(err, stopErr)
}

const (
	// holdOfPanic is the number of the HOLD that is sent when the loop can no
	// longer number its own.
	holdOfPanic = ^uint64(0)
	panicGrace  = 2 * time.Second
)

// bell rings at the terminal, where there is one.
func (s *session) bell() {
	if f, ok := s.stderr.(*os.File); ok && isatty.IsTerminal(f.Fd()) {
		fmt.Fprint(f, "\a")
	}
}

// open writes the first records of the session.
func (s *session) open(book *logbook.Book) error {
	digest := sha256.Sum256(s.text)
	_, err := book.Append(s.clock.Now(), string(live.KindStart), startData{
		Version: buildVersion(), Bench: s.bench.Bench.Name, Simulated: s.simulated, Speed: s.speed,
	})
	if err != nil {
		return err
	}
	_, err = book.Append(s.clock.Now(), string(live.KindConfiguration), configurationData{
		Digest: hex.EncodeToString(digest[:]), Text: string(s.text),
	})
	if err != nil || s.capture == 0 {
		return err
	}
	captured := captureData{Duration: s.capture.Seconds()}
	if s.capture == math.MaxInt64 {
		captured = captureData{Always: true}
	}
	_, err = book.Append(s.clock.Now(), string(live.KindCapture), captured)
	return err
}

// lines makes a runner for every instrument and hands those that take
// setpoints to w.
func (s *session) lines(l *loop.Loop, w *wire, broken breakdown) ([]*instrument.Runner, error) {
	var lines []*instrument.Runner
	var channels []bench.Channel
	for _, spec := range s.bench.Instrument {
		channels = append(channels, spec.Channel...)
	}
	w.gather = newGather(l)
	w.all = map[*instrument.Instrument]*instrument.Runner{}
	air := instrument.NewAmbient(s.bench.Panel.Ambient)
	sink := instrument.NewHandover(channels, s.bench.Panel.Ambient, s.bench.Limits.Stale.Duration(), instrument.Barometer{Sink: w.gather, Air: air})
	for _, spec := range s.bench.Instrument {
		if s.simulated {
			spec.Timeout = hurried(spec.Timeout, s.bench.Limits.Stale, s.speed)
		}
		in, err := instrument.New(spec, s.bench.Panel.Ambient)
		if err != nil {
			return nil, coded{exitUsage, err}
		}
		if s.bench.Emission.Wavelengths == "air" {
			in.WavelengthsInAir()
		}
		in.CountFrom(air)
		in.Spectra(l.Spectrum)
		in.MadeBy(s.bench.Pulse.Wavelength, s.bench.Emission.Reports == "peak")
		open, err := s.opener(spec)
		if err != nil {
			return nil, coded{exitUsage, err}
		}
		r := instrument.NewRunner(in, open, s.clock, sink, func(value any, stack []byte) {
			broken("instrument "+spec.Name, value, stack)
		})
		w.all[in] = r
		w.instruments = append(w.instruments, in)
		if in.TakesSetpoint() {
			w.controllers = append(w.controllers, r)
		}
		if in.TakesHold() {
			w.holders = append(w.holders, r)
		}
		lines = append(lines, r)
	}
	return lines, nil
}

// resonances returns the gaps of the fibre as a screen shows them.
func resonances(p *emission.Predictor) []live.Span {
	var spans []live.Span
	for _, g := range p.Resonances() {
		spans = append(spans, live.Span{From: g.From, To: g.To})
	}
	return spans
}

// lent is a logbook as the loop knows it.
type lent struct{ *logbook.Book }

// Health implements loop.Book.
func (b lent) Health() live.RecordHealth {
	h := b.Book.Health()
	return live.RecordHealth{Writing: h.Writing, Reason: h.Reason, Written: h.Written, Waiting: h.Waiting, Lost: h.Lost}
}
