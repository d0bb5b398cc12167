package fibre

import (
	"math"
	"testing"

	"barline/model/gas"
	"barline/model/unit"
)

func guide(t *testing.T, s Spec, medium gas.Spec, p unit.Pascal, k unit.Kelvin) Guide {
	t.Helper()
	f, err := New(s)
	if err != nil {
		t.Fatal(err)
	}
	m, err := gas.New(medium)
	if err != nil {
		t.Fatal(err)
	}
	state, err := m.At(p, k, 0)
	if err != nil {
		t.Fatal(err)
	}
	return Guide{f, state}
}

// crossing returns the wavelength between from and to at which β₂ changes sign.
func crossing(g Guide, from, to unit.Metre) unit.Metre {
	lo, hi := Frequency(to), Frequency(from)
	rising := g.At(hi).Beta2 > 0
	for range 80 {
		mid := 0.5 * (lo + hi)
		if (g.At(mid).Beta2 > 0) == rising {
			hi = mid
		} else {
			lo = mid
		}
	}
	return Wavelength(lo)
}

var (
	thick = Spec{Kind: Capillary, CoreDiameter: 34e-6, Length: 0.3}
	thin  = Spec{Kind: Antiresonant, CoreDiameter: 34e-6, Wall: 180e-9, Length: 0.3}
)

// An independent calculation in another language, from the same published
// coefficients: argon as an ideal gas at 293.15 K in a bare capillary of 17 µm
// core radius, 1030 nm. All printed digits.
func TestCapillaryReference(t *testing.T) {
	spec := gas.Spec{Composition: "argon", Density: "ideal", Index: "borzsonyi-2008", N2: "9.110e-24 m2/W"}
	for _, want := range []struct{ bar, zero, beta2, gamma float64 }{
		{7, 586.041, -882.5, 8.268e-7},
		{9, 622.740, -854.2, 1.063e-6},
		{11, 653.829, -825.9, 1.299e-6},
	} {
		g := guide(t, thick, spec, unit.Pascal(want.bar*1e5), 293.15)
		omega := Frequency(1030e-9)
		zero := crossing(g, 400e-9, 900e-9).Nanometres()
		beta2 := g.At(omega).Beta2 * 1e30
		gamma := g.Gamma(omega)
		if math.Abs(zero-want.zero) > 5.1e-4 || math.Abs(beta2-want.beta2) > 0.051 || math.Abs(gamma/want.gamma-1) > 5e-4 {
			t.Errorf("%g bar: zero dispersion %.4f nm, β₂ %.2f fs²/m, γ %.4g 1/(W m); want %.3f, %.1f, %.3e",
				want.bar, zero, beta2, gamma, want.zero, want.beta2, want.gamma)
		}
	}
}

