package emission

import (
	"math"
	"reflect"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"barline/model/bench"
	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/pulse"
	"barline/model/unit"
)

// finite walks through a prediction and names the first field that is no
// number.
func finite(v reflect.Value, path string) string {
	switch v.Kind() {
	case reflect.Float64:
		if f := v.Float(); math.IsNaN(f) || math.IsInf(f, 0) {
			return path
		}
	case reflect.Struct:
		for i := range v.NumField() {
			if bad := finite(v.Field(i), path+"."+v.Type().Field(i).Name); bad != "" && path+"."+v.Type().Field(i).Name != ".Input" {
				return bad
			}
		}
	case reflect.Array:
		for i := range v.Len() {
			if bad := finite(v.Index(i), path); bad != "" {
				return bad
			}
		}
	}
	return ""
}

func setups(t testing.TB) []*Predictor {
	hollow := bare("helium", "", 125e-6)
	hollow.Answer = Estimate
	kagome := bare("argon 80 % + neon 20 %", "", 14.8e-6)
	kagome.Fibre.Kind, kagome.Fibre.Wall, kagome.Answer = fibre.Kagome, 0.25e-6, Estimate
	kagome.Gas.Density = "reference"
	xenon := bare("xenon", "", 20e-6)
	xenon.Gas.Density = "reference"
	higher := heron(Linear)
	higher.Fibre.Mode = fibre.Mode{Family: fibre.HE, Azimuthal: 1, Radial: 2}
	thick := heron(Estimate)
	thick.Fibre.Wall = 2e-6
	chirped := capillary(Estimate)
	chirped.Pulse.GDD, chirped.Pulse.Shape = 400e-30, pulse.Gauss
	var list []*Predictor
	for _, s := range []Setup{capillary(Estimate), heron(Estimate), heron(Linear), hollow, kagome, xenon, higher, thick, chirped} {
		list = append(list, predictor(t, s))
	}
	return list
}

// Whatever comes in, no field is NaN or infinite, and a refusal says why.
func TestNothingIsNotANumber(t *testing.T) {
	list := setups(t)
	odd := []float64{0, -1, 1e-300, 1e300, math.NaN(), math.Inf(1), math.Inf(-1)}
	rapid.Check(t, func(t *rapid.T) {
		p := list[rapid.IntRange(0, len(list)-1).Draw(t, "setup")]
		draw := func(name string, low, high float64) float64 {
			if rapid.IntRange(0, 9).Draw(t, name+" odd") == 0 {
				return rapid.SampledFrom(odd).Draw(t, name)
			}
			return rapid.Float64Range(low, high).Draw(t, name)
		}
		in := Input{
			Pressure: unit.Pascal(draw("pressure", 0, 120e5)), Temperature: unit.Kelvin(draw("temperature", 240, 410)),
			Energy: unit.Joule(draw("energy", 0, 30e-6)), Air: unit.Fraction(draw("air", 0, 1)),
		}
		out := p.Predict(in, nil)
		if bad := finite(reflect.ValueOf(out), ""); bad != "" {
			t.Fatalf("%+v gives %s of %+v", in, bad, out)
		}
		if (!out.Valid || out.Emission == 0) != (out.Why != "") {
			t.Fatalf("%+v: valid %v, emission %v, why %q", in, out.Valid, out.Emission, out.Why)
		}
		if out.Emission > 0 && !(out.Sigma > 0) {
			t.Fatalf("%+v: emission without uncertainty", in)
		}
	})
}

// Following the roots gives what a search from nothing gives.
func TestTrackedIsCold(t *testing.T) {
	list := setups(t)
	rapid.Check(t, func(t *rapid.T) {
		p := list[rapid.IntRange(0, len(list)-1).Draw(t, "setup")]
		in := Input{
			Pressure: unit.Pascal(rapid.Float64Range(0.2e5, 28e5).Draw(t, "pressure")), Temperature: 295.2,
			Energy: unit.Joule(rapid.Float64Range(0.3e-6, 2e-6).Draw(t, "energy")),
		}
		before := p.Predict(in, nil)
		in.Pressure *= unit.Pascal(rapid.Float64Range(0.985, 1.015).Draw(t, "step"))
		in.Temperature += unit.Kelvin(rapid.Float64Range(-0.5, 0.5).Draw(t, "drift"))
		tracked, cold := p.Predict(in, &before), p.Predict(in, nil)
		if math.Abs(float64(tracked.Emission-cold.Emission)) > 1e-15 || tracked.ZeroDispersionCount != cold.ZeroDispersionCount && before.Emission > 0 && cold.Emission > 0 {
			t.Fatalf("%+v: tracked %v with %d zeros, cold %v with %d", in, tracked.Emission, tracked.ZeroDispersionCount, cold.Emission, cold.ZeroDispersionCount)
		}
	})
}

