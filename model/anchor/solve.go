package anchor

import (
	"math"

	"barline/model/fibre"
	"barline/model/unit"
)

// mismatch is Δβ(ω) = β(ω) − β(ω₀) − β₁(ω₀)(ω−ω₀) of one guide.
type mismatch struct {
	guide fibre.Guide
	pump  fibre.Propagation
	omega float64 // of the pump, rad/s
}

func mismatchOf(g fibre.Guide, omega float64) mismatch {
	return mismatch{g, g.At(omega), omega}
}

// at returns Δβ in 1/m and its derivative in s/m; ok is false where nothing is
// guided.
func (m *mismatch) at(omega float64) (delta, slope float64, ok bool) {
	p := m.guide.At(omega)
	if p.Region == fibre.Dark {
		return 0, 0, false
	}
	return p.Beta - m.pump.Beta - m.pump.Beta1*(omega-m.omega), p.Beta1 - m.pump.Beta1, true
}

// Solve returns the angular frequency near start, in rad/s, at which Δβ of the
// guide equals kappa in 1/m. It stays on the rising side, on which emission is,
// and gives up rather than wander off.
func Solve(g fibre.Guide, pump, kappa, start float64) (omega float64, ok bool) {
	m := mismatchOf(g, pump)
	omega = start
	for range 30 {
		delta, slope, guided := m.at(omega)
		if !guided || !(slope > 0) {
			return 0, false
		}
		step := (kappa - delta) / slope
		step = min(max(step, -0.03*start), 0.03*start)
		omega += step
		if math.Abs(step) < 1e-12*start {
			return omega, math.Abs(omega-start) < 0.3*start
		}
	}
	return 0, false
}

// apart returns the distance in wavelength of two angular frequencies.
func apart(a, b float64) unit.Metre {
	return unit.Metre(math.Abs(float64(fibre.Wavelength(a) - fibre.Wavelength(b))))
}