// The same in the worked values for peck-fisher-1964 with the real density and
// Lorentz–Lorenz: zero dispersion, n_eff−1 and β₂ at 800 and 260 nm, and other
// modes. An independent calculation.
func TestCapillaryRealGas(t *testing.T) {
	tests := []struct {
		radius, bar                     float64 // µm
		mode                            string
		zero, n800, b800, n260, b260    float64
		zeroDigits, nDigits, betaDigits float64
	}{
		{15, 1, "HE11", 349.82, 48.8956, -572.089, 0, 58.033, 6e-3, 1e-3, 6e-3},
		{15, 10, "HE11", 603.53, 2380.7426, -403.594, 2767.4685, 768.132, 6e-3, 1e-3, 6e-3},
		{15, 30, "HE11", 792.76, 7664.5086, -21.320, 0, 2379.836, 6e-3, 1e-3, 6e-3},
		{50, 2, "HE11", 731.66, 496.0391, -16.214, 0, 154.883, 6e-3, 1e-3, 6e-3},
		{125, 1, "HE11", 968.02, 254.2055, 9.932, 276.8360, 78.001, 6e-3, 1e-3, 6e-3},
		{15, 10, "HE12", 406.23, 1493.0664, -2926.925, 2673.7810, 681.821, 6e-3, 1e-3, 6e-3},
		{15, 10, "HE21", 482.50, 2060.8715, -1311.580, 2733.7000, 737.027, 6e-3, 1e-3, 6e-3},
		{15, 10, "TE01", 482.50, 2060.8715, -1311.580, 2733.7000, 737.027, 6e-3, 1e-3, 6e-3},
		{125, 1, "HE12", 643.97, 241.4013, -26.348, 275.4836, 76.755, 6e-3, 1e-3, 6e-3},
	}
	for _, test := range tests {
		mode, err := ParseMode(test.mode)
		if err != nil {
			t.Fatal(err)
		}
		spec := Spec{Kind: Capillary, CoreDiameter: unit.Metre(2e-6 * test.radius), Length: 1, Mode: mode}
		g := guide(t, spec, gas.Spec{Composition: "argon", Index: "peck-fisher-1964"}, unit.Pascal(test.bar*1e5), 293.15)
		zero := crossing(g, 250e-9, 1200e-9).Nanometres()
		n800, _ := g.IndexMinusOne(Frequency(800e-9))
		n260, _ := g.IndexMinusOne(Frequency(260e-9))
		b800, b260 := g.At(Frequency(800e-9)).Beta2*1e30, g.At(Frequency(260e-9)).Beta2*1e30
		if math.Abs(zero-test.zero) > test.zeroDigits ||
			math.Abs(n800.C0*1e6-test.n800) > test.nDigits || test.n260 != 0 && math.Abs(n260.C0*1e6-test.n260) > test.nDigits ||
			math.Abs(b800-test.b800) > test.betaDigits || math.Abs(b260-test.b260) > test.betaDigits {
			t.Errorf("%s, %g µm, %g bar: zero %.3f nm, n−1 %.4f and %.4f, β₂ %.3f and %.3f; want %.2f, %.4f, %.4f, %.3f, %.3f",
				test.mode, test.radius, test.bar, zero, n800.C0*1e6, n260.C0*1e6, b800, b260,
				test.zero, test.n800, test.n260, test.b800, test.b260)
		}
	}
}

// β₂ and β₃ against Richardson-extrapolated central differences of β₁ and β₂,
// for every kind of fibre: the check, never the method.
func TestDerivativesAgainstDifferences(t *testing.T) {
	kagome := Spec{Kind: Kagome, CoreDiameter: 29.6e-6, Wall: 250e-9, Length: 0.3}
	for _, s := range []Spec{thick, thin, kagome} {
		g := guide(t, s, gas.Spec{Composition: "argon"}, 8.137e5, 294.7)
		for _, lambda := range []unit.Metre{252e-9, 305e-9, 512e-9, 803e-9, 1030e-9} {
			omega := Frequency(lambda)
			got := g.At(omega)
			if got.Region != Guided {
				t.Fatalf("%v at %v: %v", s.Kind, lambda, got.Region)
			}
			slope := func(f func(Propagation) float64) float64 {
				central := func(h float64) float64 {
					return (f(g.At(omega*(1+h))) - f(g.At(omega*(1-h)))) / (2 * omega * h)
				}
				const h = 2e-3
				a, b, c := central(h), central(h/2), central(h/4)
				ab, bc := (4*b-a)/3, (4*c-b)/3
				return (16*bc - ab) / 15
			}
			b2 := slope(func(p Propagation) float64 { return p.Beta1 })
			b3 := slope(func(p Propagation) float64 { return p.Beta2 })
			// A difference of β₁ cannot resolve more than its own rounding.
			noise := 4e-16 * got.Beta1 / (omega * 5e-4)
			if math.Abs(b2-got.Beta2) > 1e-9*math.Abs(got.Beta2)+noise {
				t.Errorf("%v at %v: β₂ %g, differences %g", s.Kind, lambda, got.Beta2, b2)
			}
			if math.Abs(b3-got.Beta3) > 1e-8*math.Abs(got.Beta3)+1e-13*math.Abs(got.Beta2)/(omega*5e-4) {
				t.Errorf("%v at %v: β₃ %g, differences %g", s.Kind, lambda, got.Beta3, b3)
			}
		}
	}
}

