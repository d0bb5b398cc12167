package emission

import (
	"math"
	"strings"
	"testing"

	"barline/model/anchor"
	"barline/model/fibre"
	"barline/model/pulse"
	"barline/model/unit"
)

// law is a κ with the shape that full-field runs show, in place of the runs.
func law(branch int, density float64, energy unit.Joule) float64 {
	x := (density - 280) / 210
	y := float64(energy)/1.3e-6 - 1
	return 80 + 900*x - 250*x*x + 60*x*x*x - 700*y*(1-x) + 300*y*y + 900*float64(branch)
}

// nodesOf carries out all planned runs of the demo bench by the law.
func nodesOf(t *testing.T, s Setup, branches int) *anchor.Map {
	t.Helper()
	b, err := s.AnchorBench()
	if err != nil {
		t.Fatal(err)
	}
	pump := fibre.Frequency(s.Pulse.Wavelength)
	var list []anchor.Node
	for _, k := range b.Plan(nil, anchor.Range{From: 286, To: 493}) {
		n := anchor.Node{Density: k.Density, Energy: k.Energy, Moved: k.Moved}
		if k.Moved != anchor.Nothing {
			continue
		}
		for i := range branches {
			omega, ok := anchor.Solve(b.Guide(k.Density), pump, law(i, k.Density, k.Energy), fibre.Frequency(255*unit.Nanometre))
			if !ok {
				t.Fatalf("no root at %g mol/m³", k.Density)
			}
			n.Lobes = append(n.Lobes, anchor.Lobe{Centroid: fibre.Wavelength(omega), Conversion: 0.08 / float64(1+i)})
		}
		list = append(list, n)
	}
	return b.Build(list)
}

// A κ that the interpolation takes exactly: the answer must solve Δβ = κ, its
// slopes over pressure and energy must be those of solving again, and both
// branches must be there, the stronger first.
func TestAnchoredAnswer(t *testing.T) {
	s := heron(Estimate)
	base := predictor(t, s)
	p, err := base.Anchored(nodesOf(t, s, 2))
	if err != nil {
		t.Fatal(err)
	}
	if base.Setup().Answer != Estimate || p.Setup().Answer != Anchored {
		t.Errorf("answers %v and %v", base.Setup().Answer, p.Setup().Answer)
	}
	in := at(9.13, 294.7, 1.27)
	got := p.Predict(in, nil)
	if got.BranchCount != 2 || got.Branches[0].Emission != got.Emission || !(got.Branches[0].Conversion > got.Branches[1].Conversion) || !(got.Branches[1].Emission < got.Emission-5e-9) {
		t.Fatalf("branches %+v, emission %v (%s)", got.Branches, got.Emission, got.Why)
	}
	out := Prediction{Input: in}
	m, _ := p.prepare(in, &out)
	for i, b := range got.Branches[:2] {
		want := law(i, float64(got.Density), in.Energy)
		if have := m.delta(fibre.Frequency(b.Emission)); math.Abs(have-want) > 0.02 {
			t.Errorf("branch %d: Δβ = %.4f, κ = %.4f 1/m", i, have, want)
		}
	}
	emission := func(change func(*Input)) float64 {
		in := in
		change(&in)
		return float64(p.Predict(in, nil).Emission)
	}
	slopes := map[Quantity]float64{}
	for _, s := range p.Steadiness(got, 0.2e-9) {
		slopes[s.Quantity] = s.Slope
	}
	pressure := (emission(func(i *Input) { i.Pressure += 1e3 }) - emission(func(i *Input) { i.Pressure -= 1e3 })) / 2e3
	energy := (emission(func(i *Input) { i.Energy *= 1.001 }) - emission(func(i *Input) { i.Energy *= 0.999 })) / 0.002
	kelvin := (emission(func(i *Input) { i.Temperature += 0.1 }) - emission(func(i *Input) { i.Temperature -= 0.1 })) / 0.2
	for q, want := range map[Quantity]float64{Pressure: pressure, PulseEnergy: energy, Temperature: kelvin} {
		if math.Abs(slopes[q]/want-1) > 0.02 {
			t.Errorf("%s: slope %g, solving again %g", q, slopes[q], want)
		}
	}
	// No run has moved the core yet: its slope is not offered.
	if _, ok := slopes[CoreRadius]; ok {
		t.Error("a slope over the core radius is offered without a run")
	}
	sum := 0.0
	for _, c := range p.Breakdown(got) {
		sum += float64(c.Effect * c.Effect)
	}
	if math.Abs(math.Sqrt(sum)/float64(got.Sigma)-1) > 1e-9 {
		t.Errorf("entries give %g, sigma %g", math.Sqrt(sum), float64(got.Sigma))
	}
	if tracked := p.Predict(in, &got); math.Abs(float64(tracked.Emission-got.Emission)) > 1e-15 || tracked.ZeroDispersionCount != got.ZeroDispersionCount {
		t.Errorf("tracked %v, cold %v", tracked.Emission, got.Emission)
	}
	before := got
	if n := testing.AllocsPerRun(50, func() { in.Pressure += 10; before = p.Predict(in, &before) }); n != 0 {
		t.Errorf("%g allocations", n)
	}
}

func TestAnchoredRefusals(t *testing.T) {
	s := heron(Estimate)
	p := predictor(t, s)
	if _, err := p.Anchored(nil); err == nil {
		t.Error("no nodes were taken")
	}
	other := s
	other.Pulse.Duration = 30e-15
	if _, err := p.Anchored(nodesOf(t, other, 1)); err == nil || !strings.Contains(err.Error(), "belong to another") {
		t.Errorf("nodes of another pulse: %v", err)
	}
	other = s
	other.Plasma = pulse.Averaged
	if _, err := p.Anchored(nodesOf(t, other, 1)); err == nil {
		t.Error("nodes of another plasma were taken")
	}
	a, err := p.Anchored(nodesOf(t, s, 1))
	if err != nil {
		t.Fatal(err)
	}
	// Outside the nodes the answer is the estimate's, and says so.
	for _, in := range []Input{at(3, 293.15, 1.3), at(16, 293.15, 1.3), at(9, 293.15, 0.7), at(9, 293.15, 2)} {
		got, want := a.Predict(in, nil), p.Predict(in, nil)
		if got != want || got.Answer != Estimate {
			t.Errorf("far outside: %v, %v, want %v of the estimate", got.Answer, got.Emission, want.Emission)
		}
		if len(a.Breakdown(got)) != len(p.Breakdown(want)) || len(a.Steadiness(got, 0.2e-9)) != len(p.Steadiness(want, 0.2e-9)) {
			t.Error("what makes up the uncertainty is not the estimate's")
		}
	}
	// In and out again, each prediction on the one before.
	var before Prediction
	for bar := 6.0; bar < 14; bar += 0.25 {
		in := at(bar, 293.15, 1.3)
		before = a.Predict(in, &before)
		if cold := a.Predict(in, nil); before.Answer != cold.Answer || math.Abs(float64(before.Emission-cold.Emission)) > 1e-15 {
			t.Errorf("at %.2f bar tracked %v %v, cold %v %v", bar, before.Answer, before.Emission, cold.Answer, cold.Emission)
		}
	}
	if a.Clone().Nodes() == nil || p.Nodes() != nil {
		t.Error("a clone loses its nodes, or the first predictor has them")
	}
}
