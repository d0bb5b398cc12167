package plan

import (
	"math"
	"slices"
	"testing"

	"barline/model/bench"
	"barline/model/emission"
	"barline/model/fibre"
	"barline/model/flow"
	"barline/model/gas"
	"barline/model/unit"
)

// heron returns the question about the sample bench.
func heron(t testing.TB, from, to unit.Metre) Question {
	t.Helper()
	b, err := bench.Parse(bench.Sample(), "sample")
	if err != nil {
		t.Fatal(err)
	}
	s, err := emission.SetupFromBench(b)
	if err != nil {
		t.Fatal(err)
	}
	const warm = 295.15
	h, err := flow.BenchHandling(b, warm)
	if err != nil {
		t.Fatal(err)
	}
	core, cladding, err := flow.BenchFibre(b, warm)
	if err != nil {
		t.Fatal(err)
	}
	return Question{
		Setup: s, Target: gas.Span{From: from, To: to}, Temperature: warm,
		Pressure: Range[unit.Pascal]{From: 0.08 * unit.Bar, To: 16 * unit.Bar, Steps: 60},
		Energy:   Range[unit.Joule]{From: 0.13e-6, To: 2.6e-6, Steps: 20},
		Supply:   b.Panel.Supply,
		Site: &Site{
			Handling: h, Core: core, Cladding: cladding, Start: unit.Atmosphere, StartAir: 1, Want: 1e-4,
			Low: 50 * unit.Millibar, High: 3 * unit.Bar,
		},
	}
}