// A slow walk over the whole range, each step following the one before, ends
// where a search from nothing ends.
func TestSlowWalk(t *testing.T) {
	for _, p := range setups(t) {
		var before Prediction
		for bar := 0.5; bar < 24; bar *= 1.004 {
			before = p.Predict(at(bar, 295.2, 1), &before)
		}
		cold := p.Predict(before.Input, nil)
		if math.Abs(float64(cold.Emission-before.Emission)) > 1e-15 || cold.ZeroDispersionCount != before.ZeroDispersionCount {
			t.Errorf("%s: walked to %v with %d zeros, cold %v with %d", p.medium.Name(), before.Emission, before.ZeroDispersionCount, cold.Emission, cold.ZeroDispersionCount)
		}
	}
}

// A search with sixteen times the samples finds nothing more.
func TestSearchMissesNothing(t *testing.T) {
	fine := grid(16 * samples)
	for _, p := range setups(t) {
		for bar := 0.3; bar < 25; bar *= 1.07 {
			out := Prediction{}
			m, ok := p.prepare(at(bar, 295.2, 1), &out)
			if !ok {
				continue
			}
			var bands [fibre.MaxBands]fibre.Band
			n := m.guide.Bands(&bands)
			coarse, dense := m.search(bands[:n], places), m.search(bands[:n], fine)
			if coarse.count != dense.count || math.Abs(coarse.root-dense.root) > 1e-9*dense.root {
				t.Errorf("%s, %v, %v at %.3g bar: %d zeros and root %v, searched closely %d and %v", p.medium.Name(), p.fibre.Spec().Kind, p.fibre.Spec().Wall, bar,
					coarse.count, wavelength(coarse.root), dense.count, wavelength(dense.root))
			}
		}
	}
}

// The root solves its own equation, on the short-wave side of the zero, and
// zeros are zeros of β₂ in ascending order.
func TestRootsAreRoots(t *testing.T) {
	for _, p := range setups(t) {
		for bar := 0.3; bar < 20; bar *= 1.13 {
			pr := p.Predict(at(bar, 295.2, 1), nil)
			out := Prediction{Input: pr.Input}
			m, ok := p.prepare(pr.Input, &out)
			if !ok {
				continue
			}
			for i := range pr.ZeroDispersionCount {
				z := m.at(fibre.Frequency(pr.ZeroDispersion[i]))
				if scale := math.Abs(z.beta3) * fibre.Frequency(pr.ZeroDispersion[i]); math.Abs(z.beta2) > 1e-9*scale || z.region != fibre.Guided {
					t.Errorf("%s at %g bar: β₂ = %g at its zero %v (%v)", p.medium.Name(), bar, z.beta2, pr.ZeroDispersion[i], z.region)
				}
				if i > 0 && !(pr.ZeroDispersion[i] > pr.ZeroDispersion[i-1]) {
					t.Errorf("zeros %v do not ascend", pr.ZeroDispersion[:pr.ZeroDispersionCount])
				}
			}
			if pr.Emission == 0 {
				continue
			}
			r := m.at(fibre.Frequency(pr.Emission))
			if math.Abs(r.excess()) > 1e-6 || !(r.rise() > 0) || r.region != fibre.Guided {
				t.Errorf("%s at %g bar: Δβ−κ = %g, slope %g at %v", p.medium.Name(), bar, r.excess(), r.rise(), pr.Emission)
			}
		}
	}
}

// The estimate against full-field centroids of an independent calculation
// (mode-averaged ionisation): within its band of 10 nm.
func TestEstimateMeetsPropagation(t *testing.T) {
	p := predictor(t, capillary(Estimate))
	for bar, want := range map[float64]float64{7: 236.74, 9: 257.81, 11: 275.09} {
		if got := p.Predict(at(bar, 293.15, 1.5), nil); math.Abs(got.Emission.Nanometres()-want) > 10 {
			t.Errorf("%g bar: %.2f nm, propagated %.2f nm", bar, got.Emission.Nanometres(), want)
		}
	}
}

