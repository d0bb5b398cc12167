package gas

import (
	"math"
	"testing"

	"barline/model/unit"
)

// Refractivity of dry air with 450 ppm of carbon dioxide at 633.0 nm, (n−1)·10⁸:
// table 1 of P. E. Ciddor, Appl. Opt. 35, 1566 (1996) (from memory). His density
// is another equation's and he scales n−1 with it, so that a part in 10⁴ of the
// last step of pressure is left.
func TestAirOfCiddor(t *testing.T) {
	m := medium(t, Spec{Composition: "air", Index: "ciddor-1996"})
	for _, test := range []struct {
		celsius, kilopascal, want float64
	}{{20, 80, 21458.0}, {20, 100, 26824.4}, {20, 120, 32191.6}, {10, 100, 27774.7}, {30, 100, 25937.2}} {
		s, err := m.At(unit.Pascal(test.kilopascal*1e3), unit.Celsius(test.celsius), 0)
		if err != nil {
			t.Fatal(err)
		}
		if got := s.IndexMinusOne(633e-9) * 1e8; math.Abs(got-test.want) > 1 {
			t.Errorf("%g °C, %g kPa: %.1f, want %.1f", test.celsius, test.kilopascal, got, test.want)
		}
	}
}

// Dynamic polarisability of helium at 632.9908 nm, 1.39181141 atomic units: the
// abstract of K. Piszczatowski et al., arXiv:1502.01669 (2015). Static ones of
// neon and argon: arXiv:2006.15448 (2020) and arXiv:2301.12502 (2023).
func TestAbInitioPolarisabilities(t *testing.T) {
	for _, test := range []struct {
		gas, index   string
		lambda, want float64
		within       float64
	}{
		{"helium", "piszczatowski-2015", 632.9908e-9, 1.39181141, 2e-6},
		{"neon", "lesiuk-2020", 5.9e-6, 2.66080, 2e-4},
		{"argon", "lesiuk-2023", 5.9e-6, 11.0763, 2e-3},
	} {
		s := standard(t, test.gas, test.index)
		chi := s.Susceptibility(2 * math.Pi * c / test.lambda).C0
		got := chi / (chi + 3) / float64(s.Density) / polarisedMole
		if math.Abs(got-test.want) > test.within {
			t.Errorf("%s: %.8f atomic units, want %.8f", test.gas, got, test.want)
		}
	}
}

// What cannot be read is refused, and what can adds up to one.
func FuzzParseComposition(f *testing.F) {
	for _, seed := range []string{"argon", "Ar", "argon 90 % + neon 10 %", "helium 30 %+neon 30 %+argon 40 %", "argon 50 % + xenon", "+", "argon 1e999 %"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		list, err := ParseComposition(text)
		if err != nil {
			return
		}
		sum := 0.0
		for _, c := range list {
			sum += float64(c.Fraction)
		}
		if len(list) == 0 || math.Abs(sum-1) > 1e-6 {
			t.Fatalf("%q read as %v", text, list)
		}
		if _, err := New(Spec{Composition: text}); err != nil {
			t.Fatalf("%q reads, but makes no medium: %v", text, err)
		}
	})
}
