package live

import (
	"fmt"
	"math"
	"time"

	"barline/model/reading"
	"barline/model/unit"
)

// Tune asks for the pressure at which the source emits at Emission, found from
// the model and corrected on what is measured, one bounded step at a time.
// With Hold the wavelength is then kept by trimming the pressure on a slow
// loop.
type Tune struct {
	Emission unit.Metre
	Hold     bool
	// Bound is how far the pressure may be trimmed to either side while the
	// wavelength is held; 0 is 0.3 bar.
	Bound unit.Pascal
}

func (Tune) intent() {}

const (
	tuneSteps    = 12                    // at most, before giving up
	tuneReach    = 1 * unit.Bar          // of one step
	tuneWithin   = 0.2 * unit.Nanometre  // of the wanted wavelength: there
	tuneDwell    = 5 * time.Second       // of measuring after each step
	trimEvery    = 30 * time.Second      // of holding
	trimDeadband = 0.08 * unit.Nanometre // below it nothing is trimmed
	trimReach    = 20 * unit.Millibar    // of one trim
	trimGain     = 0.5                   // of the model's slope, which may be off by a third
	trimBound    = 0.3 * unit.Bar
	leastSamples = 3 // of measured emission, for a decision
)

// tuning is how far a Tune has come. wanted is 0 where none is under way.
type tuning struct {
	wanted  unit.Metre
	hold    bool
	bound   unit.Pascal
	left    int         // steps before giving up
	base    unit.Pascal // setpoint when holding began; 0 before
	checked time.Duration
	seen    mean // m, since checked
}

// tune begins a Tune, or says why it cannot.
func (c *Core) tune(s *State, in Tune, fx []Effect) ([]Effect, error) {
	bound := in.Bound
	switch {
	case !(in.Emission > 0) || math.IsInf(float64(in.Emission), 0):
		return fx, fmt.Errorf("wavelength %v, expected one above zero", in.Emission)
	case !(bound >= 0):
		return fx, fmt.Errorf("bound %v, expected none below zero", bound)
	case bound == 0:
		bound = trimBound
	}
	s.tuning = tuning{wanted: in.Emission, hold: in.Hold, bound: bound, left: tuneSteps}
	return c.tuneStep(s, fx)
}

// tuneStep goes to where model and measurement together put the wavelength.
func (c *Core) tuneStep(s *State, fx []Effect) ([]Effect, error) {
	t := &s.tuning
	if t.left == 0 {
		was := *t
		*t = tuning{}
		return fx, fmt.Errorf("no closer to %v after %d steps", was.wanted, tuneSteps)
	}
	t.left--
	offset := unit.Metre(0)
	if s.ResidualAt != 0 && s.Now.Mono-s.ResidualAt <= c.stale {
		offset = s.Residual
	}
	target, err := c.pressureFor(s, t.wanted-offset)
	if err != nil {
		*t = tuning{}
		return fx, err
	}
	if s.CoreKnown && s.Reading(reading.Emission, c.stale).Status.Usable() {
		// While the light is seen no step is so long that it could be lost.
		target = min(max(target, s.Core-tuneReach), s.Core+tuneReach)
	}
	keep := *t
	fx = c.start(s, &Program{
		Name:   "tune to " + t.wanted.String(),
		Phases: []Phase{{Label: "tuning to " + t.wanted.String(), Target: target, Dwell: tuneDwell, Row: true}},
	}, fx)
	if s.Mode != Held {
		s.tuning = keep
	}
	return fx, nil
}

// tuned decides what follows when a step of tuning has been measured.
func (c *Core) tuned(s *State, measured mean, fx []Effect) []Effect {
	t := &s.tuning
	stop := func(why string) []Effect {
		*t = tuning{}
		s.Notice = why
		return fx
	}
	if measured.n < leastSamples {
		// Out of sight of the spectrometer the model alone leads on, as far
		// as the pressure that it names.
		if t.left < tuneSteps-1 {
			return stop(fmt.Sprintf("no emission is measured at %v", s.Setpoint))
		}
	} else if away := unit.Metre(measured.value) - t.wanted; math.Abs(float64(away)) <= float64(tuneWithin) {
		if !t.hold {
			return stop(fmt.Sprintf("emission is at %.2f nm", measured.value*1e9))
		}
		t.base, t.checked, t.seen = s.Setpoint, s.Now.Mono, mean{}
		s.Why = "holding " + t.wanted.String()
		return fx
	}
	fx, err := c.tuneStep(s, fx)
	if err != nil {
		return stop(err.Error())
	}
	return fx
}

