package calibration

import (
	"math"

	"barline/model/unit"
)

// The bend is Legendre polynomials of degree 0 to 3 over the pressures of the
// points. With this share of the discrepancy as the standard deviation of each
// coefficient the bend has the discrepancy as its own, averaged over the range:
// the mean square of the polynomial of degree k is 1/(2k+1).
const (
	bendTerms = 4
	bendShare = 0.772
)

// bend returns by how much the answer is bent at a pressure, m. Beyond the
// points it goes on for a tenth of their range and then stays.
func bend(coefficients []float64, p unit.Pascal, span [2]float64) float64 {
	if len(coefficients) < bendTerms || !(span[1] > span[0]) {
		return 0
	}
	sum := 0.0
	for k := range bendTerms {
		sum += coefficients[k] * legendre(k, p, span)
	}
	return sum
}

// legendre returns the polynomial of degree k at a pressure.
func legendre(k int, p unit.Pascal, span [2]float64) float64 {
	x := (2*float64(p) - span[0] - span[1]) / (span[1] - span[0])
	x = math.Max(math.Min(x, 1.2), -1.2)
	return [bendTerms]float64{1, x, (3*x*x - 1) / 2, (5*x*x*x - 3*x) / 2}[k]
}

// MostBent returns the largest bend between the pressures of the points.
func (c *Calibration) MostBent() unit.Metre {
	most := 0.0
	for i := range 41 {
		p := c.PressurePa[0] + (c.PressurePa[1]-c.PressurePa[0])*float64(i)/40
		most = math.Max(most, math.Abs(bend(c.BendM[:], unit.Pascal(p), c.PressurePa)))
	}
	return unit.Metre(most)
}
