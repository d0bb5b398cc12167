package fullfield

import (
	"context"
	"errors"
	"math"
	"slices"
	"sync"

	"barline/model/anchor"
	"barline/model/pulse"
)

// Event is what a worker tells.
type Event interface{ event() }

type (
	// Answered carries the result of a question, or why there is none. The
	// result's Setup is the one that was propagated: it equals the question's
	// within the reuse tolerance.
	Answered struct {
		Question pulse.Setup
		Result   *pulse.Result
		Err      error
	}
	// Anchored carries the map that stands on all nodes so far.
	Anchored struct {
		Map           *anchor.Map
		Nodes         []anchor.Node // all, in the order in which they came; never changed
		Done, Planned int
	}
	// Progress says how far the run at hand is, in steps of a twentieth.
	Progress struct{ Share float64 }
	// Failed is trouble that ends nothing: a node that could not be computed
	// or kept.
	Failed struct{ Err error }
)

func (Answered) event() {}
func (Anchored) event() {}
func (Progress) event() {}
func (Failed) event()   {}

// Options says what a worker does of itself.
type Options struct {
	// Bench is anchored in the background, around what Around says; nil means
	// it is not.
	Bench *anchor.Bench
	// Store keeps the nodes; nil means they last as long as the worker.
	Store *Store
	// Tell receives every event, on the worker's goroutine. It must not block.
	Tell func(Event)
}

// Worker propagates in the background. Its methods may be called from any
// goroutine.
type Worker struct {
	opt  Options
	wake chan struct{}

	mu       sync.Mutex
	question *pulse.Setup // the newest, not yet begun
	ahead    []pulse.Setup
	current  *pulse.Setup // the setup at work
	// preparing says that it was asked for ahead: nobody waits for it yet.
	preparing bool
	stop      context.CancelFunc
	// laying stops the node at work, where it has come less than half its way.
	laying context.CancelFunc
	recent []*pulse.Result // newest last
	around anchor.Range    // of density, to be anchored
}

const (
	// mostAhead bounds the runs asked for ahead; more drop the oldest.
	mostAhead = 256
	// mostRecent bounds the results that may be reused, recentNumbers what
	// they hold: 16 MB, of which a result with its evolution is about 1.
	mostRecent    = 32
	recentNumbers = 2 << 20
	// evolutionSamples is the number of places along the fibre of an answer.
	evolutionSamples = 96
)

// NewWorker returns a worker that does nothing until Run.
func NewWorker(o Options) *Worker {
	return &Worker{opt: o, wake: make(chan struct{}, 1)}
}

// Ask asks for the spectrum of s. A newer question replaces one that has not
// begun, and stops one at work that is no longer close to it. A node that has
// come less than half its way waits for it.
func (w *Worker) Ask(s pulse.Setup) {
	w.mu.Lock()
	switch {
	case w.current == nil:
		w.question = &s
		if w.laying != nil {
			w.laying()
		}
	case !alike(*w.current, s):
		w.question = &s
		w.stop()
	case w.preparing || w.question != nil:
		// The run ahead will be the answer; a run that another question has
		// stopped already will not.
		w.question = &s
	}
	w.mu.Unlock()
	w.nudge()
}

// Ahead asks for runs that will be wanted, such as the steps of a scan. They
// are carried out when nothing else waits, and answer later questions at once.
func (w *Worker) Ahead(list ...pulse.Setup) {
	w.mu.Lock()
	w.ahead = append(w.ahead, list...)
	if over := len(w.ahead) - mostAhead; over > 0 {
		w.ahead = append([]pulse.Setup(nil), w.ahead[over:]...)
	}
	w.mu.Unlock()
	w.nudge()
}