// keepWavelength trims the pressure of a held wavelength. It does nothing on
// what it cannot trust, and says so.
func (c *Core) keepWavelength(s *State, fx []Effect) []Effect {
	t := &s.tuning
	if t.base == 0 || s.Mode != Steady {
		return fx
	}
	if why := c.distrust(s); why != "" {
		s.Why = "wavelength hold is frozen: " + why
		t.checked, t.seen = s.Now.Mono, mean{}
		return fx
	}
	s.Why = "holding " + t.wanted.String()
	if s.Now.Mono-t.checked < trimEvery || s.awaiting != 0 {
		return fx
	}
	seen := t.seen
	t.checked, t.seen = s.Now.Mono, mean{}
	away := unit.Metre(seen.value) - t.wanted
	slope, ok := c.slope(s)
	if seen.n < leastSamples || math.Abs(float64(away)) < float64(trimDeadband) || !ok {
		return fx
	}
	trim := unit.Pascal(-trimGain * float64(away) / slope)
	trim = min(max(trim, -trimReach), trimReach)
	target := min(max(s.Setpoint+trim, t.base-t.bound), t.base+t.bound)
	if target == s.Setpoint {
		s.Why = fmt.Sprintf("wavelength hold is at its bound, %v from where it began", t.bound)
		return fx
	}
	sp, err := c.limits.Step(s.Setpoint, target, rampEvery)
	if err != nil {
		return c.hold(s, err.Error(), fx)
	}
	return c.send(s, sp, fx)
}

// distrust says what keeps the wavelength from being held now, or "".
func (c *Core) distrust(s *State) string {
	for _, role := range [...]reading.Role{reading.Emission, reading.CellAPressure} {
		if r := s.Reading(role, c.stale); !r.Status.Usable() {
			return fmt.Sprintf("%v: %v", r.Channel, r.Status)
		}
	}
	if !s.Record.Writing {
		return "nothing is being recorded"
	}
	return ""
}

// slope returns how fast the predicted emission moves with pressure now, in
// m/Pa.
func (c *Core) slope(s *State) (float64, bool) {
	const step = 50 * unit.Millibar
	low, high := s.Prediction.Input, s.Prediction.Input
	low.Pressure -= step
	high.Pressure += step
	a, b := c.ask(s).Predict(low, nil), c.ask(s).Predict(high, nil)
	if !a.Valid || !b.Valid || a.Emission == 0 || b.Emission == 0 {
		return 0, false
	}
	slope := float64(b.Emission-a.Emission) / float64(2*step)
	return slope, math.Abs(slope) > 1e-9/1e5 // less than 1 nm/bar leads nowhere
}

// pressureFor returns the pressure within the limits at which the model puts
// the emission, the nearest one to where the gas is.
func (c *Core) pressureFor(s *State, wanted unit.Metre) (unit.Pascal, error) {
	const points = 65 // the emission bends little over a quarter of a bar
	in := s.Prediction.Input
	if in.Temperature == 0 {
		return 0, fmt.Errorf("nothing has been predicted yet")
	}
	most := c.limits.Lowest().Max
	best, found := unit.Pascal(0), false
	var last unit.Metre
	for i := range points {
		in.Pressure = most * unit.Pascal(i) / (points - 1)
		now := c.ask(s).Predict(in, nil)
		if i > 0 && last != 0 && now.Emission != 0 && (last-wanted)*(now.Emission-wanted) <= 0 && last != now.Emission {
			p := in.Pressure - most/(points-1)*unit.Pascal(float64(now.Emission-wanted)/float64(now.Emission-last))
			if !found || math.Abs(float64(p-s.Core)) < math.Abs(float64(best-s.Core)) {
				best, found = p, true
			}
		}
		last = now.Emission
	}
	if !found {
		return 0, fmt.Errorf("at no pressure within the limits does the model put the emission at %v", wanted)
	}
	return best, nil
}
