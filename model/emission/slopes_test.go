package emission

import (
	"math"
	"testing"
)

// A slope is what a small step of the input makes of the prediction.
func TestSlopesAreDifferences(t *testing.T) {
	p, _ := anchoredHeron(t)
	in := Input{Pressure: 9e5, Temperature: 295.15, Energy: 1.3e-6}
	pr := p.Predict(in, nil)
	slope, rough, ok := p.Slopes(pr)
	if !ok {
		t.Fatal("no slopes where there is an emission")
	}
	for q, step := range map[Quantity]struct {
		by     float64 // in the unit of the quantity
		change func(*Input)
		within float64 // share
	}{
		Pressure:    {500, func(in *Input) { in.Pressure += 500 }, 0.02},
		Temperature: {0.2, func(in *Input) { in.Temperature += 0.2 }, 0.05},
		PulseEnergy: {0.004, func(in *Input) { in.Energy *= 1.004 }, 0.05},
	} {
		moved := in
		step.change(&moved)
		want := float64(p.Predict(moved, nil).Emission-pr.Emission) / step.by
		if math.Abs(slope[q]-want) > step.within*math.Abs(want) || rough[q] {
			t.Errorf("%v: %.4g m per unit, by a difference %.4g; rough %v", q, slope[q], want, rough[q])
		}
	}
	if slope[Air] == 0 {
		t.Error("air moves nothing")
	}
	if _, _, ok := p.Slopes(Prediction{}); ok {
		t.Error("slopes of no prediction")
	}
}
