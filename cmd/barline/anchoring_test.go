package main

import (
	"testing"

	"barline/model/bench"
	"barline/model/emission"
	"barline/model/unit"
)

func TestGuidedAnswersByTheEstimateUntilRunsStand(t *testing.T) {
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	setup, err := emission.SetupFromBench(b)
	if err != nil {
		t.Fatal(err)
	}
	p, err := emission.NewPredictor(setup)
	if err != nil {
		t.Fatal(err)
	}
	g := &guided{estimate: p}
	in := emission.Input{Pressure: 9 * unit.Bar, Temperature: 295.15, Energy: b.Pulse.Energy}
	// A prediction of another answer is no start for this one.
	stranger := emission.Prediction{Answer: emission.Anchored, Valid: true, Emission: 500 * unit.Nanometre}
	got, want := g.Predict(in, &stranger), p.Predict(in, nil)
	if got.Answer != emission.Estimate || got.Emission != want.Emission {
		t.Errorf("%v by %v, want %v by the estimate", got.Emission, got.Answer, want.Emission)
	}
	curve := make([]emission.CurvePoint, 5)
	g.curve(curve, 12*unit.Bar, in)
	if curve[0].Pressure != 0 || curve[4].Pressure != 12*unit.Bar || curve[3].Pressure != 9*unit.Bar {
		t.Errorf("pressures %v", curve)
	}
	if d := float64(curve[3].Emission - want.Emission); d > 1e-15 || d < -1e-15 {
		t.Errorf("the curve has %v at 9 bar, want %v", curve[3].Emission, want.Emission)
	}
}

func TestCaptureFlag(t *testing.T) {
	for text, ok := range map[string]bool{"": true, "always": true, "10m": true, "soon": false, "-1s": false, "0s": false} {
		if _, err := parseCapture(text); (err == nil) != ok {
			t.Errorf("--capture %q: %v", text, err)
		}
	}
}
