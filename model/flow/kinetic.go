package flow

import (
	"math"
	"sync"

	"barline/model/unit"
)

// Flow through a round channel of radius a, from molecular to viscous, with
// the Knudsen number Kn = ℓ/a and ℓ = (η/p)·√(πRT/2M):
//
//	ṅ/πa² = −(ρ/p)·(a²/8η)·p·(1 + α·Kn)·(1 + 4·Kn/(1+Kn)) · dp/dz
//	α     = (128/15π²)·arctan(4·Kn^0.4)
//
// Source: A. Beskok & G.E. Karniadakis, Microscale Thermophys. Eng. 3, 43
// (1999), with b = −1 and full accommodation. p·Kn is a constant of gas,
// temperature and radius, here κ; with x = p/κ = 1/Kn the bracket becomes
//
//	p·(…)(…) = κ·h(x),  h(x) = (x + α(1/x))·(1 + 4/(1+x))
//
// which is finite down to x = 0, and the flow is the gradient of a potential,
//
//	ṅ/πa² = −(1/Z)·G·dΨ/dz,  Ψ(x) = ∫₀ˣ h,  G = a²κ²/(8ηRT),  Z = p/(ρRT).
//
// Differences of Ψ between cells make the steady profile of a viscous gas
// exactly linear in p², however coarse the grid.

// slope0 is h at x = 0, which makes the flow Knudsen's 2πa³v̄/3L.
const slope0 = 5 * 64 / (15 * math.Pi)

// rarefied returns κ = p·Kn in Pa for a channel of radius a in m filled with
// gas of viscosity eta in Pa s.
func rarefied(m Medium, eta, a float64, t unit.Kelvin) float64 {
	return eta / a * math.Sqrt(math.Pi*GasConstant*float64(t)/(2*m.MolarMass))
}

// Ψ has no closed form. What is tabulated is V = Ψ/x − x/2, which goes from
// slope0 at x = 0 to 4, over q = x^¼, in which it is smooth, up to x = qEnd⁴:
// 40 bar of argon in a bore of 0.1 mm. Beyond, V − 4 falls as x^−0.4.
const (
	qEnd  = 32.0
	qSize = 1601
	qStep = qEnd / (qSize - 1)
)

// vTable holds V and dV/dq·qStep side by side.
type vTable [qSize][2]float64

// potentials is built once and only read afterwards.
var potentials = sync.OnceValue(func() *vTable {
	t := new(vTable)
	integrand := func(q float64) float64 { // of ∫ α(1+4/(1+s)) ds with s = q⁴
		x := q * q * q * q
		return alpha(x) * (1 + 4/(1+x)) * 4 * q * q * q
	}
	// Gauss–Legendre with three points per half interval.
	const r = 0.7745966692414834 // √(3/5)
	t[0] = [2]float64{slope0, 0}
	sum := 0.0
	for i := 1; i < qSize; i++ {
		for half := range 2 {
			mid := qStep * (float64(i) - 0.75 + 0.5*float64(half))
			h := qStep / 4
			sum += h / 9 * (5*integrand(mid-r*h) + 8*integrand(mid) + 5*integrand(mid+r*h))
		}
		q := qStep * float64(i)
		x := q * q * q * q
		rest := 4*(x-math.Log1p(x)) + sum // Ψ − x²/2
		slope := (4*x/(1+x))*4*q*q*q + integrand(q)
		t[i] = [2]float64{rest / x, (slope/x - 4*rest/(x*q)) * qStep}
	}
	return t
})

// alpha is the coefficient of Beskok & Karniadakis at x = 1/Kn.
func alpha(x float64) float64 {
	return 128 / (15 * math.Pi * math.Pi) * math.Atan(4*math.Pow(x, -0.4))
}

// potential returns Ψ(x) and h(x) = dΨ/dx for x >= 0.
func (t *vTable) potential(x float64) (psi, h float64) {
	k := math.Sqrt(math.Sqrt(x)) * (1 / qStep)
	if !(k < qSize-1) {
		rest := (t[qSize-1][0] - 4) * math.Pow(x/(qEnd*qEnd*qEnd*qEnd), -0.4)
		return x * (0.5*x + 4 + rest), x + 4 + 0.6*rest
	}
	i := int(k)
	s := k - float64(i)
	n0, n1 := &t[i], &t[i+1]
	rise := n1[0] - n0[0]
	c2 := 3*rise - 2*n0[1] - n1[1]
	c3 := n0[1] + n1[1] - 2*rise
	v := n0[0] + s*(n0[1]+s*(c2+s*c3))
	slope := n0[1] + s*(2*c2+s*3*c3)
	return x * (0.5*x + v), x + v + 0.25*k*slope // x·dV/dx = ¼q·dV/dq
}
