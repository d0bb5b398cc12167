package simulate

import (
	"math"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/unit"
	"barline/simulate/panel"
)

// Light is what the fibre emits, by a truth.
//
// The emission stands where the phase mismatch between the mode and the
// compressed pulse equals κ:
//
//	β(ω) − β(ω₀) − β₁(ω₀)(ω − ω₀) = κ
//
// Stored full-field runs of the stated bench say what κ must have been at
// their densities and energies, and with what they move to either side:
// pulse duration, nonlinear index, core, wall, refractivity. The truth bends
// κ further by a smooth mismatch that only the seed knows; ω is then solved
// for with the fibre and gas as they truly are. Strength and width follow the
// runs in the same way.
//
// Against fresh full-field runs between the stored ones, with everything moved
// at once, this is off by LightError.
type Light struct {
	truth  Truth
	iso    *gas.Isotherm
	stated *fibre.Fibre
	middle [2]float64 // density and energy round which the mismatch bends

	kappa, share, width answer // share as its logarithm
	compressed          surface
}

// LightError is how far simulated light is from full-field propagation of the
// same truth without its mismatch, rms.
const LightError = 0.3 * unit.Nanometre

// Conditions are what the light is made under.
type Conditions struct {
	Gas    panel.State // where the pulse is shortest
	Energy float64     // J in the fibre
	// Longer and Narrower are relative changes of pulse duration and core
	// radius on top of the truth's: a laser that ages, a core that is coated.
	Longer, Narrower float64
}

// Emission is what leaves the fibre besides the pump.
type Emission struct {
	Wavelength  float64 // m, centroid, vacuum; 0: none
	Width       float64 // m
	Strength    float64 // share of the light
	Compression float64 // share of the fibre's length after which it is made
}

// Runs say nothing of shares of the light below the first, and that a share is
// below the second where they find no emission.
const faintest, unseen = 1e-5, 7e-4

// NewLight returns the light of Heron by a truth.
func NewLight(t Truth) (*Light, error) {
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
	l := &Light{truth: t, iso: iso, stated: stated}
	for _, f := range []struct {
		into  *answer
		bound [2]float64
		of    func(run) float64
	}{
		{&l.kappa, [2]float64{math.Inf(-1), math.Inf(1)}, func(r run) float64 { return needed(stated, iso, r) }},
		{&l.share, [2]float64{math.Log(faintest), math.Log(unseen)}, func(r run) float64 { return math.Log(r.conversion) }},
		{&l.width, [2]float64{10e-9, 30e-9}, func(r run) float64 { return r.width }},
	} {
		of := func(r run) float64 {
			if r.centroid == 0 {
				return math.NaN()
			}
			return f.of(r)
		}
		if *f.into, err = newAnswer(runs, f.bound, of); err != nil {
			return nil, err
		}
	}
	var places []knot
	for _, r := range runs {
		if r.moved == asStated {
			places = append(places, knot{r.density, r.energy, r.compression / fibreLength})
		}
	}
	if l.compressed, err = newSurface(places, [2]float64{0, 1}); err != nil {
		return nil, err
	}
	state, err := iso.State(9e5, 0)
	if err != nil {
		return nil, err
	}
	l.middle = [2]float64{float64(state.Density), pulseEnergy}
	return l, nil
}

// needed returns the κ of a run: the mismatch at its emission, with the fibre
// and the gas as the run had them.
func needed(stated *fibre.Fibre, iso *gas.Isotherm, r run) float64 {
	var x [movedCount]float64
	x[r.moved] = r.by
	state, err := iso.State(unit.Pascal(r.pressure), 0)
	if err != nil {
		return math.NaN() // refused by the surface
	}
	f := sized(stated, x[coreSize], x[wallSize])
	g := fibre.Guide{Fibre: &f, Gas: refracting(state, x[index])}
	pump := fibre.Frequency(pumpWavelength)
	at := g.At(pump)
	omega := fibre.Frequency(unit.Metre(r.centroid))
	return g.At(omega).Beta - at.Beta - at.Beta1*(omega-pump)
}

// sized returns the fibre with a core and a wall larger than stated.
func sized(stated *fibre.Fibre, core, wall float64) fibre.Fibre {
	return stated.WithSizes(fibreRadius*(1+core), fibreWall*(1+wall))
}

// refracting returns the gas with another refractivity.
func refracting(s gas.State, by float64) gas.State {
	return s.WithDensity(s.Density * unit.MolePerCubicMetre(1+by))
}

// Emit returns the emission. Where the gas is no gas, or nothing is guided,
// there is none.
func (l *Light) Emit(c Conditions) Emission {
	if err := l.iso.Set(unit.Kelvin(c.Gas.T)); err != nil {
		return Emission{}
	}
	state, err := l.iso.State(unit.Pascal(c.Gas.P), unit.Fraction(min(max(c.Gas.Air, 0), 1)))
	if err != nil {
		return Emission{}
	}
	density, energy := float64(state.Density), c.Energy
	t := &l.truth
	core := (1+float64(t.CoreRadius))*(1-c.Narrower) - 1
	x := [movedCount]float64{
		duration: (1+float64(t.Duration))*(1+c.Longer) - 1, kerr: float64(t.N2),
		coreSize: core, wallSize: float64(t.Wall), index: float64(t.Index),
	}
	e := Emission{
		Strength:    min(math.Exp(l.share.at(density, energy, &x)), 1) * fade(density/l.share.plain.density[0]) * fade(energy/l.share.plain.energy[0]),
		Width:       max(l.width.at(density, energy, &x), narrowest),
		Compression: l.compressed.at(density, energy),
	}
	kappa := l.kappa.at(density, energy, &x) + l.mismatch(density, energy)
	f := sized(l.stated, core, float64(t.Wall))
	g := fibre.Guide{Fibre: &f, Gas: refracting(state, float64(t.Index))}
	if omega, ok := l.match(&g, kappa); ok {
		e.Wavelength = float64(fibre.Wavelength(omega))
	} else {
		e.Strength = 0
	}
	return e
}

// narrowest is the width below which no run finds the emission, m.
const narrowest = 5e-9

// fade takes the emission away below the lowest density and energy of the runs,
// at a slope such as they have near the threshold.
func fade(ratio float64) float64 {
	if ratio >= 1 {
		return 1
	}
	return math.Pow(max(ratio, 0), 12)
}

// mismatch is the part of κ that no model of the bench has, 1/m.
func (l *Light) mismatch(density, energy float64) float64 {
	x := (density/l.middle[0] - 1) / 0.3
	y := (energy/l.middle[1] - 1) / 0.2
	m := l.truth.Mismatch
	return m[0]*math.Tanh(x) + m[1]*math.Cos(1.7*x) + m[2]*math.Tanh(y) + m[3]*math.Sin(x+y)
}

// match finds the highest frequency in the band short of the wall's longest
// resonance at which the mismatch rises through kappa.
func (l *Light) match(g *fibre.Guide, kappa float64) (float64, bool) {
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