// Around says that the density of the gas is now near the given one, in
// mol/m³: nodes are computed there. While the density stays well inside the
// range of an earlier call it changes nothing.
func (w *Worker) Around(density float64) {
	w.mu.Lock()
	inside := w.around.Holds(density*wellInside) && w.around.Holds(density/wellInside)
	if !inside {
		w.around = anchor.Round(density)
	}
	w.mu.Unlock()
	if !inside {
		w.nudge()
	}
}

// wellInside is the factor by which a density may move before it leaves the
// range that is anchored.
const wellInside = 1.1

func (w *Worker) nudge() {
	select {
	case w.wake <- struct{}{}:
	default:
	}
}

// Run works until ctx ends, on a thread that yields to everything else where
// the system knows such. A question goes before nodes; while one is answered
// after the other a node is laid in between.
func (w *Worker) Run(ctx context.Context) {
	defer yieldToOthers()()
	nodes := w.load()
	if w.opt.Bench != nil && len(nodes) > 0 {
		w.opt.Tell(Anchored{w.opt.Bench.Build(nodes), nodes[:len(nodes):len(nodes)], len(nodes), len(nodes)})
	}
	var tasks []anchor.Task
	var planned anchor.Range
	for ctx.Err() == nil {
		if r := w.wanted(); w.opt.Bench != nil && r != planned {
			planned, tasks = r, w.opt.Bench.Plan(nodes, r)
		}
		asked := w.answer(ctx)
		if len(tasks) > 0 && ctx.Err() == nil {
			n, err := w.node(ctx, tasks[0])
			if errors.Is(err, context.Canceled) {
				continue // a question came: the node waits its turn again
			}
			if err == nil {
				nodes = append(nodes, n)
				w.opt.Tell(Anchored{w.opt.Bench.Build(nodes), nodes[:len(nodes):len(nodes)], len(nodes), len(nodes) + len(tasks) - 1})
			}
			tasks = tasks[1:]
			continue
		}
		if asked || w.prepare(ctx) {
			continue
		}
		select {
		case <-ctx.Done():
		case <-w.wake:
		}
	}
}

func (w *Worker) wanted() anchor.Range {
	w.mu.Lock()
	defer w.mu.Unlock()
	return w.around
}

// load reads the nodes that the store keeps.
func (w *Worker) load() []anchor.Node {
	if w.opt.Store == nil {
		return nil
	}
	nodes, _, err := w.opt.Store.Load()
	if err != nil {
		w.opt.Tell(Failed{err})
	}
	return nodes
}

// node carries out one task. Its error has been told, unless a question or
// the end stopped it.
func (w *Worker) node(ctx context.Context, t anchor.Task) (anchor.Node, error) {
	run, stop := context.WithCancel(ctx)
	defer stop()
	w.mu.Lock()
	if w.question != nil {
		w.mu.Unlock()
		return anchor.Node{}, context.Canceled
	}
	w.laying = stop
	w.mu.Unlock()
	keep := func() {
		w.mu.Lock()
		w.laying = nil
		w.mu.Unlock()
	}
	defer keep()
	n, err := w.opt.Bench.Compute(run, t, func(share float64) {
		if share > 0.5 {
			keep() // what is half done is worth finishing
		}
	})
	switch {
	case err != nil && run.Err() != nil:
		return n, context.Canceled
	case err != nil:
		w.opt.Tell(Failed{err})
		return n, err
	}
	if w.opt.Store != nil {
		if err := w.opt.Store.Add(n); err != nil {
			w.opt.Tell(Failed{err})
		}
	}
	return n, nil
}

// answer answers the newest question and reports whether there was one.
func (w *Worker) answer(ctx context.Context) bool {
	w.mu.Lock()
	q := w.question
	w.question = nil
	if q == nil {
		w.mu.Unlock()
		return false
	}
	if r := w.known(*q); r != nil {
		w.mu.Unlock()
		w.opt.Tell(Answered{Question: *q, Result: r})
		return true
	}
	run, stop := context.WithCancel(ctx)
	w.current, w.stop = q, stop
	w.mu.Unlock()
	r, err := w.propagate(run, *q, w.report())
	stop()
	w.mu.Lock()
	w.current = nil
	w.mu.Unlock()
	if errors.Is(err, context.Canceled) {
		return true // a newer question stands, or all ends
	}
	w.opt.Tell(Answered{Question: *q, Result: r, Err: err})
	return true
}

