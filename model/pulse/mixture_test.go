package pulse

import (
	"context"
	"math"
	"testing"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/ionise"
	"barline/model/unit"
)

// filled is the reference fibre with another gas at 9 bar.
func filled(t *testing.T, composition string, plasma Plasma) Setup {
	t.Helper()
	s := referenceSetup(t, 9, plasma)
	medium, err := gas.New(gas.Spec{Composition: composition, Density: "ideal"})
	if err != nil {
		t.Fatal(err)
	}
	if s.Gas, err = medium.At(9*unit.Bar, 293.15, 0); err != nil {
		t.Fatal(err)
	}
	return s
}

// burst fills the field with a pulse of 12 fs and returns the polarisation of
// the medium in it.
func burst(g Grid, m *Medium, peak float64) *polarisation {
	w := newPolarisation(g, m)
	omega0 := 2 * math.Pi * lightSpeed / float64(benchWavelength)
	for j := range w.field {
		x := float64(j-g.Origin()) * float64(g.Step)
		w.field[j] = peak * math.Exp(-math.Pow(x/12e-15, 2)) * math.Cos(omega0*x)
	}
	w.at(1)
	return &w
}

func mediumOf(t *testing.T, s Setup) (Grid, Medium) {
	t.Helper()
	g, err := s.Grid()
	if err != nil {
		t.Fatal(err)
	}
	m, _, err := s.Medium(g)
	if err != nil {
		t.Fatal(err)
	}
	return g, m
}

// In a given field every gas of a mixture ionises as if alone: the share of
// ionised atoms is Σ xᵢ (1 − exp(−∫Wᵢ dt)), here with the rates summed directly
// from package ionise. In weak fields that is linear in each mole fraction.
func TestEveryGasIonisesByItself(t *testing.T) {
	for _, c := range []struct {
		composition string
		parts       map[string]float64
	}{
		{"argon", map[string]float64{"argon": 1}},
		{"argon 70 % + krypton 30 %", map[string]float64{"argon": 0.7, "krypton": 0.3}},
		{"argon 30 % + krypton 70 %", map[string]float64{"argon": 0.3, "krypton": 0.7}},
		{"helium 99 % + xenon 1 %", map[string]float64{"helium": 0.99, "xenon": 0.01}},
		{"helium 50 % + neon 30 % + argon 20 %", map[string]float64{"helium": 0.5, "neon": 0.3, "argon": 0.2}},
	} {
		s := filled(t, c.composition, Averaged)
		g, m := mediumOf(t, s)
		for _, peak := range []float64{2.5e10, 4e10} {
			w := burst(g, &m, peak)
			want := 0.0
			for name, share := range c.parts {
				species, err := gas.Named(name)
				if err != nil {
					t.Fatal(err)
				}
				rate, err := ionise.NewRate(species.IonisationEnergy, species.OrbitalMomentum, fibre.Frequency(s.Pulse.Wavelength))
				if err != nil {
					t.Fatal(err)
				}
				sum := 0.0
				for _, e := range w.field {
					sum += rate.At(e) * float64(g.Step)
				}
				want -= share * math.Expm1(-sum)
			}
			if !(want > 1e-9) {
				t.Errorf("%s at %g V/m: %g of the atoms ionised proves nothing", c.composition, peak, want)
			}
			if !(math.Abs(w.ionised/want-1) < 5e-3) {
				t.Errorf("%s at %g V/m: %.5g of the atoms are ionised, want %.5g", c.composition, peak, w.ionised, want)
			}
		}
	}
}

// The gases share the density: all atoms together are those of the ideal gas,
// p N_A/(R T).
func TestPartsOfAMixtureAddUp(t *testing.T) {
	_, m := mediumOf(t, filled(t, "helium 50 % + neon 30 % + argon 20 %", Averaged))
	sum := 0.0
	for _, a := range m.Atoms {
		sum += a.Density
	}
	if want := 9e5 * avogadro / (8.31446261815324 * 293.15); len(m.Atoms) != 3 || !(math.Abs(sum/want-1) < 1e-9) {
		t.Errorf("%d kinds with %g atoms per m³, want 3 with %g", len(m.Atoms), sum, want)
	}
	s := filled(t, "argon", Averaged)
	medium := s.Gas.Medium()
	var err error
	if s.Gas, err = medium.At(9*unit.Bar, 293.15, 0.01); err != nil {
		t.Fatal(err)
	}
	if _, m = mediumOf(t, s); len(m.Atoms) != 2 || !(math.Abs(m.Atoms[1].Density/m.Atoms[0].Density-1.0/99) < 1e-9) {
		t.Errorf("argon with 1 %% of air: %+v", m.Atoms)
	}
}

// A mixture of nearly one gas does what that gas does, and a little of a gas
// that ionises easily frees more electrons.
func TestMixtureTendsToItsMainGas(t *testing.T) {
	run := func(composition string) *Result {
		s := filled(t, composition, Radial)
		s.Fibre = mustFibre(t, 0.12)
		r, err := s.Run(context.Background(), Options{Tolerance: 1e-3})
		if err != nil {
			t.Fatal(err)
		}
		return r
	}
	pure, nearly := run("argon"), run("argon 99.9999 % + neon 0.0001 %")
	if !(math.Abs(nearly.Ionised/pure.Ionised-1) < 1e-3) || !(math.Abs(float64(nearly.EnergyOut/pure.EnergyOut)-1) < 1e-5) {
		t.Errorf("a millionth of neon: %.6g ionised, %.6g uJ out; pure argon %.6g, %.6g uJ",
			nearly.Ionised, nearly.EnergyOut.Microjoules(), pure.Ionised, pure.EnergyOut.Microjoules())
	}
	if easy := run("argon 98 % + xenon 2 %"); !(easy.Ionised > 1.02*pure.Ionised) {
		t.Errorf("2 %% of xenon: %.4g ionised, pure argon %.4g", easy.Ionised, pure.Ionised)
	}
}
