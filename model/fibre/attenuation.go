package fibre

import (
	"math"
)

// Decibel returns the attenuation of power in dB/m at omega in rad/s: what the
// bench file gives, raised near the resonances of a thin wall by as much as one
// such wall leaks more there than halfway between resonances. The leakage of
// one wall is far above that of a real cladding, so that only its shape counts.
func (g *Guide) Decibel(omega float64) float64 {
	return g.Attenuation(omega) / neperPerDecibel
}

// Attenuation is Decibel in 1/m of power.
func (g *Guide) Attenuation(omega float64) float64 {
	lambda := 2 * math.Pi * c / omega
	given := g.Fibre.spec.Loss.at(lambda) * neperPerDecibel
	if g.Fibre.spec.Kind == Antiresonant && given > 0 {
		return given * g.Fibre.resonantRise(omega, g.Gas.Susceptibility(omega).C0)
	}
	return given
}

// Bore returns the attenuation of power in 1/m at omega in rad/s of a smooth
// bore in thick glass, below which no capillary gets:
// 2(u/2π)²(λ²/a³)V with v = n_glass/n and V = (v²+1)/(2√(v²−1)) for HE and EH,
// 1/√(v²−1) for TE, v²/√(v²−1) for TM.
//
// Source: E. A. J. Marcatili, R. A. Schmeltzer, Bell Syst. Tech. J. 43, 1783
// (1964), doi:10.1002/j.1538-7305.1964.tb04108.x.
func (g *Guide) Bore(omega float64) float64 {
	f := g.Fibre
	lambda := 2 * math.Pi * c / omega
	n := glassIndex(math.Min(math.Max(lambda, glassFrom), glassTo))
	v2 := n * n / (1 + g.Gas.Susceptibility(omega).C0)
	root := math.Sqrt(v2 - 1)
	v := (v2 + 1) / (2 * root)
	switch f.spec.Mode.Family {
	case TE:
		v = 1 / root
	case TM:
		v = v2 / root
	}
	s := f.u / (2 * math.Pi)
	return 2 * s * s * lambda * lambda / (f.radius * f.radius * f.radius) * v
}

// Leakage returns the attenuation of power in 1/m by the leak of a single thin
// wall, 2k Im n_eff, at omega in rad/s. It is zero for the other kinds and
// outside the range of the glass.
func (g *Guide) Leakage(omega float64) float64 {
	if g.Fibre.spec.Kind != Antiresonant {
		return 0
	}
	chi := g.Gas.Susceptibility(omega).C0
	sin, cos, ok := g.Fibre.wallPhase(omega, chi)
	if !ok {
		return 0
	}
	return g.Fibre.leak(omega, chi, sin, cos)
}

// wallPhase returns sine and cosine of φ = κt.
func (f *Fibre) wallPhase(omega, chi float64) (sin, cos float64, ok bool) {
	lambda := 2 * math.Pi * c / omega
	if !(lambda >= glassFrom && lambda <= glassTo) {
		return 0, 0, false
	}
	v := 1e-6 / lambda
	step := glass(v*v).C0 - chi
	if !(step > 0) {
		return 0, 0, false
	}
	sin, cos = math.Sincos(omega / c * math.Sqrt(step) * float64(f.spec.Wall))
	return sin, cos, true
}

// leak is Leakage for a given phase of the wall:
// Im n = [u²/(k²n²a²)]·(1/(aκ))·½Σ w²r/(sin²φ + w²r²cos²φ).
func (f *Fibre) leak(omega, chi, sin, cos float64) float64 {
	k := omega / c
	v := omega / (2 * math.Pi * c) * 1e-6
	step := glass(v*v).C0 - chi
	kappa := k * math.Sqrt(step)
	r := f.u / (f.radius * kappa)
	term := func(w float64) float64 { return w * w * r / (sin*sin + w*w*r*r*cos*cos) }
	epsilon := 1 + step/(1+chi)
	sum := 0.5 * (term(1) + term(epsilon))
	switch f.spec.Mode.Family {
	case TE:
		sum = term(1)
	case TM:
		sum = term(epsilon)
	}
	ka := k * f.radius
	return 2 * k * f.u * f.u / (ka * ka * (1 + chi)) * sum / (f.radius * kappa)
}

// resonantRise returns the leak of the wall over that halfway between two
// resonances, at least 1 by construction.
func (f *Fibre) resonantRise(omega, chi float64) float64 {
	sin, cos, ok := f.wallPhase(omega, chi)
	if !ok {
		return 1
	}
	return f.leak(omega, chi, sin, cos) / f.leak(omega, chi, 1, 0)
}
