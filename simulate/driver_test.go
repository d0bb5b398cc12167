package simulate_test

import (
	"testing"
	"time"

	"barline/device/instrument"
	"barline/device/link"
	"barline/model/bench"
	"barline/model/clock"
	"barline/model/reading"
	"barline/model/spectrum"
	"barline/model/unit"
	"barline/simulate"
)

// The program's own drivers, configured by the sample bench file, against the
// simulated instruments, written a second time: where either misreads the
// description, this disagrees.
func TestDriversAndBenchAgree(t *testing.T) {
	file, err := bench.Parse(bench.Sample(), "sample.toml")
	if err != nil {
		t.Fatal(err)
	}
	b, err := simulate.New(simulate.Options{Seed: 5, Scenario: "quiet"})
	if err != nil {
		t.Fatal(err)
	}
	fake := clock.NewFake(time.Date(2026, 12, 1, 9, 0, 0, 0, time.UTC))
	b.Follow(fake)
	lines := b.Lines()
	var all []*instrument.Instrument
	latest := map[reading.Role]reading.Reading{}
	var whole *reading.Spectrum
	for _, spec := range file.Instrument {
		in, err := instrument.New(spec, file.Panel.Ambient)
		if err != nil {
			t.Fatal(err)
		}
		if lines[spec.Name] == nil {
			t.Fatalf("the bench has no line %q", spec.Name)
		}
		in.Opened()
		in.Spectra(func(s *reading.Spectrum) { whole = s })
		all = append(all, in)
	}
	poll := func() {
		for _, in := range all {
			var line link.Line = lines[in.Name()]
			ask := in.Poll
			if in.Streams() {
				ask = in.Drain
			}
			got, err := ask(line, fake.Now, nil)
			if err != nil {
				t.Fatalf("%s: %v", in.Name(), err)
			}
			for _, r := range got {
				latest[r.Role] = r
			}
		}
	}
	for range 20 {
		fake.Advance(250 * time.Millisecond)
		poll()
	}
	for role, want := range map[reading.Role]struct{ value, within float64 }{
		reading.CellAPressure:    {9e5, 3e3},
		reading.CellBPressure:    {9e5, 3e3},
		reading.ControllerSensor: {9e5, 3e3},
		reading.Setpoint:         {9e5, 1},
		reading.FibreTemperature: {295.15, 0.5},
		reading.Emission:         {260e-9, 40e-9},
		reading.EmissionWidth:    {20e-9, 10e-9},
		reading.EmissionStrength: {0.07, 0.05},
	} {
		got, ok := latest[role]
		if !ok || got.Status != reading.Good || !(got.Value > want.value-want.within && got.Value < want.value+want.within) {
			t.Errorf("%v reads %+v, want %g ± %g", role, got, want.value, want.within)
		}
	}

	// The spectrum that comes beside the summary shows the same emission.
	if whole == nil || len(whole.Counts) != 256 || whole.Status != reading.Good {
		t.Fatalf("the whole spectrum is %+v", whole)
	}
	light := make([]float64, len(whole.Counts))
	for i, c := range whole.Counts {
		light[i] = c - whole.Dark
	}
	d, err := spectrum.FromWavelengths(whole.Wavelength, light)
	if err != nil {
		t.Fatal(err)
	}
	lobes, err := spectrum.Lobes(d, 1030*unit.Nanometre)
	if err != nil || len(lobes) == 0 {
		t.Fatalf("no emission in the whole spectrum: %v", err)
	}
	if apart := float64(lobes[0].Centroid) - latest[reading.Emission].Value; apart > 1e-9 || apart < -1e-9 {
		t.Errorf("the spectrum has its emission at %v, the summary says %v", lobes[0].Centroid, unit.Metre(latest[reading.Emission].Value))
	}

	// Orders: a setpoint moves gas, HOLD stops it.
	controller := all[1]
	limits := file.Limits.Enforced()
	for from := 9 * unit.Bar; from < 10*unit.Bar; from += unit.Bar / 5 {
		s, err := limits.Step(from, 10*unit.Bar, time.Second)
		if err != nil {
			t.Fatal(err)
		}
		if err := controller.Set(lines["controller"], s); err != nil {
			t.Fatal(err)
		}
		fake.Advance(time.Second)
		poll()
	}
	held := latest[reading.CellAPressure].Value
	if !(held > 9.5e5) {
		t.Fatalf("five steps of a ramp moved cell A to %v only", unit.Pascal(held))
	}
	if err := controller.Hold(lines["controller"], limits.Freeze(unit.Pascal(latest[reading.ControllerSensor].Value))); err != nil {
		t.Fatal(err)
	}
	fake.Advance(time.Second)
	poll()
	before := latest[reading.ControllerSensor].Value
	for range 40 {
		fake.Advance(250 * time.Millisecond)
		poll()
	}
	// Gas goes on cooling, which shows as a falling pressure; none comes in.
	if d := latest[reading.ControllerSensor].Value - before; d > 500 || d < -0.05*before {
		t.Errorf("in hold the pressure moved by %v", unit.Pascal(d))
	}

	// Below the threshold and behind a shutter there is no emission, and the
	// driver does not take that for one.
	if err := b.Inject(simulate.Fault{Kind: simulate.Shutter}); err != nil {
		t.Fatal(err)
	}
	fake.Advance(time.Second)
	poll()
	if got := latest[reading.Emission]; got.Status != reading.FunctionCheck {
		t.Errorf("behind a shutter the emission reads %+v", got)
	}
}
