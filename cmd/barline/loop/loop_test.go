package loop

import (
	"context"
	"errors"
	"fmt"
	"sync"
	"testing"
	"testing/synctest"
	"time"

	"go.uber.org/goleak"

	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/clock"
	"barline/model/emission"
	"barline/model/limit"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// trace is what happened at the edges, in order.
type trace struct {
	mu    sync.Mutex
	lines []string
}

func (t *trace) add(s string) {
	t.mu.Lock()
	t.lines = append(t.lines, s)
	t.mu.Unlock()
}

func (t *trace) index(s string) int {
	t.mu.Lock()
	defer t.mu.Unlock()
	for i, l := range t.lines {
		if l == s {
			return i
		}
	}
	return -1
}

type fakeBook struct {
	*trace
	release chan struct{} // Sync waits for it where it is not nil
	err     error
	full    bool // Append refuses
}

func (b *fakeBook) Append(_ reading.Stamp, kind string, data any) (uint64, error) {
	if b.full {
		return 0, errors.New("memory is full")
	}
	if c, ok := data.(live.CommandData); ok {
		b.add("append " + c.String())
	} else {
		b.add("append " + kind)
	}
	return 0, nil
}

func (b *fakeBook) Sync() error {
	if b.release != nil {
		<-b.release
	}
	b.add("sync")
	return b.err
}

func (b *fakeBook) Health() live.RecordHealth {
	return live.RecordHealth{Writing: true}
}

type fakeWire struct {
	*trace
	answer func(uint64)
}

func (w *fakeWire) Setpoint(command uint64, sp limit.Setpoint) {
	p, ok := sp.Pressure()
	if !ok {
		panic("an unchecked setpoint reached the wire")
	}
	w.add("wire setpoint " + p.String())
	w.answer(command)
}

func (w *fakeWire) Hold(command uint64, sp limit.Setpoint) {
	w.add("wire hold")
	w.answer(command)
}

func (w *fakeWire) Order(command uint64, o limit.Order) {
	w.add(fmt.Sprintf("wire order %T", o))
	w.answer(command)
}

type flat struct{}

func (flat) Predict(in emission.Input, _ *emission.Prediction) emission.Prediction {
	return emission.Prediction{Input: in, Valid: true, Emission: 260 * unit.Nanometre}
}

func testBench() *bench.Bench {
	return &bench.Bench{
		Fibre: bench.Fibre{Kind: "antiresonant", CoreDiameter: 34 * unit.Micrometre, Wall: 180 * unit.Nanometre, Length: 30 * unit.Centimetre},
		Gas:   bench.Gas{Species: "argon"},
		Limits: bench.Limits{
			FibreSeal: 16 * unit.Bar, Cells: 16 * unit.Bar, Windows: 16 * unit.Bar, Line: 16 * unit.Bar,
			RiseRate: 0.2e5, FallRate: 0.2e5, Stale: 2, Confirm: 3, Arming: 60, Follow: 2 * unit.Bar,
		},
		Logbook:    bench.Logbook{Heartbeat: 60},
		Instrument: []bench.Instrument{{Name: "controller", Channel: []bench.Channel{{Name: "setpoint", Role: reading.Setpoint, Write: "P {value}"}, {Name: "inlet", Role: reading.InletValve, Write: "I {value}"}}}},
	}
}

func newTestLoop(t *testing.T, book *fakeBook, tr *trace) *Loop {
	t.Helper()
	b := testBench()
	core, state, err := live.New(b, flat{})
	if err != nil {
		t.Fatal(err)
	}
	clk := clock.NewScaled(1)
	w := &fakeWire{trace: tr}
	l := New(Options{Bench: b, Core: core, State: state, Clock: clk, Book: book, Wire: w})
	w.answer = func(id uint64) { l.Answer(id, nil, clk.Now()) }
	return l
}

func (l *Loop) gauge(p unit.Pascal) {
	l.Reading(reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Value: float64(p), Taken: l.opt.Clock.Now(), Status: reading.Good})
}

