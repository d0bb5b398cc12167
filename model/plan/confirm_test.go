package plan

import (
	"context"
	"errors"
	"math"
	"testing"

	"barline/model/emission"
	"barline/model/unit"
)

// A light that follows straight lines is found exactly, with its slopes.
func TestConfirm(t *testing.T) {
	q := heron(t, 265e-9, 265e-9)
	q.Gases = []string{"argon"}
	c := answer(t, q).Choices[0]
	const perBar, perShare = 9e-9, -4e-8
	light := func(in emission.Input) unit.Metre {
		return unit.Metre(280e-9 + perBar*(in.Pressure-c.Pressure).Bar() + perShare*(float64(in.Energy/c.Energy)-1))
	}
	asked := 0
	run := func(_ context.Context, s emission.Setup, in emission.Input) (Light, error) {
		asked++
		if s.Gas.Composition != "argon" || in.Temperature != q.Temperature {
			t.Errorf("asked about %+v at %v", s.Gas, in.Temperature)
		}
		return Light{Emission: light(in), Conversion: 0.04, Reliable: true}, nil
	}
	told := 0
	got, err := q.Confirm(context.Background(), c, run, func(done int) { told = done })
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(got.First.Emission.Nanometres()-280) > 1e-6 || math.Abs(got.Light.Emission.Nanometres()-265) > 1 {
		t.Errorf("first %v, then %v at %v, expected 280 nm, then within 1 nm of 265 nm", got.First.Emission, got.Light.Emission, got.Pressure)
	}
	if !got.SlopesKnown || math.Abs(got.PerPressure*1e5/perBar-1) > 1e-6 || math.Abs(got.PerEnergy/perShare-1) > 1e-6 {
		t.Errorf("slopes %g m/bar and %g m, expected %g and %g", got.PerPressure*1e5, got.PerEnergy, perBar, perShare)
	}
	if got.Runs != asked || told != asked || asked > RunsToConfirm {
		t.Errorf("%d runs, told %d, counted %d, expected at most %d", asked, told, got.Runs, RunsToConfirm)
	}
	if len(got.Limits) == 0 {
		t.Error("the corrected pressure is not judged")
	}
}

func TestConfirmFindsNothing(t *testing.T) {
	q := heron(t, 265e-9, 265e-9)
	q.Gases = []string{"argon"}
	c := answer(t, q).Choices[0]
	dark := func(context.Context, emission.Setup, emission.Input) (Light, error) { return Light{}, nil }
	got, err := q.Confirm(context.Background(), c, dark, func(int) {})
	if err != nil || got.First.Emission != 0 || got.SlopesKnown || got.Runs != 1 {
		t.Errorf("%+v, %v: expected a finding after one run", got, err)
	}
	broken := errors.New("broken")
	fails := func(context.Context, emission.Setup, emission.Input) (Light, error) { return Light{}, broken }
	if _, err := q.Confirm(context.Background(), c, fails, func(int) {}); !errors.Is(err, broken) {
		t.Errorf("%v, expected the run's error", err)
	}
}
