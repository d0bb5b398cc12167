package instrument

import (
	"context"
	"errors"
	"io"
	"sync"
	"testing"
	"time"

	"barline/device/link"
	"barline/model/bench"
	"barline/model/clock"
	"barline/model/reading"
	"barline/model/unit"
)

// notes is a Sink that keeps everything and tells whoever waits.
type notes struct {
	mu       sync.Mutex
	readings []reading.Reading
	links    []bool
	reasons  []string
	answers  map[uint64]error
	changed  chan struct{}
}

func newNotes() *notes { return &notes{answers: map[uint64]error{}, changed: make(chan struct{}, 1)} }

func (n *notes) note(f func()) {
	n.mu.Lock()
	f()
	n.mu.Unlock()
	select {
	case n.changed <- struct{}{}:
	default:
	}
}

func (n *notes) Reading(r reading.Reading) { n.note(func() { n.readings = append(n.readings, r) }) }
func (n *notes) Link(_ string, up bool, reason string, _ reading.Stamp) {
	n.note(func() { n.links, n.reasons = append(n.links, up), append(n.reasons, reason) })
}
func (n *notes) Answer(c uint64, err error, _ reading.Stamp) { n.note(func() { n.answers[c] = err }) }

func (n *notes) until(t testing.TB, what string, ok func() bool) {
	t.Helper()
	limit := time.NewTimer(10 * time.Second)
	defer limit.Stop()
	for {
		n.mu.Lock()
		done := ok()
		n.mu.Unlock()
		if done {
			return
		}
		select {
		case <-n.changed:
		case <-limit.C:
			t.Fatalf("waited 10 s for %s; links %v %q, %d readings, answers %v", what, n.links, n.reasons, len(n.readings), n.answers)
		}
	}
}

// start runs a Runner until the test ends, and proves that Run returns.
func start(t testing.TB, in *Instrument, open Open, sink Sink) *Runner {
	t.Helper()
	r := NewRunner(in, open, clock.NewScaled(1), sink, func(v any, stack []byte) { t.Errorf("panic: %v\n%s", v, stack) })
	ctx, cancel := context.WithCancel(context.Background())
	ended := make(chan struct{})
	go func() {
		defer close(ended)
		r.Run(ctx)
	}()
	t.Cleanup(func() {
		cancel()
		<-ended
	})
	return r
}

func TestRunnerPollsReopensAndObeys(t *testing.T) {
	d := &device{level: 2, measured: 2}
	var mu sync.Mutex
	var line *scripted
	opened := 0
	open := func(context.Context) (link.Line, error) {
		mu.Lock()
		defer mu.Unlock()
		if opened++; opened == 2 {
			return nil, errors.New("nothing is plugged in")
		}
		line = &scripted{answer: d.answer}
		return line, nil
	}
	spec := controller()
	spec.Every = 0.005
	in, err := New(spec, 1.013*unit.Bar)
	if err != nil {
		t.Fatal(err)
	}
	n := newNotes()
	r := start(t, in, open, n)
	n.until(t, "two polls", func() bool { return len(n.readings) >= 4 })
	r.Set(1, setpoint(t, 3*unit.Bar))
	n.until(t, "the answer", func() bool { _, ok := n.answers[1]; return ok })
	if n.answers[1] != nil {
		t.Error(n.answers[1])
	}
	mu.Lock()
	line.mu.Lock()
	line.gone = io.ErrUnexpectedEOF
	line.mu.Unlock()
	mu.Unlock()
	n.until(t, "the line to come back", func() bool { return len(n.links) == 4 && n.links[3] })
	if n.links[1] || n.links[2] || n.reasons[2] != "nothing is plugged in" {
		t.Errorf("links %v, reasons %q", n.links, n.reasons)
	}
	r.Hold(2, limits.Freeze(2.5*unit.Bar))
	n.until(t, "HOLD", func() bool { _, ok := n.answers[2]; return ok })
	if n.answers[2] != nil || d.mode != "HOLD" {
		t.Errorf("%v, mode %q", n.answers[2], d.mode)
	}
}

func TestCommandsWithoutLineAreRefusedAtOnce(t *testing.T) {
	in, err := New(controller(), 0)
	if err != nil {
		t.Fatal(err)
	}
	n := newNotes()
	r := start(t, in, func(context.Context) (link.Line, error) { return nil, errors.New("gone") }, n)
	n.until(t, "the line", func() bool { return len(n.links) == 1 })
	r.Set(7, setpoint(t, 3*unit.Bar))
	n.until(t, "the refusal", func() bool { return n.answers[7] != nil })
}

func TestHoldOvertakesSetpoints(t *testing.T) {
	in, err := New(controller(), 0)
	if err != nil {
		t.Fatal(err)
	}
	n := newNotes()
	r := NewRunner(in, nil, clock.NewFake(time.Time{}), n, nil)
	for i := range uint64(queueLength + 1) {
		r.Set(i, setpoint(t, 3*unit.Bar))
	}
	if !errors.Is(n.answers[queueLength], errQueueFull) || len(n.answers) != 1 {
		t.Errorf("a full queue answers %v", n.answers)
	}
	r.Hold(100, limits.Freeze(2*unit.Bar))
	for i := range uint64(queueLength) {
		if !errors.Is(n.answers[i], ErrSuperseded) {
			t.Errorf("setpoint %d: %v", i, n.answers[i])
		}
	}
	if c, ok := r.commands.next(); !ok || c.kind != holdKind || c.number != 100 {
		t.Errorf("first is %+v", c)
	}
	if c, ok := r.commands.next(); ok {
		t.Errorf("then %+v", c)
	}
}

func TestPanicReachesTheHandler(t *testing.T) {
	in, err := New(bench.Instrument{Name: "m", Protocol: bench.ModbusRTU, Channel: []bench.Channel{pressure("A", reading.CellAPressure, 1, 0)}}, 0)
	if err != nil {
		t.Fatal(err)
	}
	got := make(chan any, 1)
	broken := &scripted{answer: func([]byte) []byte { panic("broken") }}
	open := func(context.Context) (link.Line, error) { return broken, nil }
	NewRunner(in, open, clock.NewScaled(1), newNotes(), func(v any, _ []byte) { got <- v }).Run(context.Background())
	if v := <-got; v != "broken" {
		t.Errorf("handler got %v", v)
	}
	if !broken.closed {
		t.Error("the line was left open")
	}
}