func TestSetpointWaitsForTheDiskAndHoldDoesNot(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		tr := &trace{}
		book := &fakeBook{trace: tr, release: make(chan struct{})}
		l := newTestLoop(t, book, tr)
		ctx, cancel := context.WithCancel(t.Context())
		done := make(chan struct{})
		go func() { l.Run(ctx); close(done) }()

		<-time.After(100 * time.Millisecond)
		l.gauge(1 * unit.Bar)
		l.Do(live.Arm{})
		l.Do(live.GoTo{Target: 3 * unit.Bar})
		<-time.After(200 * time.Millisecond)
		if tr.index("append 1 setpoint 1.2 bar") < 0 {
			t.Fatalf("no record of the setpoint: %v", tr.lines)
		}
		if tr.index("wire setpoint 1.2 bar") >= 0 {
			t.Fatal("the setpoint reached the wire before the disk had its record")
		}
		l.Do(live.Hold{})
		<-time.After(100 * time.Millisecond)
		if tr.index("wire hold") < 0 {
			t.Fatal("HOLD waited for the disk")
		}
		close(book.release)
		<-time.After(100 * time.Millisecond)
		if tr.index("wire setpoint 1.2 bar") >= 0 {
			t.Fatal("a setpoint older than HOLD reached the wire after it")
		}
		if got := l.Snapshot().Mode; got != live.Held {
			t.Fatalf("mode is %v", got)
		}
		cancel()
		<-done
	})
}

func TestOrderWaitsForTheDiskAndHoldTurnsItBack(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		tr := &trace{}
		book := &fakeBook{trace: tr, release: make(chan struct{})}
		l := newTestLoop(t, book, tr)
		ctx, cancel := context.WithCancel(t.Context())
		done := make(chan struct{})
		go func() { l.Run(ctx); close(done) }()

		<-time.After(100 * time.Millisecond)
		l.gauge(1 * unit.Bar)
		l.Do(live.Arm{})
		l.Do(live.MoveValve{Valve: limit.Inlet, Open: true})
		<-time.After(200 * time.Millisecond)
		if tr.index("append 1 open the inlet valve") < 0 || tr.index("wire order limit.ValveOrder") >= 0 {
			t.Fatalf("the order did not wait for its record on the disk: %v", tr.lines)
		}
		l.Do(live.Hold{})
		<-time.After(100 * time.Millisecond)
		close(book.release)
		<-time.After(100 * time.Millisecond)
		if tr.index("wire hold") < 0 || tr.index("wire order limit.ValveOrder") >= 0 {
			t.Fatalf("an order older than HOLD reached the wire after it: %v", tr.lines)
		}
		l.gauge(1 * unit.Bar)
		l.Do(live.MoveValve{Valve: limit.Inlet})
		<-time.After(100 * time.Millisecond)
		if tr.index("wire order limit.ValveOrder") < 0 {
			t.Fatalf("the inlet was not shut: %v", tr.lines)
		}
		cancel()
		<-done
	})
}

func TestSetpointIsNotSentWhereTheDiskRefuses(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		tr := &trace{}
		l := newTestLoop(t, &fakeBook{trace: tr, err: errors.New("no space left")}, tr)
		ctx, cancel := context.WithCancel(t.Context())
		done := make(chan struct{})
		go func() { l.Run(ctx); close(done) }()
		<-time.After(100 * time.Millisecond)
		l.gauge(1 * unit.Bar)
		l.Do(live.Arm{})
		l.Do(live.GoTo{Target: 3 * unit.Bar})
		<-time.After(200 * time.Millisecond)
		if tr.index("wire setpoint 1.2 bar") >= 0 {
			t.Fatal("a setpoint that could not be recorded reached the wire")
		}
		if s := l.Snapshot(); s.Mode != live.Held {
			t.Fatalf("mode is %v (%s), want HOLD", s.Mode, s.Why)
		}
		cancel()
		<-done
	})
}

