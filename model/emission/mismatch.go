package emission

import (
	"math"

	"barline/model/fibre"
	"barline/model/taylor"
)

const c = 299792458.0 // m/s, exact (SI Brochure, 9th ed., 2019)

// mismatch is Δβ(ω) − κ(ω) of one guide, pump and pulse.
type mismatch struct {
	guide fibre.Guide
	omega float64       // pump, rad/s
	pump  taylor.Number // n_eff−1 at the pump
	// κ = fixed + strength·(ωt₀)^(2/3), in 1/m: fixed for the anchored answer,
	// strength for the estimate, both zero for the linear one.
	fixed, strength, t0 float64
}

// at returns Δβ and its derivative with respect to ω, β₂ and β₃ at omega in
// rad/s, and κ with its derivative. Working with n_eff−1 keeps the digits that
// the three large terms of Δβ would lose.
type point struct {
	delta, slope     float64 // Δβ in 1/m, ∂Δβ/∂ω in s/m
	beta2, beta3     float64
	kappa, kappaRise float64 // 1/m, s/m
	region           fibre.Region
}

func (m *mismatch) at(omega float64) point {
	n, region := m.guide.IndexMinusOne(omega)
	if region == fibre.Dark {
		return point{region: region}
	}
	p := point{region: region}
	group := m.pump.C0 + m.pump.C1 // n_group−1 at the pump
	p.delta = (n.C0*omega - m.pump.C0*m.omega - group*(omega-m.omega)) / c
	p.slope = (n.C0 + n.C1 - group) / c
	// β = ω(1+n)/c: β₂ = (2n₁ + 2n₂)/(cω), β₃ = (6n₂ + 6n₃)/(cω²) in relative
	// Taylor coefficients.
	p.beta2 = 2 * (n.C1 + n.C2) / (c * omega)
	p.beta3 = 6 * (n.C2 + n.C3) / (c * omega * omega)
	p.kappa = m.fixed
	if m.strength != 0 {
		k := m.strength * math.Cbrt(omega*m.t0*omega*m.t0)
		p.kappa += k
		p.kappaRise = 2.0 / 3 * k / omega
	}
	return p
}

func (p point) excess() float64 { return p.delta - p.kappa }
func (p point) rise() float64   { return p.slope - p.kappaRise }

// delta returns Δβ alone at omega in rad/s.
func (m *mismatch) delta(omega float64) float64 {
	n, _ := m.guide.IndexMinusOne(omega)
	return (n.C0*omega - m.pump.C0*m.omega - (m.pump.C0+m.pump.C1)*(omega-m.omega)) / c
}

// repump returns Δβ of another guide at omega with the same pump frequency.
func (m *mismatch) with(g *fibre.Guide) mismatch {
	other := *m
	other.guide = *g
	other.pump, _ = g.IndexMinusOne(m.omega)
	return other
}
