package pulse

import (
	"fmt"
	"math"
)

// Medium is what the field meets along the fibre, sampled at the kept bins of
// a grid, in ascending frequency. Slices are read, never written.
type Medium struct {
	// Beta holds the coefficients of the propagation constant in 1/m over the
	// relative density r of the gas: β = Beta[0] + Beta[1]·r + Beta[2]·r².
	// Where the density is uniform Beta[0] alone serves; the others may be nil.
	Beta [3][]float64
	// Slowness is the inverse 1/v in s/m of the velocity of the frame.
	Slowness float64
	// Loss is the attenuation of power in 1/m; nil means none.
	Loss []float64
	// Coupling is the factor ω²/(2ε₀c²β) in m/F of the polarisation; nil takes
	// it from Beta at r = 1.
	Coupling []float64
	// Area is the effective area in m².
	Area float64
	// Chi3 is the third-order susceptibility in m²/V² at r = 1.
	Chi3 float64
	// Atoms are the kinds of atom that the field can ionise; none means no
	// plasma.
	Atoms []Atoms
	// Density is the relative density along the fibre; nil means r = 1.
	Density *Profile
	// Length is the length of the fibre in m.
	Length float64
}

// Atoms are the atoms of one kind. Each kind ionises by itself.
type Atoms struct {
	Rate      *RateTable
	Density   float64 // number density in 1/m³ at r = 1
	Potential float64 // ionisation energy of one atom in J
}

// Chi3FromN2 returns χ⁽³⁾ in m²/V² of a dilute gas with the nonlinear index n2
// in m²/W: (4/3) ε₀ c n₂.
func Chi3FromN2(n2 float64) float64 { return 4.0 / 3 * vacuumPermit * lightSpeed * n2 }

func (m *Medium) check(g Grid) error {
	n := g.Bins()
	for i, b := range m.Beta {
		if len(b) != n && (i == 0 || b != nil) {
			return fmt.Errorf("medium: %d values of the propagation constant, want %d", len(b), n)
		}
	}
	for name, s := range map[string][]float64{"loss": m.Loss, "coupling": m.Coupling} {
		if s != nil && len(s) != n {
			return fmt.Errorf("medium: %d values of the %s, want %d", len(s), name, n)
		}
	}
	if !(m.Length > 0) || !(m.Area > 0) || math.IsInf(m.Length+m.Area, 0) {
		return fmt.Errorf("medium: length %g m and effective area %g m², want both above 0", m.Length, m.Area)
	}
	for _, a := range m.Atoms {
		if a.Rate == nil || !(a.Density >= 0 && a.Potential >= 0) || math.IsInf(a.Density+a.Potential, 0) {
			return fmt.Errorf("medium: %g atoms per m³ with an ionisation energy of %g J: want a rate and both finite and at least 0", a.Density, a.Potential)
		}
	}
	for i := range n {
		if b := m.beta(i, 1); !(b > 0) || math.IsInf(b, 0) {
			return fmt.Errorf("medium: propagation constant %g 1/m at %.4g nm, want one above 0: no mode is guided there",
				b, 2*math.Pi*lightSpeed/g.Omega(g.Lo+i)*1e9)
		}
		if m.Loss != nil && !(m.Loss[i] >= 0) {
			return fmt.Errorf("medium: loss %g 1/m, want at least 0", m.Loss[i])
		}
	}
	return nil
}

// beta returns the propagation constant in 1/m of kept bin i at density r.
func (m *Medium) beta(i int, r float64) float64 {
	b := m.Beta[0][i]
	if m.Beta[1] != nil {
		b += m.Beta[1][i] * r
	}
	if m.Beta[2] != nil {
		b += m.Beta[2][i] * r * r
	}
	return b
}