// A record that the logbook refuses at once is no record: what should follow it
// does not reach the wire, although there is nothing left to sync.
func TestSetpointIsNotSentWhereItsRecordIsRefused(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		tr := &trace{}
		book := &fakeBook{trace: tr}
		l := newTestLoop(t, book, tr)
		l.gauge(1 * unit.Bar)
		l.Do(live.Arm{})
		l.Turn()
		book.full = true
		l.Do(live.GoTo{Target: 3 * unit.Bar})
		l.Turn()
		l.Turn()
		if tr.index("wire setpoint 1.2 bar") >= 0 {
			t.Fatal("a setpoint without a record reached the wire")
		}
		if s := l.Snapshot(); s.Mode != live.Held {
			t.Fatalf("mode is %v (%s), want HOLD", s.Mode, s.Why)
		}
	})
}

func TestEndOfRunHolds(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		tr := &trace{}
		l := newTestLoop(t, &fakeBook{trace: tr}, tr)
		ctx, cancel := context.WithCancel(t.Context())
		done := make(chan struct{})
		go func() { l.Run(ctx); close(done) }()
		<-time.After(100 * time.Millisecond)
		cancel()
		<-done
		if tr.index("wire hold") < 0 {
			t.Fatalf("the run ended without HOLD: %v", tr.lines)
		}
	})
}

func TestQueueRefusesReadingsButNothingElse(t *testing.T) {
	q := newQueue()
	for range maxReadings + 100 {
		q.push(live.Read{})
	}
	q.push(live.Asked{Intent: live.Hold{}})
	events, dropped := q.take(nil)
	if len(events) != maxReadings+1 || dropped != 100 {
		t.Fatalf("%d events, %d dropped; want %d and 100", len(events), dropped, maxReadings+1)
	}
	if _, ok := events[maxReadings].(live.Asked); !ok {
		t.Fatal("HOLD did not come through a full queue")
	}
}

func TestDeadbandKeepsSteadyReadingsOutOfTheRecord(t *testing.T) {
	b := testBench()
	b.Logbook.DeadbandPressure = 2 * unit.Millibar
	d := newDeadbands(b, 0)
	written := 0
	for i := range 601 { // a minute at 10 Hz, within ±1 mbar
		r := reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Status: reading.Good,
			Value: 9e5 + 100*float64(i%2), Taken: reading.Stamp{Mono: time.Duration(i) * 100 * time.Millisecond}}
		if _, due := d.due(r); due {
			written++
		}
	}
	if written != 2 {
		t.Errorf("%d records of a steady minute, want the first and one heartbeat", written)
	}
	failed := reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Reason: "no answer", Taken: reading.Stamp{Mono: 61 * time.Second}}
	data, due := d.due(failed)
	if !due || data.Value != nil {
		t.Errorf("a failure was recorded %v with value %v, want at once and null", due, data.Value)
	}
}

// What breaks down beside the loop is told, and the loop goes on.
func TestPanicBesideTheLoopIsTold(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		tr := &trace{}
		l := newTestLoop(t, &fakeBook{trace: tr}, tr)
		told := make(chan string, 10)
		l.opt.Curve = func(emission.Input, *calibration.Calibration, []emission.CurvePoint) { panic("out of order") }
		l.opt.Broken = func(where string, value any, _ []byte) { told <- where }
		l.gate.book = brokenBook{}
		ctx, cancel := context.WithCancel(t.Context())
		done := make(chan struct{})
		go func() { l.Run(ctx); close(done) }()
		l.gauge(1 * unit.Bar)
		<-time.After(200 * time.Millisecond)
		if got := <-told; got != "the predicted curve" {
			t.Errorf("told of %q, expected the predicted curve", got)
		}
		l.Do(live.Arm{})
		l.Do(live.GoTo{Target: 3 * unit.Bar})
		for got := range told {
			if got == "the gate before the wire" {
				break
			}
		}
		cancel()
		<-done
	})
}

// brokenBook breaks down when it is to bring something to the disk.
type brokenBook struct{}

func (brokenBook) Sync() error { panic("out of order") }
func (brokenBook) Append(reading.Stamp, string, any) (uint64, error) {
	return 0, nil
}
func (brokenBook) Health() live.RecordHealth { return live.RecordHealth{Writing: true} }
