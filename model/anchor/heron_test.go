package anchor

import (
	"context"
	"math"
	"math/rand/v2"
	"os"
	"testing"
	"time"

	"barline/model/fibre"
	"barline/model/unit"
)

// What interpolation costs, against full-field runs at 40 random points inside
// the range. It takes minutes: BARLINE_LONG=1 go test -run FullField ./model/anchor
func TestAgainstFullFieldRuns(t *testing.T) {
	if os.Getenv("BARLINE_LONG") == "" {
		t.Skip("set BARLINE_LONG=1 to run it")
	}
	b := bench(t)
	compute := func(k Task) Node {
		n, err := b.Compute(context.Background(), k, nil)
		if err != nil {
			t.Fatal(err)
		}
		return n
	}
	var nodes []Node
	start, usable := time.Now(), false
	for _, k := range b.Quick(nil, span) {
		nodes = append(nodes, compute(k))
		var dst [MaxBranches]Point
		if !usable && b.Build(nodes).At((low+high)/2, b.spec.Pulse.Energy, &dst) > 0 {
			usable = true
			t.Logf("a first answer after %d runs and %.1f s", len(nodes), time.Since(start).Seconds())
		}
	}
	t.Logf("a good one after %d runs and %.1f s", len(nodes), time.Since(start).Seconds())
	m := b.Build(nodes)
	rng := rand.New(rand.NewPCG(1, 2))
	sum, count := 0.0, 0
	for range 40 {
		truth := compute(Task{
			Density: low + (high-low)*rng.Float64(),
			Energy:  b.energy(-2) + (b.energy(2)-b.energy(-2))*unit.Joule(rng.Float64()),
		})
		var dst [MaxBranches]Point
		var omega [MaxBranches]float64
		n := m.Emission(b.Guide(truth.Density), truth.Energy, &dst, &omega)
		if n == 0 || len(truth.Lobes) == 0 {
			t.Logf("%.1f mol/m³, %.3f uJ: %d branches, %d lobes", truth.Density, truth.Energy.Microjoules(), n, len(truth.Lobes))
			continue
		}
		off := (fibre.Wavelength(omega[0]) - truth.Lobes[0].Centroid).Nanometres()
		t.Logf("%.1f mol/m³, %.3f uJ: %.2f nm, off by %+.2f nm", truth.Density, truth.Energy.Microjoules(), truth.Lobes[0].Centroid.Nanometres(), off)
		if math.Abs(off) > reach.Nanometres() {
			t.Logf("a jump of branch")
			continue
		}
		sum += off * off
		count++
	}
	if count < 36 {
		t.Fatalf("only %d of 40 points could be compared", count)
	}
	leftOut, tried := m.LeftOut()
	t.Logf("off by %.3f nm rms at %d points; left-out error %.3f nm at %d nodes", math.Sqrt(sum/float64(count)), count, leftOut.Nanometres(), tried)
	if rms := math.Sqrt(sum / float64(count)); rms > 1 {
		t.Errorf("off by %.2f nm rms, want at most 1 nm", rms)
	}
}