// prepare carries out one run asked for ahead and reports whether there was
// one. A question stops it; it then waits its turn again.
func (w *Worker) prepare(ctx context.Context) bool {
	w.mu.Lock()
	if len(w.ahead) == 0 {
		w.mu.Unlock()
		return false
	}
	s := w.ahead[0]
	w.ahead = w.ahead[1:]
	have := w.known(s) != nil
	run, stop := context.WithCancel(ctx)
	defer stop()
	w.current, w.stop, w.preparing = &s, stop, true
	w.mu.Unlock()
	var err error
	if !have {
		_, err = w.propagate(run, s, nil)
	}
	w.mu.Lock()
	w.current, w.preparing = nil, false
	if errors.Is(err, context.Canceled) && ctx.Err() == nil {
		w.ahead = append([]pulse.Setup{s}, w.ahead...)
		err = nil
	}
	w.mu.Unlock()
	if err != nil && ctx.Err() == nil {
		w.opt.Tell(Failed{err})
	}
	return true
}

func (w *Worker) propagate(ctx context.Context, s pulse.Setup, report func(float64)) (*pulse.Result, error) {
	r, err := s.Run(ctx, pulse.Options{Samples: evolutionSamples, Progress: report})
	if err != nil {
		return nil, err
	}
	w.mu.Lock()
	w.remember(r)
	w.mu.Unlock()
	return r, nil
}

// remember keeps a result for later questions and lets go of the oldest where
// there are too many or too large ones. The caller holds mu.
func (w *Worker) remember(r *pulse.Result) {
	kept := append(slices.Clone(w.recent), r)
	numbers := 0
	for _, k := range kept {
		numbers += size(k)
	}
	for len(kept) > 1 && (len(kept) > mostRecent || numbers > recentNumbers) {
		numbers -= size(kept[0])
		kept = kept[1:]
	}
	w.recent = slices.Clone(kept)
}

// size returns how many numbers a result holds, by its large parts.
func size(r *pulse.Result) int {
	n := len(r.Output.Energy) + len(r.Power)
	for _, s := range r.Evolution {
		n += len(s.Energy)
	}
	return n
}

// report returns a progress function that tells every twentieth.
func (w *Worker) report() func(float64) {
	next := 0.0
	return func(share float64) {
		if share >= next {
			w.opt.Tell(Progress{share})
			next = share + 0.05
		}
	}
}

// known returns a recent result of a setup close to s, or nil. The caller
// holds mu.
func (w *Worker) known(s pulse.Setup) *pulse.Result {
	for i := len(w.recent) - 1; i >= 0; i-- {
		if alike(w.recent[i].Setup, s) {
			return w.recent[i]
		}
	}
	return nil
}

// How close two setups are whose spectra count as the same: emission moves by
// less than 0.1 nm.
const (
	sameDensity = 1e-3
	sameEnergy  = 2e-3
)

// alike reports whether the spectra of two setups count as the same.
func alike(a, b pulse.Setup) bool {
	if !near(float64(a.Gas.Density), float64(b.Gas.Density), sameDensity) ||
		!near(float64(a.Pulse.Energy), float64(b.Pulse.Energy), sameEnergy) || !a.Density.Near(b.Density, sameDensity) {
		return false
	}
	a.Gas.Density, a.Gas.Pressure, a.Gas.Temperature = b.Gas.Density, b.Gas.Pressure, b.Gas.Temperature
	a.Pulse.Energy, a.Density = b.Pulse.Energy, b.Density
	return a == b
}

func near(a, b, relative float64) bool { return math.Abs(a-b) <= relative*math.Abs(b) }
