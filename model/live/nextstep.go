package live

import (
	"fmt"
	"math"
	"strings"
	"time"

	"barline/model/drift"
	"barline/model/emission"
	"barline/model/unit"
)

// NextStep is something to do that would tell the leading causes apart. It is
// offered, and never begun by itself.
type NextStep struct {
	drift.Worth
	ByHand  string   // what a person has to do; empty where Program does it
	Program *Program // nil where it is done by hand
	looks   []drift.Observable
	quiet   [drift.ObservableCount]float64 // what each looked like before the drift
}

// seenStep is what a step has shown.
type seenStep struct {
	step  drift.Step
	shown []float64
}

const (
	compareDwell = 3 * time.Minute
	backDwell    = time.Minute
	leakDwell    = 10 * time.Minute
	mostOffers   = 4
	leastBits    = 0.05
	// What a place where nothing was learnt is known to: the residual of an
	// anchored prediction with and without a calibration, two gauges that
	// nobody compared there, and the decay of ten minutes (from experience,
	// no source).
	calibratedApart = 0.4e-9
	anchoredApart   = 1e-9
	spansApart      = 7e-4  // of the way there: two spans, each good to half a part in a thousand
	zerosApart      = 100.0 // Pa
	decayApart      = 0.1
	freshApart      = 0.1e-9 // the same place, filled again
	freshTakes      = 30 * time.Minute
)

// offers ranks what to do next by what it would tell an hour.
func (c *Core) offers(s *State, findings []drift.Finding) []NextStep {
	var leading []drift.Finding
	for _, f := range findings {
		if f.Probability >= 0.01 {
			leading = append(leading, f)
		}
	}
	if len(leading) < 2 || leading[0].Probability > 0.95 || !s.CoreKnown {
		return nil
	}
	all := append(c.comparisons(s), c.leakTest(s)...)
	all = append(all, handSteps(s.drift.slopes, c.driftState(s))...)
	steps := make([]drift.Step, len(all))
	for i := range all {
		steps[i] = all[i].Step
	}
	worths, err := drift.Best(leading, steps)
	if err != nil {
		return nil
	}
	var best []NextStep
	for _, w := range worths {
		for _, n := range all {
			if n.Step.Name == w.Step.Name && w.Bits >= leastBits && len(best) < mostOffers {
				n.Worth = w
				best = append(best, n)
			}
		}
	}
	return best
}

// comparisons are visits to other pressures within the limits.
func (c *Core) comparisons(s *State) (all []NextStep) {
	if !c.controlled {
		return nil
	}
	here := s.Setpoint
	if here == 0 {
		here = s.Core
	}
	var quiet [drift.ObservableCount]float64
	for o := range quiet {
		if t, ok := s.drift.monitor.Track(drift.Observable(o)); ok {
			quiet[o] = t.Quiet.Mean
		}
	}
	for _, by := range [...]unit.Pascal{-2 * unit.Bar, -1 * unit.Bar, 1 * unit.Bar, 1*unit.Bar - here} {
		there := unit.Pascal(math.Round(float64((here+by)/unit.Bar)*10)/10) * unit.Bar
		if c.limits.Admissible(there) != nil || there < 0.5*unit.Bar || math.Abs(float64(there-here)) < float64(unit.Bar)/2 {
			continue
		}
		in := s.Prediction.Input
		in.Pressure = there
		p := c.ask(s).Predict(in, nil)
		var sigma [drift.ObservableCount]float64
		state := c.driftState(s)
		state.Pressure = there
		if state.TwoGauges {
			sigma[drift.Disagreement] = math.Hypot(zerosApart, spansApart*float64(there-here))
		}
		var looks []drift.Observable
		var slopes drift.Slopes
		if p.Emission > 0 && p.Answer == emission.Anchored {
			slopes, _ = c.slopesAt(s, p)
			sigma[drift.Wavelength] = anchoredApart
			if p.Calibration != "" && !p.Beyond {
				sigma[drift.Wavelength] = calibratedApart
			}
		}
		for o := range sigma {
			if sigma[o] > 0 {
				looks = append(looks, drift.Observable(o))
			}
		}
		if len(looks) == 0 {
			continue
		}
		name := "compare at " + there.String()
		cost := 2*c.limits.RampTime(here, there) + compareDwell + backDwell
		all = append(all, NextStep{
			Worth: drift.Worth{Step: drift.Elsewhere(name, cost, slopes, state, sigma)}, looks: looks, quiet: quiet,
			Program: &Program{Name: name, Phases: []Phase{
				{Label: "going to " + there.String(), Target: there, Dwell: compareDwell, Row: true},
				{Label: "back to " + here.String(), Target: here, Dwell: backDwell, Row: true},
			}},
		})
	}
	return all
}

