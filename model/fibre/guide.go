package fibre

import (
	"math"

	"barline/model/gas"
	"barline/model/taylor"
	"barline/model/unit"
)

// Guide is a fibre filled with a gas. It is a value; copying it is cheap.
type Guide struct {
	Fibre *Fibre
	Gas   gas.State
}

// Region says what a number at a frequency is worth.
type Region uint8

const (
	// Guided: inside a transmission band and the range of the formulas.
	Guided Region = iota
	// Resonant: inside the margin of a wall resonance. The number continues
	// the plain capillary form, without the wall.
	Resonant
	// OffRange: the wall's glass or the kagome form has left its range. The
	// number continues the plain capillary form.
	OffRange
	// Dark: nothing is guided, or the gas resonates. There is no number.
	Dark
)

var regionText = [...]string{"guided", "near a wall resonance", "beyond the range of the fibre's formula", "not guided"}

// String says the region in words.
func (r Region) String() string { return regionText[r] }

const c = 299792458.0 // m/s, exact (SI Brochure, 9th ed., 2019)

// Frequency returns the angular frequency in rad/s of a vacuum wavelength.
func Frequency(lambda unit.Metre) float64 { return 2 * math.Pi * c / float64(lambda) }

// Wavelength returns the vacuum wavelength of an angular frequency in rad/s.
func Wavelength(omega float64) unit.Metre { return unit.Metre(2 * math.Pi * c / omega) }

// IndexMinusOne returns n_eff−1 about the angular frequency omega in rad/s,
// exact to the third derivative, and what it is worth. Where the region is
// Dark the number is zero.
func (g *Guide) IndexMinusOne(omega float64) (taylor.Number, Region) {
	lambda := 2 * math.Pi * c / omega
	usable := g.Gas.Usable()
	if !(lambda >= float64(usable.From) && lambda <= float64(usable.To)) {
		return taylor.Number{}, Dark
	}
	return g.Fibre.indexMinusOne(omega, g.Gas.Susceptibility(omega))
}

// indexMinusOne is IndexMinusOne for a gas with n²−1 = chi.
func (f *Fibre) indexMinusOne(omega float64, chi taylor.Number) (taylor.Number, Region) {
	k := taylor.Frequency(omega / c)
	lambda := 2 * math.Pi * c / omega
	ua := f.u / f.radius
	region := Guided
	transverse := k.Inverse().Times(ua) // u/(ka)
	if f.spec.Kind == Kagome {
		if _, reach := f.KagomeReach(); lambda > float64(reach) {
			region = OffRange
		}
		// 1/a(λ) = (1 + sλ²/(a₀t))/a₀, λ² = (2π/k)².
		stretch := 4 * math.Pi * math.Pi * f.spec.KagomeScale / (f.radius * float64(f.spec.Wall))
		k2 := k.Mul(k).Inverse()
		transverse = transverse.Mul(k2.Times(stretch).Plus(1))
	}
	square := chi.Sub(transverse.Mul(transverse)) // n_cap²−1
	if !(square.C0 > -1) {
		return taylor.Number{}, Dark
	}
	n := square.SqrtMinusOne()
	if f.spec.Kind == Antiresonant {
		if !(lambda >= glassFrom && lambda <= glassTo) {
			return n, OffRange
		}
		wall, near := f.wall(omega, k, chi)
		if near {
			return n, Resonant
		}
		n = n.Sub(wall)
	}
	return n, region
}

