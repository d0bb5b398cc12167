package main

import (
	"context"
	"fmt"
	"sync"
	"sync/atomic"
	"time"

	"barline/cmd/barline/fullfield"
	"barline/cmd/barline/loop"
	"barline/model/calibration"
	"barline/model/drift"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/unit"
)

// guided answers from full-field runs where there are some near the gas, and
// by the estimate elsewhere. Every prediction says which it is.
type guided struct {
	anchored *emission.Predictor // nil until enough runs stand
	estimate *emission.Predictor
	// corrector is the calibration in use, laid over anchored answers; nil
	// where there is none.
	corrector *calibration.Corrector
}

// Predict implements live.Predictor.
func (g *guided) Predict(in emission.Input, before *emission.Prediction) emission.Prediction {
	same := func(a emission.Answer) *emission.Prediction {
		if before != nil && before.Answer == a {
			return before
		}
		return nil
	}
	if g.anchored != nil {
		if p := g.anchored.Predict(in, same(emission.Anchored)); p.Emission != 0 {
			return g.corrected(p)
		}
	}
	return g.estimate.Predict(in, same(g.estimate.Setup().Answer))
}

// Slopes implements live.Sloped.
func (g *guided) Slopes(p emission.Prediction) (drift.Slopes, bool) {
	if g.anchored != nil && p.Answer == emission.Anchored {
		return live.SlopesOf(g.anchored, p)
	}
	return live.SlopesOf(g.estimate, p)
}

// curve fills dst with predictions evenly spaced from nothing to most.
func (g *guided) curve(dst []emission.CurvePoint, most unit.Pascal, in emission.Input) {
	var before emission.Prediction
	for i := range dst {
		in.Pressure = most * unit.Pascal(i) / unit.Pascal(max(len(dst)-1, 1))
		before = g.Predict(in, &before)
		dst[i] = before.Point()
	}
}

// anchoring computes full-field runs of the bench beside a dashboard and hands
// the loop a predictor that stands on them as soon as there are enough. What
// the cache holds from an earlier day is there at once.
type anchoring struct {
	session *session
	base    *emission.Predictor // of this goroutine alone: the loop asks its own
	loop    *loop.Loop
	newest  *atomic.Pointer[guided] // for the curve
	told    bool                    // of trouble, once
	noted   int                     // full-field runs that the record has
	asking  *asking
	sigma   *emission.Predictor // anchored; says how sure a spectrum's emission is. Nil until there is one
}

// lookEvery is how often the runs are told where the gas is, wall time.
const lookEvery = 100 * time.Millisecond

// anchor starts the runs; they end with ctx. Where they cannot be had the
// estimate stays, and a note in the record says why.
// base is a predictor that nobody else asks.
func (s *session) anchor(ctx context.Context, base *emission.Predictor, l *loop.Loop, newest *atomic.Pointer[guided], running *sync.WaitGroup, broken breakdown) {
	a := &anchoring{session: s, base: base, loop: l, newest: newest}
	bench, err := base.Setup().AnchorBench()
	if err != nil {
		a.trouble(err)
		return
	}
	o := fullfield.Options{Bench: bench, Tell: a.tell}
	if folder, err := cacheFolder(); err != nil {
		a.trouble(err)
	} else if o.Store, err = fullfield.OpenStore(folder, bench.Spec().Digest()); err != nil {
		a.trouble(err) // the runs then last as long as the program
	}
	if a.asking, err = newAsking(base); err != nil {
		a.trouble(err)
		return
	}
	l.Propagation(a.asking.waiting(0))
	worker := fullfield.NewWorker(o)
	running.Go(func() { broken.guard("the full-field runs", func() { worker.Run(ctx) }) })
	running.Go(func() { broken.guard("the asking for full-field runs", func() { a.look(ctx, worker) }) })
}

// look tells the worker where the gas is, and asks for its spectrum.
func (a *anchoring) look(ctx context.Context, worker *fullfield.Worker) {
	tick := time.NewTicker(lookEvery)
	defer tick.Stop()
	failed := false
	for {
		select {
		case <-ctx.Done():
			return
		case <-tick.C:
		}
		s := a.loop.Snapshot()
		if s.CoreKnown && s.Prediction.Density > 0 {
			worker.Around(float64(s.Prediction.Density))
		}
		setup, ok, err := a.asking.next(time.Now(), s)
		switch {
		case err != nil && !failed: // such as a pressure that is no gas: said once
			failed = true
			a.loop.Propagated(&live.Propagated{Input: s.Prediction.Input, Asked: s.Now, Err: err.Error()})
		case ok:
			failed = false
			a.loop.Propagation(a.asking.waiting(0))
			worker.Ask(setup)
		}
	}
}

// tell takes what the worker has to say, on its goroutine.
func (a *anchoring) tell(e fullfield.Event) {
	switch e := e.(type) {
	case fullfield.Anchored:
		changed := live.ModelChanged{At: a.session.clock.Now(), Nodes: e.Done, NodesPlanned: e.Planned}
		if e.Map.Usable() {
			p, err := a.base.Anchored(e.Map)
			if err != nil {
				a.trouble(err)
				return
			}
			a.newest.Store(&guided{anchored: p.Clone(), estimate: a.base.Clone()})
			a.sigma = p.Clone()
			changed.Runs, a.noted = e.Nodes[a.noted:], len(e.Nodes)
			changed.Predictor, changed.Answer = &guided{anchored: p, estimate: a.base.Clone()}, p.Setup().Answer.String()
			if rms, tested := e.Map.LeftOut(); tested > 0 {
				changed.LeftOutMetres = rms
			}
		}
		a.loop.Model(changed)
	case fullfield.Progress:
		a.loop.Propagation(a.asking.waiting(e.Share))
	case fullfield.Answered:
		p, ok := a.asking.answered(time.Now(), e)
		if !ok {
			return
		}
		if a.sigma != nil && p.Emission != 0 {
			if same := a.sigma.Predict(p.Input, nil); same.Answer == emission.Anchored && same.Emission != 0 {
				p.Sigma = same.Sigma
			}
		}
		a.loop.Propagated(p)
		a.loop.Propagation(a.asking.waiting(0))
	case fullfield.Failed:
		a.trouble(e.Err)
	}
}

// trouble notes once in the record why the anchored answer is not to be had.
func (a *anchoring) trouble(err error) {
	if !a.told {
		a.told = true
		a.loop.Do(live.Note{Text: fmt.Sprintf("full-field runs: %v", err)})
	}
}
