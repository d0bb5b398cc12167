package pulse

import (
	"fmt"
	"math"

	"barline/model/pulse/fourier"
)

// Launch returns the spectrum of p at the fibre input in the kept bins of g,
// scaled so that it carries p.Energy in medium m. The transform-limited pulse
// peaks at time zero with the peak of the carrier; the dispersion p.GDD turns
// its phase. It refuses a pulse that the grid cannot hold.
func Launch(g Grid, m Medium, p Pulse) ([]complex128, error) {
	if err := m.check(g); err != nil {
		return nil, err
	}
	if !(p.Wavelength > 0) || !(p.Duration > 0) || !(p.Energy > 0) {
		return nil, fmt.Errorf("pulse of %g nm, %g fs and %g uJ: want all above 0",
			p.Wavelength.Nanometres(), p.Duration.Femtoseconds(), p.Energy.Microjoules())
	}
	omega0 := 2 * math.Pi * lightSpeed / float64(p.Wavelength)
	if omega0 < g.Omega(g.Lo) || omega0 >= g.Omega(g.Hi) {
		return nil, fmt.Errorf("pulse at %g nm lies outside the grid's band", p.Wavelength.Nanometres())
	}
	plan, err := fourier.NewReal(g.Points)
	if err != nil {
		return nil, err
	}
	field, all := make([]float64, g.Points), make([]complex128, g.Points/2+1)
	for j := range field {
		t := float64(j-g.Origin()) * float64(g.Step)
		field[j] = p.Shape.envelope(t/float64(p.Duration)) * math.Cos(omega0*t)
	}
	plan.Forward(all, field)
	total := 0.0
	for _, v := range all {
		total += norm2(v)
	}
	spectrum := append([]complex128(nil), all[g.Lo:g.Hi]...)
	kept := 0.0
	for i, v := range spectrum {
		kept += norm2(v)
		d := g.Omega(g.Lo+i) - omega0
		sin, cos := math.Sincos(float64(p.GDD) / 2 * d * d)
		spectrum[i] = v * complex(cos, -sin)
	}
	if kept < 0.999*total {
		return nil, fmt.Errorf("pulse of %g fs at %g nm: %.2g %% of its energy lies outside the grid's band",
			p.Duration.Femtoseconds(), p.Wavelength.Nanometres(), 100*(1-kept/total))
	}
	m.scaleTo(g, spectrum, float64(p.Energy))
	return spectrum, nil
}

// scaleTo scales the spectrum so that it carries the energy in J.
func (m *Medium) scaleTo(g Grid, spectrum []complex128, energy float64) {
	f := complex(math.Sqrt(energy/m.energy(g, spectrum)), 0)
	for i := range spectrum {
		spectrum[i] *= f
	}
}

// envelope returns the amplitude of the transform-limited pulse at time t in
// units of its full width at half maximum of the power.
func (s Shape) envelope(t float64) float64 {
	if s == Gauss {
		return math.Exp(-2 * math.Ln2 * t * t)
	}
	return 1 / math.Cosh(2*math.Acosh(math.Sqrt2)*t)
}