// Where cot φ = 0 the wall takes nothing: the antiresonant form is the plain
// capillary to the last digits.
func TestAntiresonantMeetsCapillary(t *testing.T) {
	g := guide(t, thin, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	plain := guide(t, thick, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	difference := func(lambda unit.Metre) float64 {
		a, _ := g.IndexMinusOne(Frequency(lambda))
		b, _ := plain.IndexMinusOne(Frequency(lambda))
		return a.C0 - b.C0
	}
	// φ = 3π/2 midway between the first two resonances, φ = π/2 beyond the first.
	phase := func(lambda unit.Metre) float64 {
		v := 1e-6 / float64(lambda)
		step := glass(v*v).C0 - g.Gas.Susceptibility(Frequency(lambda)).C0
		return Frequency(lambda) / c * math.Sqrt(step) * float64(thin.Wall)
	}
	for _, test := range []struct {
		phase    float64
		from, to unit.Metre
	}{{1.5 * math.Pi, 220e-9, 380e-9}, {0.5 * math.Pi, 400e-9, 1200e-9}} {
		lo, hi := float64(test.from), float64(test.to)
		for range 80 {
			mid := 0.5 * (lo + hi)
			if phase(unit.Metre(mid)) > test.phase {
				lo = mid
			} else {
				hi = mid
			}
		}
		lambda := unit.Metre(lo)
		away := difference(unit.Metre(1.05 * lo))
		if d := difference(lambda); math.Abs(d) > 1e-9*math.Abs(away) {
			t.Errorf("at %v, cot φ = 0: the wall changes the index by %g", lambda, d)
		}
		if difference(unit.Metre(0.99*lo))*difference(unit.Metre(1.01*lo)) >= 0 {
			t.Errorf("at %v the wall's part does not change sign", lambda)
		}
	}
}

// Resonances of a 180 nm wall: φ = mπ, at 388 and 210 nm; between the margins
// and only there is no prediction.
func TestResonances(t *testing.T) {
	g := guide(t, thin, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	for m, want := range map[int]float64{1: 388, 2: 210} {
		lambda, ok := g.Resonance(m)
		if !ok || math.Abs(lambda.Nanometres()-want) > 1 {
			t.Errorf("resonance %d at %v, want near %v nm", m, lambda, want)
		}
		n := glassIndex(float64(lambda))
		if again := 2 * 180e-9 / float64(m) * math.Sqrt(n*n-1-g.Gas.Susceptibility(Frequency(lambda)).C0); math.Abs(again-float64(lambda)) > 1e-15 {
			t.Errorf("resonance %d: %v does not satisfy its own equation (%g)", m, lambda, again)
		}
		for _, x := range []float64{0.975, 1, 1.025} {
			if r := g.At(Frequency(unit.Metre(x) * lambda)).Region; r != Resonant {
				t.Errorf("at %g of resonance %d: %v", x, m, r)
			}
		}
		for _, x := range []float64{0.96, 1.04} {
			if r := g.At(Frequency(unit.Metre(x) * lambda)).Region; r != Guided {
				t.Errorf("at %g of resonance %d: %v", x, m, r)
			}
		}
		gap := g.Gaps()[m-1]
		if low, high := gap.From/lambda, gap.To/lambda; math.Abs(float64(low)-0.97) > 1e-12 || math.Abs(float64(high)-1.03) > 1e-12 {
			t.Errorf("gap %d reaches from %g to %g of its resonance, want 3 %% to each side", m, low, high)
		}
	}
	bore := guide(t, thick, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	if gaps := bore.Gaps(); gaps != nil {
		t.Errorf("a capillary has gaps at %v", gaps)
	}
}
