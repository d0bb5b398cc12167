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
// compressed pulse equals κ:
//
//	β(ω) − β(ω₀) − β₁(ω₀)(ω − ω₀) = κ
//
// Stored full-field runs of the stated bench say what κ must have been at
// their densities and energies. The truth bends it by a smooth mismatch that
// only the seed knows, and solves for ω with the fibre and gas as they truly
// are. A nonlinear index or a core other than stated acts as another pulse
// energy: γ goes with n₂/a².
type light struct {
	truth  Truth
	iso    *gas.Isotherm
	fibre  fibre.Fibre
	middle [2]float64 // density and energy round which the mismatch bends

	kappa, share, width, compressed surface // share as its logarithm
}

// emission is what leaves the fibre besides the pump.
type emission struct {
	wavelength  float64 // m, centroid, vacuum; 0: none
	width       float64 // m
	strength    float64 // share of the light
	compression float64 // share of the fibre's length after which it is made
}

// Runs say nothing of shares of the light below the first, and that a share is
// below the second where they find no emission.
const faintest, unseen = 1e-5, 7e-4

func newLight(t Truth) (*light, error) {
	medium, err := gas.New(gas.Spec{Composition: "argon", Density: "reference", Index: "peck-fisher-1964"})
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
	runs, err := readRuns()
	if err != nil {
		return nil, err
	}
	l := &light{
		truth: t, iso: iso,
		fibre: stated.WithSizes(fibreRadius*(1+float64(t.CoreRadius)), fibreWall*(1+float64(t.Wall))),
	}
	for _, f := range []struct {
		into  *surface
		emits bool
		bound [2]float64
		of    func(run) float64
	}{
		{&l.kappa, true, [2]float64{math.Inf(-1), math.Inf(1)}, func(r run) float64 { return needed(stated, iso, r) }},
		{&l.share, true, [2]float64{math.Log(faintest), math.Log(unseen)}, func(r run) float64 { return math.Log(r.conversion) }},
		{&l.width, true, [2]float64{10e-9, 30e-9}, func(r run) float64 { return r.width }},
		{&l.compressed, false, [2]float64{}, func(r run) float64 { return r.compression / fibreLength }},
	} {
		if *f.into, err = newSurface(runs, f.emits, f.bound, f.of); err != nil {
			return nil, err
		}
	}
	state, err := iso.State(9e5, 0)
	if err != nil {
		return nil, err
	}
	l.middle = [2]float64{float64(state.Density), pulseEnergy}
	return l, nil
}

// needed returns the κ of a run: the mismatch at its emission, with the fibre
// and the gas as stated.
func needed(f *fibre.Fibre, iso *gas.Isotherm, r run) float64 {
	state, err := iso.State(unit.Pascal(r.pressure), 0)
	if err != nil {
		return math.NaN() // refused by the surface
	}
	g := fibre.Guide{Fibre: f, Gas: state}
	pump := fibre.Frequency(pumpWavelength)
	at := g.At(pump)
	omega := fibre.Frequency(unit.Metre(r.centroid))
	return g.At(omega).Beta - at.Beta - at.Beta1*(omega-pump)
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
	density := float64(state.Density)
	narrow := 1 + float64(l.truth.CoreRadius)
	strong := energy * (1 + float64(l.truth.N2)) / (narrow * narrow)
	e := emission{
		strength:    math.Exp(l.share.at(density, strong)) * fade(density/l.share.density[0]) * fade(strong/l.share.energy[0]),
		width:       l.width.at(density, strong),
		compression: l.compressed.at(density, strong),
	}
	kappa := l.kappa.at(density, strong) + l.mismatch(density, strong)
	g := fibre.Guide{Fibre: &l.fibre, Gas: state.WithDensity(state.Density * unit.MolePerCubicMetre(1+l.truth.Index))}
	if omega, ok := l.match(&g, kappa); ok {
		e.wavelength = float64(fibre.Wavelength(omega))
	} else {
		e.strength = 0
	}
	return e
}

// fade takes the emission away below the lowest density and energy of the runs,
// at a slope such as they have near the threshold.
func fade(ratio float64) float64 {
	if ratio >= 1 {
		return 1
	}
	return math.Pow(max(ratio, 0), 12)
}

// mismatch is the part of κ that no model of the bench has, 1/m.
func (l *light) mismatch(density, energy float64) float64 {
	x := (density/l.middle[0] - 1) / 0.3
	y := (energy/l.middle[1] - 1) / 0.2
	m := l.truth.Mismatch
	return m[0]*math.Tanh(x) + m[1]*math.Cos(1.7*x) + m[2]*math.Tanh(y) + m[3]*math.Sin(x+y)
}

// match finds the highest frequency in the band short of the wall's longest
// resonance at which the mismatch rises through kappa.
func (l *light) match(g *fibre.Guide, kappa float64) (float64, bool) {
	pump := fibre.Frequency(pumpWavelength)
	at := g.At(pump)
	if at.Region != fibre.Guided {
		return 0, false
	}
	excess := func(omega, beta float64) float64 {
		return beta - at.Beta - at.Beta1*(omega-pump) - kappa
	}
	var bands [fibre.MaxBands]fibre.Band
	for _, b := range bands[:g.Bands(&bands)] {
		if float64(b.To) > pumpWavelength/1.6 {
			continue
		}
		const steps = 48
		low, high := fibre.Frequency(b.To), fibre.Frequency(b.From)
		upper, above := high, excess(high, g.At(high).Beta)
		for i := steps - 1; i >= 0; i-- {
			lower := low + (high-low)*float64(i)/steps
			below := excess(lower, g.At(lower).Beta)
			if below < 0 && above >= 0 {
				return polish(g, excess, lower, below, upper, above), true
			}
			upper, above = lower, below
		}
		return 0, false
	}
	return 0, false
}

// polish closes in on the root between a and b by false position (Illinois
// variant: Dowell & Jarratt, BIT 11, 168 (1971)), to a few parts in 1e9.
func polish(g *fibre.Guide, f func(omega, beta float64) float64, a, fa, b, fb float64) float64 {
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