func TestNoAnswerSaysWhy(t *testing.T) {
	xenon := bare("xenon", "", 20e-6)
	xenon.Gas.Density = "reference"
	resonant := heron(Estimate)
	resonant.Pulse.Wavelength = 388 * unit.Nanometre
	for _, test := range []struct {
		name  string
		setup Setup
		in    Input
		valid bool
		why   string
	}{
		{"liquid xenon", xenon, Input{Pressure: 50e5, Temperature: 273.15, Energy: 1e-6}, false, "liquid"},
		{"pressure above the range", heron(Estimate), at(120, 293, 1), false, "above the range"},
		{"negative pressure", heron(Estimate), at(-0.01, 293, 1), false, "below zero"},
		{"no temperature", heron(Estimate), at(9, 0, 1), false, "temperature"},
		{"negative energy", heron(Estimate), at(9, 293, -1), false, "energy"},
		{"no energy", heron(Estimate), at(9, 293, 0), true, whyNoLight},
		{"empty", heron(Estimate), at(0, 293, 1), true, whyVacuum},
		{"pump on a resonance", resonant, at(9, 293, 1), false, whyPump},
		{"normal dispersion", bare("argon", "", 150e-6), at(3, 293, 1), true, whyNormal},
		{"too thin a gas", heron(Linear), at(0.5, 293, 1), true, whyNoMatch},
	} {
		got := predictor(t, test.setup).Predict(test.in, nil)
		if got.Valid != test.valid || got.Emission != 0 || !strings.Contains(got.Why, test.why) {
			t.Errorf("%s: valid %v, emission %v, %q; want %v and %q", test.name, got.Valid, got.Emission, got.Why, test.valid, test.why)
		}
	}
	// Without light the linear answer stands: it does not ask for a pulse.
	if got := predictor(t, heron(Linear)).Predict(at(9, 293, 0), nil); got.Emission == 0 || got.SolitonOrder != 0 {
		t.Errorf("linear without light: %+v", got)
	}
}

// Each limit can fail, and says so where it does.
func TestVerdicts(t *testing.T) {
	with := func(change func(*Setup)) Setup {
		s := heron(Estimate)
		change(&s)
		return s
	}
	for _, test := range []struct {
		limit string
		setup Setup
		in    Input
	}{
		{"dispersion at the pump", bare("argon", "", 150e-6), at(3, 293, 1)},
		{"soliton order", heron(Estimate), at(30, 293, 12)},
		{"least soliton order", heron(Estimate), at(9, 293, 0.01)},
		{"length to compression", with(func(s *Setup) { s.Fibre.Length = 0.02 }), at(9, 293, 1.3)},
		{"ionised fraction (rough)", heron(Estimate), at(9, 293, 2)},
		{"peak power", bare("xenon", "", 50e-6), at(20, 293, 30)},
		{"distance from a wall resonance", with(func(s *Setup) { s.Pulse.Wavelength = 403e-9 }), at(1, 293, 1)},
		{"attenuation of the pump", with(func(s *Setup) { s.Fibre.Loss.Constant = 20 }), at(9, 293, 1.3)},
		{"least attenuation of such a bore", capillary(Estimate), at(9, 293, 1.3)},
		{"range of the index source", with(func(s *Setup) { s.Gas.Index = "cuthbertson-1910" }), at(9, 293, 1.3)},
		{"range of the spectrometer", with(func(s *Setup) { s.Spectrometer = gas.Span{From: 300e-9, To: 400e-9} }), at(9, 293, 1.3)},
		{"pump wavelength", with(func(s *Setup) { s.Fibre.Kind, s.Pulse.Wavelength = fibre.Kagome, 1.2e-6 }), at(9, 293, 1.3)},
		{"pressure", with(func(s *Setup) { s.Rating = 8e5 }), at(9, 293, 1.3)},
		{"heating by ionisation (rough)", with(func(s *Setup) { s.RepetitionRate = 10e6 }), at(9, 293, 1.3)},
	} {
		got := predictor(t, test.setup).Predict(test.in, nil)
		found := false
		for _, v := range got.Verdicts[:got.VerdictCount] {
			if v.Name == test.limit {
				found = true
				if v.OK || v.Consequence == "" {
					t.Errorf("%s: %+v", test.limit, v)
				}
			}
		}
		if !found {
			t.Errorf("%s is not among %+v (%s)", test.limit, got.Verdicts[:got.VerdictCount], got.Why)
		}
	}
	// The demo bench at its working point passes all.
	got := predictor(t, heron(Estimate)).Predict(at(9, 293, 1.3), nil)
	for _, v := range got.Verdicts[:got.VerdictCount] {
		if !v.OK {
			t.Errorf("the working point fails %+v", v)
		}
	}
}

// 0.1 µJ left over 0.1 m at 100 kHz warm argon by about half a kelvin.
func TestWarming(t *testing.T) {
	argon, err := gas.Named("argon")
	if err != nil {
		t.Fatal(err)
	}
	if got := warming(0.1e-6/0.1, 100e3, argon.ThermalConductivity); math.Abs(got-0.457) > 0.01 {
		t.Errorf("%g K", got)
	}
}

