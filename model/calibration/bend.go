package calibration

import (
	"math"

	"barline/model/emission"
	"barline/model/unit"
)

// The bend is Legendre polynomials of degree 0 to 3 over the pressures of the
// points, and a slope over their energies that may itself turn with pressure.
// With this share of the discrepancy as the standard deviation of each
// coefficient over pressure the bend has the discrepancy as its own, averaged
// over the range: the mean square of the polynomial of degree k is 1/(2k+1).
// Over energy a change of a tenth may bend by half of the discrepancy.
const (
	bendTerms   = 6
	bendShare   = 0.772
	energyShare = 0.5
	energyUnit  = 0.1 // relative
)

// bendPrior returns the standard deviation of a coefficient as a share of the
// discrepancy.
func bendPrior(term int) float64 {
	if term >= 4 {
		return energyShare
	}
	return bendShare
}

// bent returns by how much the answer is bent at an input, m. Beyond the
// points it goes on for a tenth of their range and then stays.
func (c *Calibration) bent(coefficients []float64, in emission.Input) float64 {
	terms := c.bendAt(in)
	sum := 0.0
	for k, b := range coefficients[:min(len(coefficients), bendTerms)] {
		sum += b * terms[k]
	}
	return sum
}

// bendAt returns the terms of the bend at an input.
func (c *Calibration) bendAt(in emission.Input) [bendTerms]float64 {
	x, y := 0.0, 0.0
	if low, high := c.PressurePa[0], c.PressurePa[1]; high > low {
		x = beyond((2*float64(in.Pressure)-low-high)/(high-low), 1)
	}
	if low, high := c.EnergyJ[0], c.EnergyJ[1]; high > 0 {
		middle := (low + high) / 2
		y = beyond(float64(in.Energy)/middle-1, (high-low)/(2*middle)) / energyUnit
	}
	return [bendTerms]float64{1, x, (3*x*x - 1) / 2, (5*x*x*x - 3*x) / 2, y, x * y}
}

// beyond keeps x within a tenth beyond the range of -most to most.
func beyond(x, most float64) float64 { return math.Max(math.Min(x, 1.2*most), -1.2*most) }

// MostBent returns the largest bend between the pressures of the points, in the
// middle of their energies.
func (c *Calibration) MostBent() unit.Metre {
	most := 0.0
	for i := range 41 {
		in := emission.Input{Energy: unit.Joule((c.EnergyJ[0] + c.EnergyJ[1]) / 2)}
		in.Pressure = unit.Pascal(c.PressurePa[0] + (c.PressurePa[1]-c.PressurePa[0])*float64(i)/40)
		most = math.Max(most, math.Abs(c.bent(c.BendM[:], in)))
	}
	return unit.Metre(most)
}
