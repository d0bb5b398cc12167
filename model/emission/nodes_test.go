package emission

import (
	"bufio"
	"encoding/json"
	"math"
	"os"
	"testing"

	"barline/model/anchor"
	"barline/model/unit"
)

// heronNodes are full-field runs of the single-ring fibre between 7 and 12 bar,
// computed by package pulse: half the lattice's densities on three energies,
// and one run for each uncertain input.
func heronNodes(t testing.TB) []anchor.Node {
	t.Helper()
	f, err := os.Open("testdata/heron-nodes.jsonl")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	var nodes []anchor.Node
	for s := bufio.NewScanner(f); s.Scan(); {
		var n anchor.Node
		if err := json.Unmarshal(s.Bytes(), &n); err != nil {
			t.Fatal(err)
		}
		nodes = append(nodes, n)
	}
	return nodes
}

func anchoredHeron(t testing.TB) (*Predictor, []anchor.Node) {
	t.Helper()
	p := predictor(t, heron(Estimate))
	bench, err := p.Setup().AnchorBench()
	if err != nil {
		t.Fatal(err)
	}
	nodes := heronNodes(t)
	q, err := p.Anchored(bench.Build(nodes))
	if err != nil {
		t.Fatal(err)
	}
	return q, nodes
}

// pressureOf returns the pressure in bar at which the gas has a density in
// mol/m³.
func pressureOf(t testing.TB, p *Predictor, kelvin, density float64) float64 {
	t.Helper()
	low, high := 0.1, 40.0
	for range 60 {
		mid := (low + high) / 2
		s, err := p.Medium().At(unit.Pascal(mid)*unit.Bar, unit.Kelvin(kelvin), 0)
		if err != nil {
			t.Fatal(err)
		}
		if float64(s.Density) < density {
			low = mid
		} else {
			high = mid
		}
	}
	return low
}

// At a node the prediction is what propagation found there, at any temperature
// that gives its density.
func TestAnchoredMeetsItsNodes(t *testing.T) {
	p, nodes := anchoredHeron(t)
	for _, n := range nodes {
		if n.Moved != anchor.Nothing || len(n.Lobes) == 0 {
			continue
		}
		pr := p.Predict(at(pressureOf(t, p, 300, n.Density), 300, n.Energy.Microjoules()), nil)
		if d := math.Abs((pr.Emission - n.Lobes[0].Centroid).Nanometres()); d > 0.02 {
			t.Errorf("at %.1f mol/m³ and %.2f uJ: %v, propagation found %v", n.Density, n.Energy.Microjoules(), pr.Emission, n.Lobes[0].Centroid)
		}
		if d := math.Abs((pr.Peak - n.Lobes[0].Peak).Nanometres()); d > 0.05 {
			t.Errorf("at %.1f mol/m³ and %.2f uJ: peak %v, propagation found %v", n.Density, n.Energy.Microjoules(), pr.Peak, n.Lobes[0].Peak)
		}
	}
}

// More energy moves the emission to longer waves where ionisation is strong and
// to shorter ones where it is weak, as propagation has it.
func TestAnchoredSlopeOverEnergyTurns(t *testing.T) {
	p, _ := anchoredHeron(t)
	step := func(bar float64) float64 {
		return (p.Predict(at(bar, 295, 1.40), nil).Emission - p.Predict(at(bar, 295, 1.20), nil).Emission).Nanometres()
	}
	if strong, weak := step(7.2), step(11.5); strong < 2 || weak > -1 {
		t.Errorf("0.2 uJ more move the emission by %.1f nm at 7.2 bar and %.1f nm at 11.5 bar, want to longer and to shorter waves", strong, weak)
	}
}

func BenchmarkPredictAnchored(b *testing.B) {
	p, _ := anchoredHeron(b)
	var before Prediction
	i := 0.0
	b.ReportAllocs()
	for b.Loop() {
		if i++; i > 1000 {
			i = 0
		}
		before = p.Predict(at(9+i*1e-3, 295, 1.3), &before)
	}
}
