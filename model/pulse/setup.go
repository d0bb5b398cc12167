package pulse

import (
	"fmt"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/unit"
)

// Plasma says over what the ionisation rate is taken.
type Plasma uint8

const (
	// Radial averages the rate over the cross-section of the mode.
	Radial Plasma = iota
	// Averaged takes the rate at the field of power / effective area, as
	// published mode-averaged work has it; it is 6 to 8 times too low.
	Averaged
)

var plasmaText = [...]string{"radial", "averaged"}

// String returns the name as commands spell it.
func (p Plasma) String() string { return plasmaText[p] }

// ParsePlasma reads the name of a plasma model.
func ParsePlasma(text string) (Plasma, error) {
	for i, name := range plasmaText {
		if name == text {
			return Plasma(i), nil
		}
	}
	return 0, fmt.Errorf("plasma %q is not known: expected radial or averaged", text)
}

// Setup is a fibre filled with gas and the light at its input.
//
// Setups of the same bench share the Fibre and the Medium of the Gas: that is
// how two of them are known to be alike.
type Setup struct {
	Fibre *fibre.Fibre
	Gas   gas.State // at relative density 1
	Pulse Pulse
	// Measured stands in for the pulse's shape, duration and dispersion; nil
	// means that it was not measured.
	Measured *Measured
	Plasma   Plasma
	// KerrScale multiplies the nonlinear index; 0 means 1.
	KerrScale float64
	// Rates is what Prepare makes; nil means that every run makes it anew.
	Rates *Rates
	// Density is the gas density along the fibre relative to Gas; nil means
	// the same everywhere.
	Density *Profile
}

// Medium returns what the field meets on the grid, and the worst region of the
// fibre's formulas in the band. It refuses a band in which nothing is guided.
func (s Setup) Medium(g Grid) (Medium, fibre.Region, error) {
	guide := fibre.Guide{Fibre: s.Fibre, Gas: s.Gas}
	omega := g.Frequencies()
	m := Medium{
		Area:    s.Fibre.EffectiveArea(),
		Chi3:    Chi3FromN2(float64(s.Gas.Kerr())) * s.kerrScale(),
		Density: s.Density,
		Length:  float64(s.Fibre.Spec().Length),
	}
	worst, err := s.propagation(&m, omega)
	if err != nil {
		return Medium{}, worst, err
	}
	if s.lossy() {
		m.Loss = make([]float64, len(omega))
		for i, w := range omega {
			m.Loss[i] = guide.Attenuation(w)
		}
	}
	pump := guide.At(fibre.Frequency(s.Pulse.Wavelength))
	if pump.Region == fibre.Dark {
		return Medium{}, worst, fmt.Errorf("pulse at %v: nothing is guided there", s.Pulse.Wavelength)
	}
	m.Slowness = pump.Beta1
	if err := s.ionisation(&m); err != nil {
		return Medium{}, worst, err
	}
	return m, worst, nil
}

// lossy reports whether a loss is given. Where none is the light is propagated
// without: the leak of a bare bore is no measured one.
func (s Setup) lossy() bool {
	l := s.Fibre.Spec().Loss
	return l.Constant > 0 || len(l.Table) > 0
}

// propagation fills in β: alone where the density is uniform, else as the
// parabola over density through empty, half and full.
func (s Setup) propagation(m *Medium, omega []float64) (fibre.Region, error) {
	at := func(ratio float64) ([]float64, fibre.Region, error) {
		guide := fibre.Guide{Fibre: s.Fibre, Gas: s.Gas.WithDensity(s.Gas.Density * unit.MolePerCubicMetre(ratio))}
		beta := make([]float64, len(omega))
		region := guide.Beta(beta, omega)
		if region == fibre.Dark {
			return nil, region, fmt.Errorf("nothing is guided in part of the band from %v to %v",
				fibre.Wavelength(omega[len(omega)-1]), fibre.Wavelength(omega[0]))
		}
		return beta, region, nil
	}
	full, worst, err := at(1)
	if err != nil || s.Density == nil {
		m.Beta[0] = full
		return worst, err
	}
	most := s.Density.Most()
	empty, _, err := at(0)
	if err != nil {
		return worst, err
	}
	half, _, err := at(most / 2)
	if err != nil {
		return worst, err
	}
	top, _, err := at(most)
	if err != nil {
		return worst, err
	}
	m.Beta = [3][]float64{empty, half, top}
	for i := range omega {
		a, b, c := empty[i], half[i], top[i]
		m.Beta[1][i] = (-3*a + 4*b - c) / most
		m.Beta[2][i] = (2*a - 4*b + 2*c) / (most * most)
	}
	return worst, nil
}

// ionisation fills in the atoms of the gas. Every gas of a mixture ionises by
// itself, at its own partial density.
func (s Setup) ionisation(m *Medium) error {
	if s.Gas.Density == 0 {
		return nil
	}
	rates := s.Rates
	if !rates.serve(s) {
		rates = newRates(s)
	}
	for _, c := range s.Gas.Components() {
		table, err := rates.of(c.Species)
		if err != nil {
			return err
		}
		m.Atoms = append(m.Atoms, Atoms{
			Rate:      table,
			Density:   float64(s.Gas.Density) * float64(c.Fraction) * avogadro,
			Potential: c.Species.IonisationEnergy * elementaryCharge,
		})
	}
	return nil
}
