package pulse

import (
	"fmt"
	"math"
)

// RateTable gives the ionisation rate in a field, as a table over |E| in equal
// steps with straight lines between. A fast table is worth its memory: the
// rate is asked for at every instant of every evaluation.
type RateTable struct {
	low, high float64 // V/m; below low the rate is zero
	inverse   float64 // 1/step
	rates     []ratePair
}

// ratePair holds the rate that makes the electrons which the mode sees, and
// the rate that takes energy from it, both in 1/s.
type ratePair struct{ electrons, loss float64 }

// rateSteps keeps the interpolation error of the steepest part that matters
// below 1e-5 of the rate.
const rateSteps = 4096

// NewRateTable tabulates two rates in 1/s over |E| in V/m from low to high.
// The first makes the electrons that the mode sees, the second takes energy
// from the mode; without an average over the mode they are the same.
func NewRateTable(low, high float64, rate func(field float64) (electrons, loss float64)) (*RateTable, error) {
	if !(low >= 0 && high > low) {
		return nil, fmt.Errorf("ionisation table from %g to %g V/m: want an ascending range", low, high)
	}
	t := &RateTable{low: low, high: high, inverse: rateSteps / (high - low), rates: make([]ratePair, rateSteps+2)}
	for i := range t.rates {
		e, l := rate(low + float64(i)/t.inverse)
		if !(e >= 0 && l >= 0) || math.IsInf(e+l, 0) {
			return nil, fmt.Errorf("ionisation rate at %g V/m is %g and %g 1/s: want finite ones", low+float64(i)/t.inverse, e, l)
		}
		t.rates[i] = ratePair{e, l}
	}
	return t, nil
}

// at returns the rates at the field strength a, at least low. Above the table
// they stay at its last value.
func (t *RateTable) at(a float64) ratePair {
	x := (min(a, t.high) - t.low) * t.inverse
	i := int(x)
	f := x - float64(i)
	p := (*[2]ratePair)(t.rates[i:])
	return ratePair{
		p[0].electrons + f*(p[1].electrons-p[0].electrons),
		p[0].loss + f*(p[1].loss-p[0].loss),
	}
}