func TestPredictAllocatesNothing(t *testing.T) {
	p := predictor(t, heron(Estimate))
	in := at(9, 293.15, 1.3)
	before := p.Predict(in, nil)
	for name, do := range map[string]func(){
		"tracked":         func() { in.Pressure += 10; before = p.Predict(in, &before) },
		"new temperature": func() { in.Temperature += 1e-3; before = p.Predict(in, &before) },
		"with air":        func() { air := in; air.Air = 1e-3; p.Predict(air, nil) },
		"cold":            func() { p.Predict(in, nil) },
		"refused":         func() { p.Predict(at(-1, 293, 1), nil) },
	} {
		if n := testing.AllocsPerRun(50, do); n != 0 {
			t.Errorf("%s: %g allocations", name, n)
		}
	}
	var dst [50]CurvePoint
	if n := testing.AllocsPerRun(5, func() { p.Curve(dst[:], 5e5, 12e5, in) }); n != 0 {
		t.Errorf("curve: %g allocations", n)
	}
}

func TestCurve(t *testing.T) {
	p := predictor(t, heron(Estimate))
	dst := make([]CurvePoint, 29)
	p.Curve(dst, 5e5, 12e5, at(0, 293.15, 1.3))
	for i, point := range dst {
		if want := unit.Pascal(5e5 + 0.25e5*float64(i)); math.Abs(float64(point.Pressure-want)) > 1e-6 {
			t.Errorf("point %d at %v", i, point.Pressure)
		}
		single := p.Clone().Predict(at(point.Pressure.Bar(), 293.15, 1.3), nil)
		if math.Abs(float64(single.Emission-point.Emission)) > 1e-15 {
			t.Errorf("at %v: curve %v, alone %v", point.Pressure, point.Emission, single.Emission)
		}
	}
	p.Curve(nil, 1, 2, Input{})
	rows := [][]CurvePoint{make([]CurvePoint, 3), make([]CurvePoint, 3)}
	p.Map(rows, []unit.Joule{1e-6, 1.3e-6}, 8e5, 10e5, at(0, 293.15, 0))
	for i, e := range []float64{1, 1.3} {
		if single := p.Predict(at(9, 293.15, e), nil); math.Abs(float64(single.Emission-rows[i][1].Emission)) > 1e-15 {
			t.Errorf("map at %g µJ: %v, alone %v", e, rows[i][1].Emission, single.Emission)
		}
	}
	one := dst[:1]
	p.Curve(one, 7e5, 8e5, at(0, 293.15, 1.3))
	if one[0].Pressure != 7e5 || one[0].Emission == 0 {
		t.Errorf("a curve of one point: %+v", one[0])
	}
}

func TestSetupFromBench(t *testing.T) {
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	s, err := SetupFromBench(b)
	if err != nil {
		t.Fatal(err)
	}
	if s.Fibre.Kind != fibre.Antiresonant || math.Abs(s.Fibre.Wall.Nanometres()-180) > 1e-9 || s.Rating != 16e5 || s.Spectrometer.To == 0 || s.RepetitionRate != 100e3 || s.Answer != Estimate {
		t.Errorf("setup %+v", s)
	}
	p := predictor(t, s)
	if got := p.Predict(at(9, 293.15, 1.3), nil); !(got.Emission > 240e-9 && got.Emission < 270e-9) {
		t.Errorf("the sample emits at %v (%s)", got.Emission, got.Why)
	}
	for name, change := range map[string]func(*bench.Bench){
		"kind": func(b *bench.Bench) { b.Fibre.Kind = "solid" }, "index": func(b *bench.Bench) { b.Gas.Index = "peck-khanna-1966" },
		"n2": func(b *bench.Bench) { b.Gas.N2 = "nobody-1900" }, "shape": func(b *bench.Bench) { b.Pulse.Shape = "square" },
		"answer": func(b *bench.Bench) { b.Emission.Answer = "guess" }, "density": func(b *bench.Bench) { b.Gas.Density = "wet" },
		"wavelength": func(b *bench.Bench) { b.Pulse.Wavelength = 0 }, "duration": func(b *bench.Bench) { b.Pulse.Duration = 0 },
	} {
		b, err := bench.Parse(bench.Sample(), "heron.toml")
		if err != nil {
			t.Fatal(err)
		}
		change(b)
		if _, err := SetupFromBench(b); err == nil {
			t.Errorf("a wrong %s was taken", name)
		}
	}
}
