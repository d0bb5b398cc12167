package simulate_test

import (
	"math"
	"testing"
	"time"

	"barline/device/instrument"
	"barline/device/link"
	"barline/model/bench"
	"barline/model/clock"
	"barline/model/reading"
	"barline/simulate"
)

// Replies that come late or twice, behind an echo or under another unit's name
// are whole and wrong. No reading is ever taken from one, and the bus goes on.
func TestConfusedRepliesAreNotBelieved(t *testing.T) {
	file, err := bench.Parse(bench.Sample(), "sample.toml")
	if err != nil {
		t.Fatal(err)
	}
	want := map[reading.Role]struct{ value, within float64 }{
		reading.CellAPressure: {9e5, 5e3}, reading.CellBPressure: {9e5, 5e3}, reading.ControllerSensor: {9e5, 5e3},
		reading.FibreTemperature: {295.15, 1}, reading.RoomTemperature: {295.15, 1},
		reading.ShutterOpen: {1, 1e-9}, reading.Attenuator: {0.5, 1e-9}, reading.InletValve: {0, 0.2}, reading.VentValve: {0, 0.2}, reading.PumpValve: {0, 1e-9},
		reading.Setpoint: {9e5, 1},
	}
	for seed := range uint64(4) {
		b, err := simulate.New(simulate.Options{Seed: seed, Scenario: "quiet"})
		if err != nil {
			t.Fatal(err)
		}
		fake := clock.NewFake(time.Date(2026, 12, 1, 9, 0, 0, 0, time.UTC))
		b.Follow(fake)
		good, all := map[string]int{}, 0
		var instruments []*instrument.Instrument
		for _, spec := range file.Instrument[:2] {
			if err := b.Inject(simulate.Fault{Kind: simulate.Confused, Where: spec.Name, Size: 0.2}); err != nil {
				t.Fatal(err)
			}
			in, err := instrument.New(spec, file.Panel.Ambient)
			if err != nil {
				t.Fatal(err)
			}
			in.Opened()
			instruments = append(instruments, in)
		}
		lines := b.Lines()
		for range 400 {
			fake.Advance(100 * time.Millisecond)
			all++
			for _, in := range instruments {
				var line link.Line = lines[in.Name()]
				got, err := in.Poll(line, fake.Now, nil)
				if err != nil {
					t.Fatalf("seed %d: %s: %v", seed, in.Name(), err)
				}
				for _, r := range got {
					if r.Status != reading.Good {
						continue
					}
					good[r.Channel]++
					if w, ok := want[r.Role]; !ok || !(math.Abs(r.Value-w.value) <= w.within) {
						t.Fatalf("seed %d: %s read as %v, want %v", seed, r.Channel, r.Value, w.value)
					}
				}
			}
		}
		for name, n := range good {
			if n < all/5 {
				t.Errorf("seed %d: %s read %d times of %d: the bus does not go on", seed, name, n, all)
			}
		}
		if len(good) != len(want) {
			t.Errorf("seed %d: only %v were ever read", seed, good)
		}
	}
}
