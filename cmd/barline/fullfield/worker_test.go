package fullfield

import (
	"context"
	"errors"
	"sync"
	"testing"

	"go.uber.org/goleak"

	"barline/model/anchor"
	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/pulse"
	"barline/model/unit"
)

// short is a bench whose runs take milliseconds: a fibre of two millimetres.
func short(t *testing.T) *anchor.Bench {
	t.Helper()
	b, err := anchor.New(anchor.Spec{
		Gas:   gas.Spec{Composition: "argon"},
		Fibre: fibre.Spec{Kind: fibre.Capillary, CoreDiameter: 34 * unit.Micrometre, Length: 2e-3},
		Pulse: pulse.Pulse{Wavelength: 1030 * unit.Nanometre, Duration: 35 * unit.Femtosecond, Energy: unit.Microjoule},
	})
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func setup(t *testing.T, b *anchor.Bench, density float64) pulse.Setup {
	t.Helper()
	s, err := b.Setup(anchor.Task{Density: density, Energy: unit.Microjoule})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// heard collects the events of a worker.
type heard struct {
	mu     sync.Mutex
	events []Event
	more   chan struct{}
}

func newHeard() *heard { return &heard{more: make(chan struct{}, 1)} }

func (h *heard) tell(e Event) {
	h.mu.Lock()
	h.events = append(h.events, e)
	h.mu.Unlock()
	select {
	case h.more <- struct{}{}:
	default:
	}
}

// until waits until done of the events so far.
func (h *heard) until(t *testing.T, done func([]Event) bool) []Event {
	t.Helper()
	for {
		h.mu.Lock()
		events := append([]Event(nil), h.events...)
		h.mu.Unlock()
		if done(events) {
			return events
		}
		select {
		case <-h.more:
		case <-t.Context().Done():
			t.Fatal("the worker never said it")
		}
	}
}

func answers(events []Event) (list []Answered) {
	for _, e := range events {
		if a, ok := e.(Answered); ok {
			list = append(list, a)
		}
	}
	return list
}

// start runs a worker until the test ends and then sees that nothing is left.
func start(t *testing.T, w *Worker) {
	t.Helper()
	ctx, cancel := context.WithCancel(context.Background())
	done := make(chan struct{})
	go func() {
		defer close(done)
		w.Run(ctx)
	}()
	t.Cleanup(func() {
		cancel()
		<-done
		goleak.VerifyNone(t)
	})
}

func TestNewestQuestionWins(t *testing.T) {
	b, h := short(t), newHeard()
	w := NewWorker(Options{Tell: h.tell})
	for _, density := range []float64{300, 320, 340, 360} {
		w.Ask(setup(t, b, density))
	}
	start(t, w)
	got := answers(h.until(t, func(e []Event) bool { return len(answers(e)) > 0 }))
	if len(got) != 1 || got[0].Question.Gas.Density != 360 || got[0].Result == nil {
		t.Errorf("answers %+v, want the newest question's alone", got)
	}
}

func TestCloseQuestionReusesTheResult(t *testing.T) {
	b, h := short(t), newHeard()
	w := NewWorker(Options{Tell: h.tell})
	start(t, w)
	w.Ask(setup(t, b, 300))
	h.until(t, func(e []Event) bool { return len(answers(e)) == 1 })
	w.Ask(setup(t, b, 300*(1+sameDensity/2)))
	h.until(t, func(e []Event) bool { return len(answers(e)) == 2 })
	w.Ask(setup(t, b, 310))
	got := answers(h.until(t, func(e []Event) bool { return len(answers(e)) == 3 }))
	if got[0].Result != got[1].Result {
		t.Error("a question within the tolerance was propagated again")
	}
	if got[2].Result == got[0].Result || got[2].Result.Setup.Gas.Density != 310 {
		t.Error("a question beyond the tolerance got an old result")
	}
}

func TestRunsAheadAnswerAtOnce(t *testing.T) {
	b, h := short(t), newHeard()
	w := NewWorker(Options{Tell: h.tell})
	w.Ahead(setup(t, b, 300), setup(t, b, 310))
	start(t, w)
	have := func() int {
		w.mu.Lock()
		defer w.mu.Unlock()
		return len(w.recent)
	}
	w.Ask(setup(t, b, 400))
	h.until(t, func([]Event) bool {
		if have() < 3 {
			h.tell(Progress{}) // look again
			return false
		}
		return true
	})
	w.Ask(setup(t, b, 310))
	got := answers(h.until(t, func(e []Event) bool { return len(answers(e)) == 2 }))
	if r := got[1].Result; r == nil || r.Setup.Gas.Density != 310 || have() != 3 {
		t.Errorf("the run ahead was not used: %d results", have())
	}
}

// A question for what is being computed ahead is answered by that run.
func TestQuestionMeetsTheRunAhead(t *testing.T) {
	b, h := short(t), newHeard()
	w := NewWorker(Options{Tell: h.tell})
	s := setup(t, b, 300)
	stopped := false
	w.current, w.stop, w.preparing = &s, func() { stopped = true }, true // as in the middle of a run ahead
	w.Ask(s)
	w.Ask(s)
	if stopped || w.question == nil {
		t.Errorf("the run ahead was stopped: %v; the question waits: %v", stopped, w.question != nil)
	}
	w.Ask(setup(t, b, 400))
	if !stopped || w.question.Gas.Density != 400 {
		t.Error("another question did not stop the run ahead")
	}
	// Back again, while the stopped run has not yet ended: asked anew.
	w.preparing = false
	if w.Ask(s); w.question.Gas.Density != 300 {
		t.Error("the newest question was dropped in favour of a run that was stopped")
	}
	w.current = nil
	start(t, w)
	h.until(t, func(e []Event) bool { return len(answers(e)) == 1 })
}

func TestAnchoringGoesOnWhereItStopped(t *testing.T) {
	b, h, folder := short(t), newHeard(), t.TempDir()
	maps := func(events []Event) (list []Anchored) {
		for _, e := range events {
			switch e := e.(type) {
			case Anchored:
				list = append(list, e)
			case Failed:
				t.Error(e.Err)
			}
		}
		return list
	}
	w := NewWorker(Options{Bench: b, Store: open(t, folder, b.Spec().Digest()), Tell: h.tell})
	w.Around(370)
	ctx, cancel := context.WithCancel(context.Background())
	done := make(chan struct{})
	go func() {
		defer close(done)
		w.Run(ctx)
	}()
	h.until(t, func(e []Event) bool { return len(maps(e)) >= 3 })
	cancel()
	<-done
	nodes, _ := load(t, open(t, folder, b.Spec().Digest()))
	if len(nodes) < 3 {
		t.Fatalf("%d nodes kept, want at least 3", len(nodes))
	}
	again := newHeard()
	start(t, NewWorker(Options{Bench: b, Store: open(t, folder, b.Spec().Digest()), Tell: again.tell}))
	first := maps(again.until(t, func(e []Event) bool { return len(maps(e)) >= 1 }))[0]
	if first.Done != len(nodes) || first.Map.Nodes() != len(nodes) || !first.Map.Usable() {
		t.Errorf("started with %d nodes, usable %v; want %d", first.Map.Nodes(), first.Map.Usable(), len(nodes))
	}
}

func TestImpossibleQuestionIsAnswered(t *testing.T) {
	b, h := short(t), newHeard()
	w := NewWorker(Options{Tell: h.tell})
	start(t, w)
	s := setup(t, b, 300)
	s.Pulse.Energy = 0
	w.Ask(s)
	if a := answers(h.until(t, func(e []Event) bool { return len(answers(e)) == 1 }))[0]; a.Err == nil || a.Result != nil {
		t.Errorf("a pulse without energy: %+v", a)
	}
}

func TestResultsKeptAreBounded(t *testing.T) {
	w := NewWorker(Options{})
	large := func(numbers int) *pulse.Result {
		return &pulse.Result{Evolution: []pulse.Sample{{Energy: make([]float64, numbers)}}}
	}
	for range 100 {
		w.remember(large(10))
	}
	if len(w.recent) != mostRecent {
		t.Errorf("%d small results are kept, expected %d", len(w.recent), mostRecent)
	}
	for range 10 {
		w.remember(large(recentNumbers / 4))
	}
	if len(w.recent) != 4 {
		t.Errorf("%d large results are kept, expected 4", len(w.recent))
	}
	w.remember(large(2 * recentNumbers))
	if len(w.recent) != 1 {
		t.Errorf("beside the newest %d results are kept, which is too large for them", len(w.recent)-1)
	}
}

// A question is answered before the node at work goes on, and the node is laid
// all the same.
func TestQuestionGoesBeforeNodes(t *testing.T) {
	b, h := short(t), newHeard()
	w := NewWorker(Options{Bench: b, Tell: h.tell})
	stopped := 0
	w.laying = func() { stopped++ } // as in the first half of a node
	w.Ask(setup(t, b, 300))
	if stopped != 1 {
		t.Error("the question did not stop the node at work")
	}
	if _, err := w.node(t.Context(), anchor.Task{Density: 400, Energy: unit.Microjoule}); !errors.Is(err, context.Canceled) {
		t.Errorf("a node began although a question waits: %v", err)
	}
	w.laying = nil
	w.Around(370)
	start(t, w)
	events := h.until(t, func(e []Event) bool {
		for _, x := range e {
			if a, ok := x.(Anchored); ok && a.Done >= 3 {
				return true
			}
		}
		return false
	})
	if _, ok := events[len(events)-1].(Anchored); !ok || len(answers(events)) != 1 {
		t.Errorf("%d answers before the third node, want one", len(answers(events)))
	}
	if a, ok := events[0].(Progress); !ok {
		t.Errorf("%T came first, want the question's progress: %+v", events[0], a)
	}
}
