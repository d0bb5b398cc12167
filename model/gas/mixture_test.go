package gas

import (
	"math"
	"testing"

	"barline/model/unit"
)

// Cross second virials in cm³/mol at 298 K: helium with argon 18.4, nitrogen
// with argon −10.6, argon with krypton −31 (J. H. Dymond, E. B. Smith, The
// Virial Coefficients of Pure Gases and Mixtures (1980); from memory).
func TestCrossVirials(t *testing.T) {
	for _, test := range []struct {
		a, b   string
		want   float64
		within float64
	}{{"helium", "argon", 18.4, 4}, {"nitrogen", "argon", -10.6, 2}, {"argon", "krypton", -31, 4}} {
		a, _ := Named(test.a)
		b, _ := Named(test.b)
		var fa, fb fluid
		fa.set(a.equation, 298.15)
		fb.set(b.equation, 298.15)
		ba, _ := fa.virials()
		bb, _ := fb.virials()
		got := (0.5*(ba+bb) + excessSecondVirial(a, b, 298.15)) * 1e6
		if math.Abs(got-test.want) > test.within {
			t.Errorf("%s with %s: B₁₂ = %.1f cm³/mol, want %.1f", test.a, test.b, got, test.want)
		}
	}
}

// The rule vanishes for a pair of the same gas, and is symmetric.
func TestExcessOfLikePairs(t *testing.T) {
	for i := range speciesTable {
		a := &speciesTable[i]
		if v := excessSecondVirial(a, a, 300); math.Abs(v) > 1e-12 {
			t.Errorf("%s with itself: %g", a.Name, v)
		}
		b := &speciesTable[(i+2)%len(speciesTable)]
		if x, y := excessSecondVirial(a, b, 300), excessSecondVirial(b, a, 300); math.Abs(x-y) > 1e-18 {
			t.Errorf("%s with %s: %g and %g", a.Name, b.Name, x, y)
		}
	}
}

// Nitrogen with air in it is nearly air, and argon made of argon is argon.
func TestMixturesMeetTheirParts(t *testing.T) {
	const p, k = 11.3e5, 294.7
	pure, err := medium(t, Spec{Composition: "argon"}).At(p, k, 0)
	if err != nil {
		t.Fatal(err)
	}
	nearly, err := medium(t, Spec{Composition: "argon 99.9999 % + neon 0.0001 %"}).At(p, k, 0)
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(float64(nearly.Density/pure.Density)-1) > 1e-7 || math.Abs(nearly.IndexMinusOne(800e-9)/pure.IndexMinusOne(800e-9)-1) > 2e-6 {
		t.Errorf("argon with a trace of neon: %v and %g, argon %v and %g", nearly.Density, nearly.IndexMinusOne(800e-9), pure.Density, pure.IndexMinusOne(800e-9))
	}
	whole, err := medium(t, Spec{Composition: "argon"}).At(p, k, 1)
	if err != nil {
		t.Fatal(err)
	}
	air, err := medium(t, Spec{Composition: "air"}).At(p, k, 0)
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(float64(whole.Density/air.Density)-1) > 1e-12 || math.Abs(whole.IndexMinusOne(600e-9)/air.IndexMinusOne(600e-9)-1) > 1e-12 {
		t.Errorf("argon replaced by air is not air: %v, %v", whole.Density, air.Density)
	}
	// Refractivities add at one density: half argon, half neon at low pressure.
	half, err := medium(t, Spec{Composition: "argon 50 % + neon 50 %"}).At(1e3, k, 0)
	if err != nil {
		t.Fatal(err)
	}
	argon, err := medium(t, Spec{Composition: "argon"}).At(1e3, k, 0)
	if err != nil {
		t.Fatal(err)
	}
	neon, err := medium(t, Spec{Composition: "neon"}).At(1e3, k, 0)
	if err != nil {
		t.Fatal(err)
	}
	if got, want := half.IndexMinusOne(400e-9), 0.5*(argon.IndexMinusOne(400e-9)+neon.IndexMinusOne(400e-9)); math.Abs(got/want-1) > 1e-5 {
		t.Errorf("half and half: n−1 = %g, want %g", got, want)
	}
	if got, want := half.Kerr(), 0.5*(argon.Kerr()+neon.Kerr()); math.Abs(float64(got/want)-1) > 1e-4 {
		t.Errorf("half and half: n₂ = %g, want %g", float64(got), float64(want))
	}
	if name := half.Medium().Name(); name != "argon 50 % + neon 50 %" {
		t.Errorf("it is called %q", name)
	}
}

// The slope over pressure is that of the density itself.
func TestDensitySlope(t *testing.T) {
	for _, s := range []Spec{
		{Composition: "argon"}, {Composition: "xenon"}, {Composition: "krypton", Density: "virial"},
		{Composition: "neon", Density: "ideal"}, {Composition: "argon 70 % + krypton 30 %"},
	} {
		iso, err := medium(t, s).Isotherm(296.4)
		if err != nil {
			t.Fatal(err)
		}
		at := func(p float64) float64 {
			state, err := iso.State(unit.Pascal(p), 0.01)
			if err != nil {
				t.Fatal(err)
			}
			return float64(state.Density)
		}
		const p, h = 23e5, 1e3
		state, err := iso.State(p, 0.01)
		if err != nil {
			t.Fatal(err)
		}
		want := (at(p+h) - at(p-h)) / (2 * h)
		if math.Abs(state.DensitySlope/want-1) > 1e-6 {
			t.Errorf("%+v: ∂ρ/∂p = %g, differences %g", s, state.DensitySlope, want)
		}
	}
}

// Thermodynamics of the whole range: density rises with pressure and falls
// with temperature, and no answer is not a number.
func TestDensityIsOrderly(t *testing.T) {
	for i := range speciesTable {
		m := medium(t, Spec{Composition: speciesTable[i].Name})
		var above []float64
		for _, k := range []unit.Kelvin{251, 273, 289, 291, 300, 345, 399} {
			iso, err := m.Isotherm(k)
			if err != nil {
				t.Fatal(err)
			}
			var here []float64
			last := 0.0
			for p := 1.0; p < 90e5; p *= 1.31 {
				s, err := iso.State(unit.Pascal(p), 0)
				if err != nil {
					break // condensed
				}
				rho := float64(s.Density)
				if !(rho > last) {
					t.Fatalf("%s at %v, %g Pa: %g after %g", m.Name(), k, p, rho, last)
				}
				here, last = append(here, rho), rho
			}
			for j := range min(len(here), len(above)) {
				if !(here[j] < above[j]) {
					t.Fatalf("%s at %v: density does not fall with temperature", m.Name(), k)
				}
			}
			above = here
		}
	}
}
