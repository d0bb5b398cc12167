package simulate

import (
	"math"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/unit"
	"barline/simulate/panel"
)

// light is what the fibre emits, by the truth.
//
// The emission stands where the phase mismatch between the mode and the
// soliton that the pulse has become equals κ:
//
//	β(ω) − β(ω₀) − β₁(ω₀)(ω − ω₀) = κ(ω)
//	κ = 0.496 γP₀ (ωT₀)^(2/3) · (1 + mismatch)
//
// in which the mismatch is a smooth function of density and energy that only
// the seed knows. Strength grows from a threshold in soliton order, and fades
// where the fibre ends before the pulse has compressed.
type light struct {
	truth  Truth
	medium *gas.Medium
	iso    *gas.Isotherm
	fibre  fibre.Fibre
	beta   []float64
	omega  []float64
}

// emission is what leaves the fibre besides the pump.
type emission struct {
	wavelength float64 // m, centroid, vacuum; 0: none
	width      float64 // m
	strength   float64 // share of the light
}

func newLight(t Truth) (*light, error) {
	medium, err := gas.New(gas.Spec{Composition: "argon", Density: "reference", Index: "peck-fisher-1964", N2: "lehmeier-1985"})
	if err != nil {
		return nil, err
	}
	iso, err := medium.Isotherm(roomTemperature)
	if err != nil {
		return nil, err
	}
	stated, err := fibre.New(fibre.Spec{Kind: fibre.Antiresonant, CoreDiameter: 2 * fibreRadius, Wall: fibreWall, Length: fibreLength})
	if err != nil {
		return nil, err
	}
	const points = 96
	return &light{
		truth: t, medium: medium, iso: iso,
		fibre: stated.WithSizes(fibreRadius*(1+float64(t.CoreRadius)), fibreWall*(1+float64(t.Wall))),
		beta:  make([]float64, points), omega: make([]float64, points),
	}, nil
}

// emit returns the emission from gas at s and pulses of energy in J. Where the
// gas is no gas, or nothing is guided, there is none.
func (l *light) emit(s panel.State, energy float64) emission {
	if err := l.iso.Set(unit.Kelvin(s.T)); err != nil {
		return emission{}
	}
	state, err := l.iso.State(unit.Pascal(s.P), unit.Fraction(min(max(s.Air, 0), 1)))
	if err != nil {
		return emission{}
	}
	state = state.WithDensity(state.Density * unit.MolePerCubicMetre(1+l.truth.Index))
	g := fibre.Guide{Fibre: &l.fibre, Gas: state}
	pump := fibre.Frequency(pumpWavelength)
	at := g.At(pump)
	if at.Region != fibre.Guided || !(energy > 0) || !(at.Beta2 < 0) {
		return emission{}
	}
	t0 := pulseDuration / 1.763 // sech²
	power := 0.8814 * energy / pulseDuration
	gamma := g.Gamma(pump) * (1 + float64(l.truth.N2))
	order := math.Sqrt(gamma * power * t0 * t0 / -at.Beta2)
	fission := t0 * t0 / -at.Beta2 / order
	e := emission{strength: conversion(order, fission)}
	kappa := 0.496 * gamma * power * math.Pow(t0, 2.0/3) * (1 + l.mismatch(float64(state.Density), energy))
	omega, ok := l.match(&g, pump, at, kappa)
	if !ok {
		return emission{}
	}
	e.wavelength = float64(fibre.Wavelength(omega))
	e.width = 20e-9 * e.wavelength * e.wavelength / (265e-9 * 265e-9)
	return e
}

// conversion is the share of the light in the emission. Its slope is that of
// full-field calculations of this kind of source, 5 % from soliton order 3.7
// to 10 % at 4.8; threshold and roundness are ours.
func conversion(order, fission float64) float64 {
	const threshold, round, slope = 2.9, 0.12, 0.0535
	s := slope * round * math.Log1p(math.Exp((order-threshold)/round))
	return s / (1 + math.Exp((fission-0.9*fibreLength)/0.02))
}

// mismatch is the part of κ that no formula has.
func (l *light) mismatch(density, energy float64) float64 {
	const middle = 3690.0 // mol/m³, argon at 9 bar and room temperature
	x := (density/middle - 1) / 0.3
	y := (energy/pulseEnergy - 1) / 0.2
	m := l.truth.Mismatch
	return m[0]*math.Tanh(x) + m[1]*math.Cos(1.7*x) + m[2]*math.Tanh(y) + m[3]*math.Sin(x+y)
}

// match finds the highest frequency in the band between the wall's first and
// second resonance at which the mismatch rises through κ(ω) = kappa·ω^(2/3).
func (l *light) match(g *fibre.Guide, pump float64, at fibre.Propagation, kappa float64) (float64, bool) {
	var bands [fibre.MaxBands]fibre.Band
	for _, b := range bands[:g.Bands(&bands)] {
		if float64(b.To) > pumpWavelength/1.6 {
			continue
		}
		low, high := fibre.Frequency(b.To), fibre.Frequency(b.From)
		last := len(l.omega) - 1
		for i := range l.omega {
			l.omega[i] = low + (high-low)*float64(i)/float64(last)
		}
		g.Beta(l.beta, l.omega)
		excess := func(omega, beta float64) float64 {
			return beta - at.Beta - at.Beta1*(omega-pump) - kappa*math.Pow(omega, 2.0/3)
		}
		above := excess(l.omega[last], l.beta[last])
		for i := last - 1; i >= 0; i-- {
			below := excess(l.omega[i], l.beta[i])
			if below < 0 && above >= 0 {
				return l.polish(g, excess, l.omega[i], below, l.omega[i+1], above), true
			}
			above = below
		}
		return 0, false
	}
	return 0, false
}

// polish closes in on the root between a and b by false position (Illinois
// variant), to a few parts in 1e9.
func (l *light) polish(g *fibre.Guide, f func(omega, beta float64) float64, a, fa, b, fb float64) float64 {
	for range 60 {
		if b-a < 1e-9*b {
			break
		}
		m := (a*fb - b*fa) / (fb - fa)
		fm := f(m, g.At(m).Beta)
		switch {
		case fm == 0:
			return m
		case fm < 0:
			a, fa = m, fm
			fb /= 2
		default:
			b, fb = m, fm
			fa /= 2
		}
	}
	return (a*fb - b*fa) / (fb - fa)
}
