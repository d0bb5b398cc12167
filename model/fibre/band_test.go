package fibre

import (
	"math"
	"strings"
	"testing"

	"barline/model/gas"
	"barline/model/unit"
)

// Every number stays finite from the ultraviolet to the infrared, resonances
// included, and the wall's part is bounded there.
func TestFiniteEverywhere(t *testing.T) {
	plain := guide(t, thick, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	kagome := guide(t, Spec{Kind: Kagome, CoreDiameter: 30e-6, Wall: 250e-9, Length: 1}, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	wall := guide(t, thin, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	for lambda := 90e-9; lambda < 7e-6; lambda *= 1.0007 {
		omega := Frequency(unit.Metre(lambda))
		for _, g := range []Guide{plain, kagome, wall} {
			p := g.At(omega)
			for _, v := range []float64{p.Beta, p.Beta1, p.Beta2, p.Beta3, g.Attenuation(omega), g.Leakage(omega)} {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Fatalf("%v at %g nm: %+v", g.Fibre.spec.Kind, lambda*1e9, p)
				}
			}
			if (p.Region == Dark) != (p.Beta == 0) {
				t.Fatalf("%v at %g nm: %v with β = %g", g.Fibre.spec.Kind, lambda*1e9, p.Region, p.Beta)
			}
		}
	}
	// On a resonance itself the form without its margin would still be finite.
	lambda, ok := wall.Resonance(1)
	if !ok {
		t.Fatal("no resonance")
	}
	if l := wall.Leakage(Frequency(lambda)); !(l > 0) || math.IsInf(l, 0) {
		t.Errorf("leak on the resonance is %g", l)
	}
	if p := wall.At(Frequency(lambda)); p.Region != Resonant {
		t.Errorf("on the resonance: %v", p.Region)
	}
}

func TestBandsOfAThinWall(t *testing.T) {
	g := guide(t, thin, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	var bands [MaxBands]Band
	n := g.Bands(&bands)
	if n < 2 {
		t.Fatalf("%d bands", n)
	}
	first, _ := g.Resonance(1)
	second, _ := g.Resonance(2)
	if math.Abs(float64(bands[0].From/first)-1.03) > 1e-3 || math.Abs(float64(bands[1].To/first)-0.97) > 1e-3 || math.Abs(float64(bands[1].From/second)-1.03) > 1e-3 {
		t.Errorf("bands %v with resonances at %v and %v", bands[:n], first, second)
	}
	for i, b := range bands[:n] {
		if !(b.From < b.To) || i > 0 && !(b.To <= bands[i-1].From) {
			t.Errorf("band %d is %v", i, b)
		}
		for _, x := range []float64{0.001, 0.3, 0.7, 0.999} {
			lambda := b.From + unit.Metre(x)*(b.To-b.From)
			if r := g.At(Frequency(lambda)).Region; r != Guided {
				t.Errorf("inside band %d, at %v: %v", i, lambda, r)
			}
		}
	}
}

// Nothing is guided where n_eff² falls below zero: beyond λ = 2πa/u.
func TestCutOff(t *testing.T) {
	g := guide(t, Spec{Kind: Capillary, CoreDiameter: 3e-6, Length: 1}, gas.Spec{Composition: "helium"}, 1e5, 293.15)
	want := 2 * math.Pi * 1.5e-6 / 2.404825557695773
	if got := float64(g.CutOff()); math.Abs(got/want-1) > 1e-12 {
		t.Errorf("cut-off %g, want %g", got, want)
	}
	if r := g.At(Frequency(unit.Metre(1.001 * want))).Region; r != Dark {
		t.Errorf("beyond the cut-off: %v", r)
	}
	if p := g.At(Frequency(unit.Metre(0.99 * want))); p.Region != Guided || !(p.Beta > 0) {
		t.Errorf("short of it: %+v", p)
	}
	dst := make([]float64, 2)
	if r := g.Beta(dst, []float64{Frequency(unit.Metre(0.5 * want)), Frequency(unit.Metre(2 * want))}); r != Dark || dst[1] != 0 || !(dst[0] > 0) {
		t.Errorf("an array across it: %v, %v", r, dst)
	}
}

// Kagome: beyond 0.56√(a₀t) the plain capillary form is more than 15 % off in
// the waveguide's part of the group index (Opt. Lett. 39, 821 (2014)). With
// n−1 ∝ λ²(1+y)², y = 0.08 λ²/(a₀t), that part grows by 6y + 5y².
func TestKagomeReach(t *testing.T) {
	s := Spec{Kind: Kagome, CoreDiameter: 30e-6, Wall: 250e-9, Length: 1}
	g := guide(t, s, gas.Spec{Composition: "argon"}, 0, 293.15)
	plain := guide(t, Spec{Kind: Capillary, CoreDiameter: 30e-6, Length: 1}, gas.Spec{Composition: "argon"}, 0, 293.15)
	at, form := g.Fibre.KagomeReach()
	root := math.Sqrt(15e-6 * 250e-9)
	if math.Abs(float64(at)/root-0.56) > 1e-12 || math.Abs(float64(form)/root-0.98) > 1e-12 {
		t.Errorf("reach %v and %v for √(a₀t) = %g", at, form, root)
	}
	off := func(lambda unit.Metre) float64 {
		a, _ := g.IndexMinusOne(Frequency(lambda))
		b, _ := plain.IndexMinusOne(Frequency(lambda))
		return (a.C0+a.C1)/(b.C0+b.C1) - 1
	}
	if d := off(at); math.Abs(d-0.15) > 0.01 {
		t.Errorf("at 0.56√(a₀t) the plain form is %.1f %% off, want 15 %%", 100*d)
	}
	y := 0.08 * 0.3 * 0.3
	if d := off(unit.Metre(0.3 * root)); math.Abs(d-(6*y+5*y*y)) > 1e-4 {
		t.Errorf("at 0.3√(a₀t) the plain form is %g off, want %g", d, 6*y+5*y*y)
	}
	if p := g.At(Frequency(1.01 * form)); p.Region != OffRange {
		t.Errorf("beyond the reach of the form: %v", p.Region)
	}
	if p := g.At(Frequency(0.99 * form)); p.Region != Guided {
		t.Errorf("within it: %v", p.Region)
	}
}

// The loss of the file, its table, and its rise near a resonance.
func TestLoss(t *testing.T) {
	s := thin
	s.Loss = Loss{Constant: 1}
	g := guide(t, s, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	// Midway between the first two resonances sin² φ = 1.
	first, _ := g.Resonance(1)
	second, _ := g.Resonance(2)
	least := math.Inf(1)
	for lambda := second; lambda < first; lambda += 0.05 * unit.Nanometre {
		least = math.Min(least, g.Decibel(Frequency(lambda)))
	}
	if math.Abs(least-1) > 0.01 {
		t.Errorf("least loss between resonances is %g dB/m, want 1", least)
	}
	if near := g.Decibel(Frequency(first * 1.0005)); !(near > 100) {
		t.Errorf("loss beside a resonance is %g dB/m", near)
	}
	table := Loss{Table: []LossPoint{{200e-9, 4}, {400e-9, 2}, {1000e-9, 1}}}
	for lambda, want := range map[float64]float64{100e-9: 4, 200e-9: 4, 300e-9: 3, 400e-9: 2, 700e-9: 1.5, 2000e-9: 1} {
		if got := table.at(lambda); math.Abs(got-want) > 1e-9 {
			t.Errorf("table at %g nm: %g dB/m, want %g", lambda*1e9, got, want)
		}
	}
	// 10·log₁₀(e) dB are one 1/m of power.
	plain := thick
	plain.Loss = Loss{Constant: 3}
	flat := guide(t, plain, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	if got := math.Exp(-flat.Attenuation(Frequency(1e-6))); math.Abs(got-math.Pow(10, -0.3)) > 1e-12 {
		t.Errorf("3 dB leave %g", got)
	}
}

func TestRefusals(t *testing.T) {
	for _, test := range []struct {
		spec Spec
		says string
	}{
		{Spec{Kind: Capillary, CoreDiameter: 0, Length: 1}, "core diameter is 0 m"},
		{Spec{Kind: Capillary, CoreDiameter: -34e-6, Length: 1}, "core diameter"},
		{Spec{Kind: Capillary, CoreDiameter: unit.Metre(math.NaN()), Length: 1}, "core diameter"},
		{Spec{Kind: Capillary, CoreDiameter: 34e-6, Length: 0}, "length is 0 m"},
		{Spec{Kind: Capillary, CoreDiameter: 34e-6, Length: 1, Wall: 180e-9}, "has no thin wall"},
		{Spec{Kind: Antiresonant, CoreDiameter: 34e-6, Length: 1}, "wall is 0 m"},
		{Spec{Kind: Kagome, CoreDiameter: 34e-6, Length: 1, Wall: 40e-6}, "below the core diameter"},
		{Spec{Kind: Capillary, CoreDiameter: 34e-6, Length: 1, Loss: Loss{Constant: -1}}, "loss is -1 dB/m"},
		{Spec{Kind: Capillary, CoreDiameter: 34e-6, Length: 1, Loss: Loss{Table: []LossPoint{{400e-9, 1}, {300e-9, 1}}}}, "ascending"},
		{Spec{Kind: Capillary, CoreDiameter: 34e-6, Length: 1, Margin: 0.5}, "margin"},
		{Spec{Kind: Kagome, CoreDiameter: 34e-6, Length: 1, Wall: 1e-7, KagomeScale: -1}, "kagome scale"},
		{Spec{Kind: 9, CoreDiameter: 34e-6, Length: 1}, "kind 9"},
	} {
		if _, err := New(test.spec); err == nil || !strings.Contains(err.Error(), test.says) {
			t.Errorf("%+v: %v, want %q", test.spec, err, test.says)
		}
	}
	if _, err := ParseKind("solid"); err == nil {
		t.Error("a solid fibre was taken")
	}
}
