package plan

import (
	"context"
	"math"

	"barline/model/emission"
	"barline/model/unit"
)

// Light is what full-field propagation found.
type Light struct {
	Emission   unit.Metre // centroid; 0 where nothing is emitted
	Width      unit.Metre
	Conversion unit.Fraction // of the output energy
	Ionised    unit.Fraction
	Reliable   bool
	Reasons    []string // why not
}

// Run propagates one input of a setup.
type Run func(ctx context.Context, s emission.Setup, in emission.Input) (Light, error)

// Confirmed is a choice as propagation has it.
type Confirmed struct {
	First    Light       // at the pressure of the plan
	Pressure unit.Pascal // corrected
	Light    Light       // there
	Limits   []Limit     // there; propagation replaces the rough ionised fraction by its own

	PerPressure float64 // m/Pa, between two runs
	PerEnergy   float64 // m for the whole of the energy, between two runs
	SlopesKnown bool
	Runs        int
}

// RunsToConfirm is the most that Confirm asks for.
const RunsToConfirm = 5

// Where Confirm stops, and how it steps.
const (
	confirmWithin = 1 * unit.Nanometre
	longStep      = 0.15 // of the pressure, at most
	leastStep     = 0.01
	energyStep    = 0.03
)

// Confirm asks propagation about a choice: at its pressure, then at pressures
// corrected until the emission is within a nanometre of the middle of what the
// choice covers, then with a little more energy. said is told after each run.
// An emission that is not there is a finding, not an error.
func (q Question) Confirm(ctx context.Context, c Choice, run Run, said func(done int)) (Confirmed, error) {
	setup := q.setupFor(c.Gas)
	target := (c.Covers.From + c.Covers.To) / 2
	var out Confirmed
	ask := func(p unit.Pascal, e unit.Joule) (Light, error) {
		l, err := run(ctx, setup, emission.Input{Pressure: p, Temperature: q.Temperature, Energy: e, Air: q.Air})
		out.Runs++
		said(out.Runs)
		return l, err
	}
	at, slope := c.Pressure, c.PerPressure
	light, err := ask(at, c.Energy)
	if err != nil {
		return out, err
	}
	out.First = light
	known := false
	for light.Emission > 0 && out.Runs < RunsToConfirm-1 {
		off := float64(target - light.Emission)
		if known && math.Abs(off) <= float64(confirmWithin) {
			break
		}
		step := 0.0
		if slope != 0 {
			step = off / slope / float64(at)
		}
		step = min(max(step, -longStep), longStep)
		if math.Abs(step) < leastStep { // far enough apart for a slope
			step = math.Copysign(leastStep, step)
		}
		next := at * unit.Pascal(1+step)
		other, err := ask(next, c.Energy)
		if err != nil {
			return out, err
		}
		if other.Emission == 0 {
			break
		}
		slope, known = float64(other.Emission-light.Emission)/float64(next-at), true
		farther := math.Abs(float64(target-other.Emission)) >= math.Abs(off)
		if farther && math.Abs(off) <= float64(confirmWithin) {
			break // it was near enough already
		}
		at, light = next, other
	}
	out.Pressure, out.Light = at, light
	if light.Emission > 0 && known {
		more, err := ask(at, c.Energy*(1+energyStep))
		if err != nil {
			return out, err
		}
		if more.Emission > 0 {
			out.PerPressure, out.PerEnergy, out.SlopesKnown = slope, float64(more.Emission-light.Emission)/energyStep, true
		}
	}
	if p, err := emission.NewPredictor(setup); err == nil {
		pr := p.Predict(emission.Input{Pressure: at, Temperature: q.Temperature, Energy: c.Energy, Air: q.Air}, nil)
		out.Limits = q.limits(nil, &pr, p.Medium())
	}
	return out, nil
}
