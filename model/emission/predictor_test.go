package emission

import (
	"math"
	"sync"
	"testing"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/ionise"
	"barline/model/pulse"
	"barline/model/unit"
)

// tables keeps one ionisation table for each gas and pump of the tests.
var tables sync.Map

func predictor(t testing.TB, s Setup) *Predictor {
	t.Helper()
	key := [3]any{s.Gas.Composition, s.Pulse.Wavelength, s.Fibre.Mode}
	kept, _ := tables.Load(key)
	table, _ := kept.(*ionise.Table)
	p, err := newPredictor(s, table)
	if err != nil {
		t.Fatal(err)
	}
	tables.Store(key, p.electron)
	return p
}

// capillary is the reference case; heron the demo bench.
func capillary(answer Answer) Setup {
	return Setup{
		Gas:         gas.Spec{Composition: "argon", Density: "ideal", Index: "borzsonyi-2008", N2: "9.110e-24 m2/W"},
		Fibre:       fibre.Spec{Kind: fibre.Capillary, CoreDiameter: 34e-6, Length: 0.3},
		Pulse:       pulse.Pulse{Wavelength: 1030e-9, Duration: 35e-15, Energy: 1.5e-6},
		Answer:      answer,
		Uncertainty: DefaultUncertainty(),
	}
}

func heron(answer Answer) Setup {
	return Setup{
		Gas:            gas.Spec{Composition: "argon", Density: "virial", Index: "peck-fisher-1964", N2: "lehmeier-1985"},
		Fibre:          fibre.Spec{Kind: fibre.Antiresonant, CoreDiameter: 34e-6, Wall: 180e-9, Length: 0.3, Loss: fibre.Loss{Constant: 1}},
		Pulse:          pulse.Pulse{Wavelength: 1030e-9, Duration: 35e-15, Energy: 1.3e-6},
		RepetitionRate: 100e3,
		Answer:         answer,
		Uncertainty:    DefaultUncertainty(),
	}
}

func at(bar, kelvin, microjoule float64) Input {
	return Input{Pressure: unit.Pascal(bar * 1e5), Temperature: unit.Kelvin(kelvin), Energy: unit.Joule(microjoule * 1e-6)}
}

// Zero dispersion, β₂, γ and soliton order of the reference case, from an
// independent calculation in another language; all printed digits.
func TestReferenceRows(t *testing.T) {
	p := predictor(t, capillary(Estimate))
	for _, want := range []struct{ bar, n, zero, beta2, gamma float64 }{
		{7, 3.7350, 586.041, -882.5, 8.268e-7},
		{9, 4.3048, 622.740, -854.2, 1.063e-6},
		{11, 4.8401, 653.829, -825.9, 1.299e-6},
	} {
		got := p.Predict(at(want.bar, 293.15, 1.5), nil)
		if got.ZeroDispersionCount != 1 || math.Abs(got.ZeroDispersion[0].Nanometres()-want.zero) > 5.1e-4 ||
			math.Abs(got.Beta2*1e30-want.beta2) > 0.051 || math.Abs(got.Gamma/want.gamma-1) > 5e-4 ||
			math.Abs(got.SolitonOrder-want.n) > 5.1e-5 {
			t.Errorf("%g bar: N %.5f, zero dispersion %v (%d), β₂ %.3f, γ %.4g; want %+v", want.bar, got.SolitonOrder,
				got.ZeroDispersion[0].Nanometres(), got.ZeroDispersionCount, got.Beta2*1e30, got.Gamma, want)
		}
		t.Logf("%g bar: estimate %.2f nm ± %.2f, κ %.1f, ionised %.4f", want.bar, got.Emission.Nanometres(), got.Sigma.Nanometres(), got.Kappa, float64(got.IonisedFraction))
	}
}

// Linear phase matching in an antiresonant fibre, 1030 nm: an independent
// calculation gives 234.6 nm at 7 bar and 266.2 nm at 9 bar, and no other root.
// It scales n²−1 with density where Lorentz–Lorenz is used here, which at 9 bar
// disperses 0.26 % more; package fibre meets it to the digit.
func TestAntiresonantRoots(t *testing.T) {
	s := heron(Linear)
	s.Gas.Density, s.Gas.Index = "ideal", "borzsonyi-2008"
	p := predictor(t, s)
	for _, want := range []struct{ bar, nm, steeper float64 }{{7, 234.6, 0.25}, {9, 266.2, 0.37}} {
		got := p.Predict(at(want.bar, 293.15, 1.3), nil)
		if math.Abs(got.Emission.Nanometres()-want.nm-want.steeper) > 0.06 {
			t.Errorf("%g bar: %.3f nm, want %.1f nm and %g nm for Lorentz–Lorenz (%s)", want.bar, got.Emission.Nanometres(), want.nm, want.steeper, got.Why)
		}
	}
}

func BenchmarkPredict(b *testing.B) {
	for _, test := range []struct {
		name  string
		setup Setup
	}{{"capillary", capillary(Estimate)}, {"antiresonant", heron(Estimate)}} {
		p := predictor(b, test.setup)
		b.Run(test.name+"/tracked", func(b *testing.B) {
			b.ReportAllocs()
			in := at(9, 293.15, 1.3)
			before := p.Predict(in, nil)
			for b.Loop() {
				in.Pressure += 0.3
				before = p.Predict(in, &before)
			}
			if before.Emission == 0 {
				b.Fatal(before.Why)
			}
		})
		b.Run(test.name+"/tracked, new temperature", func(b *testing.B) {
			b.ReportAllocs()
			in := at(9, 293.15, 1.3)
			before := p.Predict(in, nil)
			for b.Loop() {
				in.Pressure += 0.3
				in.Temperature += 1e-7
				before = p.Predict(in, &before)
			}
		})
		b.Run(test.name+"/cold", func(b *testing.B) {
			b.ReportAllocs()
			in := at(9, 293.15, 1.3)
			for b.Loop() {
				in.Pressure += 0.3
				p.Predict(in, nil)
			}
		})
		b.Run(test.name+"/curve of 400", func(b *testing.B) {
			b.ReportAllocs()
			var dst [400]CurvePoint
			for b.Loop() {
				p.Curve(dst[:], 5e5, 12e5, at(9, 293.15, 1.3))
			}
		})
	}
}
