package main

import (
	"fmt"
	"math"
	"sync"
	"time"

	"barline/cmd/barline/fullfield"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/pulse"
	"barline/model/reading"
	"barline/model/unit"
)

// asking decides for which state of the bench a full-field run is worth its
// second of a core: one that has moved since the last, when that is answered,
// and after a rest as long as it took, so that a gas that never stands still
// costs half a core.
type asking struct {
	ready pulse.Setup         // but for gas and energy
	base  *emission.Predictor // of the asking goroutine alone

	mu       sync.Mutex
	busy     bool
	dropped  bool        // the one before was
	question pulse.Setup // the one under way, or the last
	state    question    // behind it
	began    time.Time   // on the wall
	rested   time.Time   // when the next may begin
}

// question is what a run was asked for.
type question struct {
	in emission.Input
	at reading.Stamp
}

// When inputs count as moved: the emission follows density by some 90 nm and
// energy by some 20 nm a relative unit, so that these are about 0.1 nm.
const (
	movedDensity = 1e-3
	movedEnergy  = 5e-3
	// Beyond these what is being computed is of little use and is dropped; not
	// twice in a row, or a fast fill would never show a spectrum.
	leftDensity = 0.3
	leftEnergy  = 0.3
)

// longestRest bounds the rest after a run. One that took longer than this ran
// on a machine that is busy with something else, to which it yields anyway.
const longestRest = 700 * time.Millisecond

func newAsking(base *emission.Predictor) (*asking, error) {
	s := base.Setup()
	a := &asking{base: base.Clone()}
	state, err := base.Medium().At(unit.Bar, roomTemperature, 0)
	if err != nil {
		return nil, fmt.Errorf("full-field runs: %w", err)
	}
	a.ready, err = pulse.Setup{Fibre: base.Fibre(), Gas: state, Pulse: s.Pulse, Plasma: s.Plasma}.Prepare()
	if err != nil {
		return nil, fmt.Errorf("full-field runs: %w", err)
	}
	return a, nil
}

// roomTemperature serves to prepare ionisation rates, which do not know it.
const roomTemperature = unit.Kelvin(295.15)

// next returns the question that the bench poses now, if it is worth one.
func (a *asking) next(now time.Time, s *live.Snapshot) (setup pulse.Setup, ok bool, err error) {
	if !s.CoreKnown || s.Prediction.Input.Pressure <= 0 || !(s.Prediction.Input.Energy > 0) {
		return setup, false, nil
	}
	in := s.Prediction.Input
	in.Pressure = s.Core
	state, err := a.base.Medium().At(in.Pressure, in.Temperature, in.Air)
	if err != nil || !(state.Density > 0) {
		return setup, false, err
	}
	setup = a.ready
	setup.Gas, setup.Pulse.Energy = state, in.Energy
	if setup.Density, err = along(float64(a.base.Fibre().Spec().Length), s.Profile, s.Core); err != nil {
		return setup, false, err
	}

	a.mu.Lock()
	defer a.mu.Unlock()
	far := func(density, energy float64) bool {
		was := &a.question
		return math.Abs(float64(state.Density-was.Gas.Density)) > density*float64(was.Gas.Density) ||
			math.Abs(float64(in.Energy-was.Pulse.Energy)) > energy*float64(was.Pulse.Energy) ||
			apart(setup.Density, was.Density, float64(a.base.Fibre().Spec().Length)) > density || in.Air != a.state.in.Air
	}
	first := a.began.IsZero()
	switch {
	case !first && !far(movedDensity, movedEnergy):
		return setup, false, nil
	case a.busy && (a.dropped || !far(leftDensity, leftEnergy)):
		return setup, false, nil
	case !a.busy && now.Before(a.rested):
		return setup, false, nil
	}
	a.dropped = a.busy
	a.busy, a.question, a.began = true, setup, now
	a.state = question{in: in, at: s.Now}
	return setup, true, nil
}

// along returns the density along the fibre relative to that at the point of
// compression; nil where the gas stands even.
func along(length float64, profile []unit.Pascal, core unit.Pascal) (*pulse.Profile, error) {
	even := true
	z, ratio := make([]float64, len(profile)), make([]float64, len(profile))
	for i, p := range profile {
		z[i] = length * float64(i) / float64(max(len(profile)-1, 1))
		ratio[i] = max(float64(p/core), 0)
		even = even && math.Abs(ratio[i]-1) < movedDensity
	}
	if even || len(profile) < 2 {
		return nil, nil
	}
	return pulse.NewProfile(z, ratio)
}

// apart returns by how much two profiles differ; nil is an even one.
func apart(p, q *pulse.Profile, length float64) (most float64) {
	const places = 8
	for i := range places + 1 {
		z := length * float64(i) / places
		most = max(most, math.Abs(p.At(z)-q.At(z)))
	}
	return most
}

// answered takes an answer and returns what the screen is to show; false where
// it belongs to a question that was dropped.
func (a *asking) answered(now time.Time, e fullfield.Answered) (*live.Propagated, bool) {
	a.mu.Lock()
	defer a.mu.Unlock()
	if !a.busy || e.Question != a.question {
		return nil, false
	}
	took := now.Sub(a.began)
	a.busy, a.dropped, a.rested = false, false, now.Add(min(took, longestRest))
	if e.Err != nil {
		return &live.Propagated{Input: a.state.in, Asked: a.state.at, Took: took, Err: e.Err.Error()}, true
	}
	p, err := fullfield.Picture(e.Result)
	if err != nil {
		p = &live.Propagated{Input: a.state.in, Err: err.Error()}
	}
	p.Asked, p.Took, p.Input.Air = a.state.at, took, a.state.in.Air
	return p, true
}

// waiting says what is under way.
func (a *asking) waiting(share float64) live.Propagation {
	a.mu.Lock()
	defer a.mu.Unlock()
	p := live.Propagation{On: true, Busy: a.busy}
	if a.busy {
		p.For, p.Share = a.state.in, share
	}
	return p
}
