package flow

import (
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/unit"
)

// The sample bench, from its file to a plan: 130 cm³ and 34 µm.
func TestSampleBench(t *testing.T) {
	b, err := bench.Parse(bench.Sample(), "sample.toml")
	if err != nil {
		t.Fatal(err)
	}
	core, cladding, err := BenchFibre(b, room)
	if err != nil || len(cladding) != 0 {
		t.Fatalf("%v, %v", cladding, err)
	}
	near(t, "radius", float64(core.Radius), 17e-6, 1e-12)
	h, err := BenchHandling(b, room)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "volume", float64(h.Volume), 130e-6, 1e-12)
	up, err := h.Move(unit.Bar, 9*unit.Bar)
	if err != nil {
		t.Fatal(err)
	}
	// The needle gives about a bar a second: the allowed 0.2 bar/s decides.
	near(t, "fill", up.Time.Seconds(), 40, 1e-3)
	// 8 bar in 0.13 L is some 0.96 norm litres.
	near(t, "gas", NormLitres(up.Gas), 0.13*8/1.01325*273.15/float64(room), 0.01)
	plan, err := PlanPurge(h, Purge{Start: 1, Cylinder: 10e-6, Low: 5 * unit.Millibar, High: 3 * unit.Bar}, unit.Atmosphere, 50e-6, core)
	if err != nil || plan.Cycles != 2 || plan.Total < 40*time.Second || plan.Total > 5*time.Minute {
		t.Errorf("%+v, %v", plan, err)
	}
	b.Fibre.CladdingHoles, b.Fibre.CladdingHoleDiameter = 6, 12e-6
	if _, cladding, _ = BenchFibre(b, room); len(cladding) != 1 || cladding[0] != (Cladding{Radius: 6e-6, Holes: 6}) {
		t.Errorf("cladding %v", cladding)
	}
	b.Gas.Species = "smoke"
	if _, err := BenchHandling(b, room); err == nil {
		t.Error("smoke: accepted")
	}
}