// wall returns what the thin wall takes from the effective index of the plain
// capillary, and whether omega lies within the margin of a resonance:
//
//	[u²/(k²n²a²)]·(1/(aκ))·½ Σ_{w=1,ε} w cot φ/(1 + w²r²cot²φ)
//
// with κ = k√(n_glass²−n²), φ = κt, ε = (n_glass/n)², r = u/(aκ). Written with
// sin φ and cos φ it is finite at the resonances φ = mπ. HE and EH modes; TE
// takes twice the term w = 1 alone, TM twice w = ε.
//
// Derived from grazing incidence on the wall, bounded at the resonances; away
// from them it is M. Zeisberger, M. A. Schmidt, Sci. Rep. 7, 11761 (2017).
func (f *Fibre) wall(omega float64, k, chi taylor.Number) (taylor.Number, bool) {
	v := omega / (2 * math.Pi * c) * 1e-6
	step := glass(v * v).Sub(chi) // n_glass² − n²
	if !(step.C0 > 0) {
		return taylor.Number{}, true
	}
	kappa := k.Mul(step.Sqrt())
	phase := kappa.Times(float64(f.spec.Wall))
	if f.resonant(phase.C0, phase.C1) {
		return taylor.Number{}, true
	}
	sin, cos := phase.SinCos()
	inverse := kappa.Inverse().Times(1 / f.radius) // 1/(aκ)
	r := inverse.Times(f.u)
	sc, ss, rc := sin.Mul(cos), sin.Mul(sin), r.Mul(cos)
	rrcc := rc.Mul(rc)
	n2 := chi.Plus(1)
	one := sc.Over(ss.Add(rrcc))
	epsilon := step.Over(n2).Plus(1)
	other := epsilon.Mul(sc).Over(ss.Add(epsilon.Mul(epsilon).Mul(rrcc)))
	var sum taylor.Number
	switch f.spec.Mode.Family {
	case TE:
		sum = one
	case TM:
		sum = other
	default:
		sum = one.Add(other).Times(0.5)
	}
	ka := k.Times(f.radius)
	return sum.Mul(inverse).Over(ka.Mul(ka).Mul(n2)).Times(f.u * f.u), false
}

// resonant reports whether the phase lies within the margin of a multiple of
// π: slope is ω·∂φ/∂ω, which turns a distance in phase into one in wavelength.
func (f *Fibre) resonant(phase, slope float64) bool {
	m := math.Max(1, math.Round(phase/math.Pi))
	return math.Abs(phase-m*math.Pi) < float64(f.spec.Margin)*slope
}

// Propagation is the propagation constant at a frequency and its derivatives
// with respect to angular frequency.
type Propagation struct {
	Beta   float64 // 1/m
	Beta1  float64 // s/m
	Beta2  float64 // s²/m
	Beta3  float64 // s³/m
	Region Region
}

// At returns β(ω) = n_eff·ω/c and its exact derivatives at the angular
// frequency omega in rad/s. Where the region is Dark all are zero.
func (g *Guide) At(omega float64) Propagation {
	n, region := g.IndexMinusOne(omega)
	if region == Dark {
		return Propagation{Region: Dark}
	}
	beta := n.Plus(1).Mul(taylor.Frequency(omega / c))
	b0, b1, b2, b3 := beta.Derivatives(omega)
	return Propagation{b0, b1, b2, b3, region}
}

// Beta fills dst with β in 1/m at the angular frequencies omega in rad/s, and
// returns the worst region met. dst and omega have equal length; dst is zero
// where nothing is guided. It allocates nothing.
func (g *Guide) Beta(dst, omega []float64) Region {
	worst := Guided
	for i, w := range omega {
		n, region := g.IndexMinusOne(w)
		dst[i] = 0
		if region != Dark {
			dst[i] = (1 + n.C0) * w / c
		}
		worst = max(worst, region)
	}
	return worst
}

// Gamma returns the nonlinear coefficient n₂ω/(cA_eff) in 1/(W m).
func (g *Guide) Gamma(omega float64) float64 {
	return float64(g.Gas.Kerr()) * omega / (c * g.Fibre.area)
}

// ResonanceDistance returns the distance of omega from the nearest resonance of
// the wall, relative in wavelength, and whether there is such a wall.
func (g *Guide) ResonanceDistance(omega float64) (float64, bool) {
	lambda := 2 * math.Pi * c / omega
	if g.Fibre.spec.Kind == Capillary || !(lambda >= glassFrom && lambda <= glassTo) {
		return 0, false
	}
	v := 1e-6 / lambda
	k := taylor.Frequency(omega / c)
	step := glass(v * v).Sub(g.Gas.Susceptibility(omega))
	if !(step.C0 > 0) {
		return 0, false
	}
	phase := k.Mul(step.Sqrt()).Times(float64(g.Fibre.spec.Wall))
	m := math.Max(1, math.Round(phase.C0/math.Pi))
	return math.Abs(phase.C0-m*math.Pi) / phase.C1, true
}
