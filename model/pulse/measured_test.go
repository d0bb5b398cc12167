package pulse

import (
	"context"
	"fmt"
	"math"
	"strings"
	"testing"

	"barline/model/unit"
)

// table writes a sech² pulse of 35 fs at 1030 nm with dispersion as an
// instrument would give it: energy per wavelength and phase.
func table(step float64, gdd, delay float64) string {
	var b strings.Builder
	b.WriteString("# pump\nwavelength_nm,energy,phase_rad\n")
	omega0 := 2 * math.Pi * lightSpeed / 1030e-9
	t0 := 35e-15 / (2 * math.Acosh(math.Sqrt2))
	for nm := 850.0; nm < 1350; nm += step {
		d := 2*math.Pi*lightSpeed/(nm*1e-9) - omega0
		a := 1 / math.Cosh(math.Pi*d*t0/2)
		fmt.Fprintf(&b, "%.3f,%.9g,%.9g\n", nm, 1e4*a*a/(nm*nm), gdd/2*d*d+delay*d)
	}
	return b.String()
}

// The Fourier transform of a sech is a sech (Abramowitz & Stegun, 29.3): a
// table of the pulse must launch what the formula launches, wherever the
// instrument put its time zero.
func TestMeasuredIsTheLaunchedPulse(t *testing.T) {
	s := referenceSetup(t, 9, Radial)
	s.Pulse.GDD = 300 * unit.FemtosecondSquared
	g, err := s.Grid()
	if err != nil {
		t.Fatal(err)
	}
	m, _, err := s.Medium(g)
	if err != nil {
		t.Fatal(err)
	}
	want, err := Launch(g, m, s.Pulse)
	if err != nil {
		t.Fatal(err)
	}
	p, err := ReadMeasured(strings.NewReader(table(0.5, 300e-30, 80e-15)))
	if err != nil {
		t.Fatal(err)
	}
	got, err := p.launch(g, &m, s.Pulse.Energy)
	if err != nil {
		t.Fatal(err)
	}
	if d := apart(want, got); d > 5e-3 {
		t.Errorf("the table's pulse differs from the formula's by %.2g", d)
	}
	if e := m.energy(g, got); math.Abs(e/float64(s.Pulse.Energy)-1) > 1e-12 {
		t.Errorf("carries %g J, want %g J", e, float64(s.Pulse.Energy))
	}
	s.Measured = p
	s.Fibre = mustFibre(t, 0.01)
	r, err := s.Run(context.Background(), Options{Tolerance: 1e-3})
	if err != nil || math.Abs(float64(r.EnergyIn-s.Pulse.Energy)) > 1e-12*float64(s.Pulse.Energy) {
		t.Errorf("run: %v", err)
	}
}

func TestMeasuredRefuses(t *testing.T) {
	good := table(0.5, 0, 0)
	lines := strings.Split(good, "\n")
	gap := strings.Join(append(append([]string(nil), lines[:350]...), lines[400:]...), "\n")
	for name, c := range map[string]struct{ text, want string }{
		"gap":           {gap, "gap"},
		"wrapped phase": {strings.Replace(good, lines[362], lines[362]+"1e2", 1), "phase turns"},
		"no number":     {strings.Replace(good, lines[300], "1000,x,0", 1), "no number"},
		"not a number":  {strings.Replace(good, lines[300], "1000,NaN,0", 1), "no number"},
		"columns":       {"1000\n", "columns"},
		"short":         {"1000,1\n1001,1\n", "at least 8"},
		"twice":         {good + lines[300] + "\n", "twice"},
		"dark":          {strings.ReplaceAll(table(50, 0, 0), ",", ",0,0\n#"), "no energy"},
		"wavelength":    {good + "3,1,0\n", "50 nm"},
		"below zero":    {strings.Replace(good, lines[300], "999.9,-1,0", 1), "below zero"},
	} {
		if _, err := ReadMeasured(strings.NewReader(c.text)); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", name, err, c.want)
		}
	}
}

func FuzzReadMeasured(f *testing.F) {
	f.Add(table(5, 0, 0))
	f.Add("1000,1\n")
	f.Fuzz(func(t *testing.T, text string) {
		m, err := ReadMeasured(strings.NewReader(text))
		if err != nil {
			return
		}
		for i := range m.omega {
			if math.IsNaN(m.amplitude[i]) || math.IsNaN(m.phase[i]) || math.IsInf(m.phase[i], 0) {
				t.Fatalf("point %d is %v, %v", i, m.amplitude[i], m.phase[i])
			}
		}
	})
}