func answer(t testing.TB, q Question) *Plan {
	t.Helper()
	p, err := q.Answer()
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func predictor(t testing.TB, q Question, composition string) *emission.Predictor {
	t.Helper()
	p, err := emission.NewPredictor(q.setupFor(composition))
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// What a plan says must be what a prediction says there.
func TestChoicesReachTheTarget(t *testing.T) {
	q := heron(t, 265e-9, 265e-9)
	p := answer(t, q)
	if len(p.Choices) < 3 {
		t.Fatalf("%d gases reach 265 nm, expected argon, krypton and xenon at least", len(p.Choices))
	}
	for _, c := range p.Choices {
		pr := predictor(t, q, c.Gas).Predict(emission.Input{Pressure: c.Pressure, Temperature: q.Temperature, Energy: c.Energy}, nil)
		if off := math.Abs(pr.Emission.Nanometres() - 265); off > 0.1 {
			t.Errorf("%s at %v and %v emits at %v, expected 265 nm", c.Gas, c.Pressure, c.Energy, pr.Emission)
		}
		for _, l := range c.Limits {
			if l.Hard && !l.OK {
				t.Errorf("%s breaks %s: %g, bound %g", c.Gas, l.Name, l.Value, l.Bound)
			}
			if l.Hard && l.Margin < c.Narrowest.Margin {
				t.Errorf("%s: margin of %s is %g, narrower than the narrowest, %g", c.Gas, l.Name, l.Margin, c.Narrowest.Margin)
			}
		}
		if c.Pressure > 16*unit.Bar || c.Energy < q.Energy.From || c.Energy > q.Energy.To || c.EnergyFrom > c.Energy || c.EnergyTo < c.Energy {
			t.Errorf("%s at %v and %v (%v to %v): outside what was asked", c.Gas, c.Pressure, c.Energy, c.EnergyFrom, c.EnergyTo)
		}
	}
	for i := 1; i < len(p.Choices); i++ {
		if p.Choices[i].before(&p.Choices[i-1]) {
			t.Errorf("%s ranks before %s and stands behind it", p.Choices[i].Gas, p.Choices[i-1].Gas)
		}
	}
	for _, c := range p.Choices {
		molecules := slices.ContainsFunc(c.Cautions, func(l Limit) bool { return l.Name == "molecules" })
		if molecules != (c.Gas == "nitrogen") {
			t.Errorf("%s: cautions %+v; only nitrogen has molecules", c.Gas, c.Cautions)
		}
	}
}

// A band is reached by turning the pressure alone.
func TestBand(t *testing.T) {
	q := heron(t, 240e-9, 280e-9)
	q.Gases = []string{"argon"}
	p := answer(t, q)
	if len(p.Choices) != 1 || !p.Choices[0].Whole {
		t.Fatalf("argon: %+v %+v, expected the whole band", p.Choices, p.Refusals)
	}
	c := p.Choices[0]
	for _, end := range []struct {
		p  unit.Pascal
		nm float64
	}{{c.From, 240}, {c.To, 280}} {
		pr := predictor(t, q, "argon").Predict(emission.Input{Pressure: end.p, Temperature: q.Temperature, Energy: c.Energy}, nil)
		if math.Abs(pr.Emission.Nanometres()-end.nm) > 0.1 {
			t.Errorf("at %v it emits at %v, expected %g nm", end.p, pr.Emission, end.nm)
		}
	}
	// Beyond a resonance of the wall the band is only reached in part.
	q = heron(t, 330e-9, 420e-9)
	q.Gases = []string{"argon"}
	p = answer(t, q)
	if len(p.Choices) != 1 || p.Choices[0].Whole || p.Choices[0].Covers.From != 330e-9 || p.Choices[0].Covers.To > 390e-9 {
		t.Errorf("330 to 420 nm: %+v, expected the part below the resonance near 390 nm", p.Choices)
	}
}

// What is said to give way must be enough.
func TestWhatGivesWayIsEnough(t *testing.T) {
	q := heron(t, 265e-9, 265e-9)
	q.Gases = []string{"argon"}
	q.Setup.Rating = 7 * unit.Bar
	p := answer(t, q)
	if len(p.Choices) != 0 || len(p.Refusals) != 1 {
		t.Fatalf("with a rating of 7 bar: %+v", p.Choices)
	}
	r := p.Refusals[0]
	if len(r.Needs) == 0 || r.Needs[0].Name != "pressure" || r.Needs[0].Bound != 7 || !(r.Needs[0].Value > 7) {
		t.Fatalf("needs %+v, expected the pressure first", r.Needs)
	}
	for _, l := range r.Needs[1:] { // the energies it looks at stand a third apart
		if l.Margin < -0.05 {
			t.Errorf("needs %s too, by %.0f %%", l.Name, -100*l.Margin)
		}
	}
	if near, ok := p.Nearest(); !ok || near.Gas != "argon" {
		t.Errorf("nearest to giving way is %q", near.Gas)
	}
	q.Setup.Rating = unit.Pascal(r.Needs[0].Value*1.03) * unit.Bar
	if p = answer(t, q); len(p.Choices) != 1 {
		t.Errorf("with a rating of %v: %s", q.Setup.Rating, p.Refusals[0].Why)
	}
	// Nothing gives way to a wavelength that no gas reaches in this wall.
	q = heron(t, 150e-9, 150e-9)
	p = answer(t, q)
	if len(p.Choices) != 0 {
		t.Errorf("150 nm: %+v", p.Choices)
	}
	for _, r := range p.Refusals {
		if r.Why == "" {
			t.Errorf("%s: no reason", r.Gas)
		}
	}
}

// Every bound of a prediction must be weighed knowingly.
func TestEveryVerdictIsKnown(t *testing.T) {
	seen := map[string]bool{}
	for _, kind := range []fibre.Kind{fibre.Capillary, fibre.Kagome, fibre.Antiresonant} {
		s := heron(t, 265e-9, 265e-9).Setup
		s.Fibre.Kind = kind
		if kind == fibre.Capillary {
			s.Fibre.Wall = 0
		}
		p, err := emission.NewPredictor(s)
		if err != nil {
			t.Fatal(err)
		}
		for _, bar := range []unit.Pascal{0.1, 5, 9, 15, 30} {
			for _, e := range []unit.Joule{1e-8, 1e-6, 1e-5} {
				pr := p.Predict(emission.Input{Pressure: bar * unit.Bar, Temperature: 295, Energy: e}, nil)
				for _, v := range pr.Verdicts[:pr.VerdictCount] {
					seen[v.Name] = true
				}
			}
		}
	}
	for name := range seen {
		if _, ok := senses[name]; !ok {
			t.Errorf("the limit %q is not weighed", name)
		}
	}
	if len(seen) < 12 {
		t.Errorf("only %d limits seen: %v", len(seen), seen)
	}
}

func TestMargin(t *testing.T) {
	for _, c := range []struct {
		s            sense
		value, bound float64
		ok           bool
		want         float64
	}{
		{sense{degree: true}, 4, 16, true, 0.75},
		{sense{degree: true}, 24, 16, false, -0.5},
		{sense{degree: true, below: true}, 10, 5, true, 0.5},
		{sense{degree: true, below: true}, 2.5, 5, false, -1},
		{sense{degree: true, below: true}, 0, 5, false, -far},
		{sense{}, 3, 5, true, 1},
		{sense{}, 3, 5, false, -1},
	} {
		if got := c.s.margin(c.value, c.bound, c.ok); math.Abs(got-c.want) > 1e-12 {
			t.Errorf("%+v, %g to %g: %g, expected %g", c.s, c.value, c.bound, got, c.want)
		}
	}
}

// The slope over pressure is that of the linear answer, which is exact.
func TestSlopes(t *testing.T) {
	q := heron(t, 265e-9, 265e-9)
	q.Gases, q.Setup.Answer = []string{"argon"}, emission.Linear
	c := answer(t, q).Choices[0]
	p := predictor(t, q, "argon")
	at := func(dp unit.Pascal, dt unit.Kelvin) float64 {
		return float64(p.Predict(emission.Input{Pressure: c.Pressure + dp, Temperature: q.Temperature + dt, Energy: c.Energy}, nil).Emission)
	}
	byPressure, byTemperature := (at(1000, 0)-at(-1000, 0))/2000, (at(0, 1)-at(0, -1))/2
	if math.Abs(c.PerPressure/byPressure-1) > 1e-3 || math.Abs(c.PerTemperature/byTemperature-1) > 0.02 {
		t.Errorf("slopes %g m/Pa and %g m/K, by differences %g and %g", c.PerPressure, c.PerTemperature, byPressure, byTemperature)
	}
	if c.EnergyKnown {
		t.Error("the linear answer does not know the slope over energy")
	}
	if got := Steady(2e-14, 0.2e-9); math.Abs(got-1e4) > 1e-6 {
		t.Errorf("0.2 nm at 2e-14 m/Pa: %g Pa", got)
	}
}

// Asked again with the same predictor, a choice stays what it was.
func TestAgain(t *testing.T) {
	q := heron(t, 240e-9, 280e-9)
	q.Gases = []string{"argon"}
	c := answer(t, q).Choices[0]
	again, ok := q.Again(c, predictor(t, q, "argon"))
	if !ok || math.Abs(float64(again.Pressure/c.Pressure)-1) > 1e-3 || again.Energy != c.Energy || again.Whole != c.Whole || again.Gas != "argon" {
		t.Errorf("%v at %v, whole %v, then %v at %v, whole %v", c.Pressure, c.Energy, c.Whole, again.Pressure, again.Energy, again.Whole)
	}
	c.From, c.To = 1*unit.Bar, 1.1*unit.Bar // where nothing is emitted there
	if again, ok := q.Again(c, predictor(t, q, "argon")); ok {
		t.Errorf("near 1 bar: %v", again.Pressure)
	}
}

func TestFill(t *testing.T) {
	q := heron(t, 265e-9, 265e-9)
	q.Gases = []string{"argon"}
	f := answer(t, q).Choices[0].Fill
	want, err := flow.PlanPurge(q.Site.Handling, flow.Purge{Start: 1, Low: q.Site.Low, High: q.Site.High}, unit.Atmosphere, 1e-4, q.Site.Core)
	if err != nil {
		t.Fatal(err)
	}
	if f == nil || f.Why != "" || f.Cycles != want.Cycles || f.Purge != want.Total || !(f.Fill > 0) || !(f.Gas > want.Gas) || f.Air > 1e-4 {
		t.Errorf("fill %+v, purge by package flow %+v", f, want)
	}
	q.Site.Want, q.Site.Cylinder = 1e-6, 5e-6
	if f = answer(t, q).Choices[0].Fill; f.Why == "" || f.Purge != 0 {
		t.Errorf("a purge below what the cylinder brings: %+v", f)
	}
	q.Site = nil
	if f = answer(t, q).Choices[0].Fill; f != nil {
		t.Errorf("no site: %+v", f)
	}
}

func TestQuestionsThatAreRefused(t *testing.T) {
	for name, spoil := range map[string]func(*Question){
		"no target":        func(q *Question) { q.Target = gas.Span{} },
		"band backwards":   func(q *Question) { q.Target = gas.Span{From: 3e-7, To: 2e-7} },
		"not a number":     func(q *Question) { q.Target.To = unit.Metre(math.NaN()) },
		"beyond the pump":  func(q *Question) { q.Target = gas.Span{From: 1.2e-6, To: 1.2e-6} },
		"pressure zero":    func(q *Question) { q.Pressure.From = 0 },
		"energy falls":     func(q *Question) { q.Energy.To = q.Energy.From / 2 },
		"too many steps":   func(q *Question) { q.Energy.Steps = 1e6 },
		"no such gas":      func(q *Question) { q.Gases = []string{"phlogiston"} },
		"anchored at once": func(q *Question) { q.Setup.Answer = emission.Anchored },
	} {
		q := heron(t, 265e-9, 265e-9)
		spoil(&q)
		if _, err := q.Answer(); err == nil {
			t.Errorf("%s: accepted", name)
		}
	}
	q := heron(t, 265e-9, 265e-9)
	q.Gases = []string{"phlogiston", "argon"}
	if p := answer(t, q); len(p.Choices) != 1 || len(p.Refusals) != 1 || p.Refusals[0].Why == "" {
		t.Errorf("one unknown gas of two: %+v %+v", p.Choices, p.Refusals)
	}
}

// BenchmarkPlan: six gases, 60 pressures, 20 energies, one wavelength.
func BenchmarkPlan(b *testing.B) {
	q := heron(b, 265e-9, 265e-9)
	for b.Loop() {
		if _, err := q.Answer(); err != nil {
			b.Fatal(err)
		}
	}
}