// leakTest shuts every valve for ten minutes.
func (c *Core) leakTest(s *State) []NextStep {
	if !c.controlled {
		return nil
	}
	here := s.Setpoint
	if here == 0 {
		here = s.Core
	}
	name := "shut every valve for " + leakDwell.String()
	sigma := [drift.ObservableCount]float64{drift.Decay: decayApart}
	return []NextStep{{
		Worth: drift.Worth{Step: drift.Elsewhere(name, leakDwell+backDwell, s.drift.slopes, c.driftState(s), sigma)}, looks: []drift.Observable{drift.Decay},
		Program: &Program{Name: name, Phases: []Phase{
			{Label: "every valve shut", Action: Isolate, Dwell: leakDwell, Row: true},
			{Label: "back to " + here.String(), Target: here, Dwell: backDwell},
		}},
	}}
}

// handSteps are what only a person can do, with what each would see.
func handSteps(slopes drift.Slopes, b drift.State) (all []NextStep) {
	for _, h := range [...]struct {
		name, what string
		cost       time.Duration
		effect     map[string][]float64
		sigma      []float64
	}{
		{"measure the pulse energy before and behind the fibre", "put the power meter before the fibre and behind it, and compare with the last values noted", 10 * time.Minute,
			map[string][]float64{"pulse energy": {1, 1}, "coupling into the fibre": {0, 1}}, []float64{0.01, 0.015}},
		{"look at a lamp line with the spectrometer", "feed the wavelength lamp into the spectrometer and compare with its table", 15 * time.Minute,
			map[string][]float64{"spectrometer wavelength": {1}}, []float64{0.05e-9}},
		{"measure the pulse duration", "measure the pulse before the fibre", 20 * time.Minute,
			map[string][]float64{"pulse duration": {1}}, []float64{0.02}},
	} {
		all = append(all, NextStep{Worth: drift.Worth{Step: drift.Step{Name: h.name, Cost: h.cost, Effect: h.effect, Sigma: h.sigma}}, ByHand: h.what})
	}
	if slopes.Air != 0 {
		// Whatever else it was stays; air does not.
		fresh := drift.Elsewhere("fill with fresh gas", freshTakes, slopes, b, [drift.ObservableCount]float64{drift.Wavelength: freshApart})
		fresh.Effect["air in the gas"], fresh.Doubt["air in the gas"] = []float64{0}, []float64{0}
		all = append(all, NextStep{Worth: drift.Worth{Step: fresh}, ByHand: "purge, fill from another cylinder to the same pressure, and see whether the emission comes back"})
	}
	return all
}

// Procedure returns the step as a procedure file that barline run takes; ""
// where it is done by hand.
func (n NextStep) Procedure() string {
	if n.Program == nil {
		return ""
	}
	var b strings.Builder
	fmt.Fprintf(&b, "# Would tell the leading causes of a drift apart: %.2f bit expected, about %v.\n", n.Bits, n.Step.Cost.Round(time.Minute))
	fmt.Fprintf(&b, "[procedure]\nname = %q\n", n.Program.Name)
	for _, ph := range n.Program.Phases {
		if ph.Action == Isolate {
			fmt.Fprintf(&b, "\n[[step]]\ndo = \"leak test\"\nfor = \"%.0f s\"\n", ph.Dwell.Seconds())
			continue
		}
		fmt.Fprintf(&b, "\n[[step]]\ndo = \"step\"\nto = %q\ndwell = \"%.0f s\"\n", ph.Target, ph.Dwell.Seconds())
	}
	return b.String()
}

func (n NextStep) offer() StepOffer {
	return StepOffer{Name: n.Step.Name, CostS: n.Step.Cost.Seconds(), Bits: n.Bits, Certain: n.Certain, ByHand: n.Program == nil, Procedure: n.Procedure()}
}

// shown takes what the row of a step that was offered says, and weighs the
// causes anew.
func (c *Core) shown(s *State, row StepData, fx []Effect) []Effect {
	d := &s.drift
	var step *NextStep
	for i := range d.steps {
		if n := &d.steps[i]; n.Program != nil && n.Program.Name == row.Program && row.Step == 1 {
			step = n
		}
	}
	if step == nil {
		return fx
	}
	var z []float64
	for _, o := range step.looks {
		value := map[drift.Observable]*float64{drift.Wavelength: row.ResidualM, drift.Disagreement: row.ApartPa, drift.Decay: row.RatePaS}[o]
		if value == nil {
			return fx // it could not be seen: nothing is learnt
		}
		z = append(z, *value-step.quiet[o])
	}
	findings, err := step.Step.Told(d.findings, z)
	if err != nil {
		return fx
	}
	d.findings, d.alike = findings, nil
	d.seen = append(append([]seenStep(nil), d.seen...), seenStep{step.Step, z})
	d.text = c.sentence(s)
	d.steps = c.offers(s, findings)
	return append(fx, Record{At: s.Now, Kind: KindDrift, Data: c.driftData(s, drift.NoChange)})
}
