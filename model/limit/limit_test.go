package limit

import (
	"errors"
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"

	"barline/model/unit"
)

func testLimits() Limits {
	return Limits{
		Ratings:   []Rating{{"fibre seal", 16 * unit.Bar}, {"cells", 14 * unit.Bar}, {"line", 20 * unit.Bar}},
		RiseRate:  0.2e5,
		FallRate:  0.4e5,
		PumpBelow: 1.2 * unit.Bar,
	}
}

// The laws of a step: it lies within the ratings, within the rates, and never
// beyond its target.
func TestStepObeysItsLaws(t *testing.T) {
	l := testLimits()
	rapid.Check(t, func(t *rapid.T) {
		from := unit.Pascal(rapid.Float64Range(-1e5, 2e6).Draw(t, "from"))
		target := unit.Pascal(rapid.Float64Range(-1e5, 2e6).Draw(t, "target"))
		dt := time.Duration(rapid.Int64Range(-1e9, 1e10).Draw(t, "dt"))
		sp, err := l.Step(from, target, dt)
		p, ok := sp.Pressure()
		if err != nil {
			if ok {
				t.Fatal("a refused step left a valid setpoint")
			}
			if !errors.Is(err, ErrLimit) {
				t.Fatalf("%v does not wrap ErrLimit", err)
			}
			return
		}
		reach := min(dt, time.Second).Seconds()
		switch {
		case !ok || p < 0 || p > 14*unit.Bar:
			t.Fatalf("setpoint %v, valid %v", p, ok)
		case float64(p-from) > 0.2e5*reach+1e-9 || float64(from-p) > 0.4e5*reach+1e-9:
			t.Fatalf("from %v to %v in %v", from, p, dt)
		case (p-target)*(from-target) < 0:
			t.Fatalf("from %v past %v to %v", from, target, p)
		}
	})
}

func TestNotANumberIsRefused(t *testing.T) {
	l := testLimits()
	nan := unit.Pascal(math.NaN())
	if _, err := l.Step(1*unit.Bar, nan, time.Second); !errors.Is(err, ErrLimit) {
		t.Errorf("target NaN: %v", err)
	}
	if _, err := l.Step(nan, 1*unit.Bar, time.Second); !errors.Is(err, ErrLimit) {
		t.Errorf("start NaN: %v", err)
	}
	if p, ok := l.Freeze(nan).Pressure(); p != 0 || !ok {
		t.Errorf("HOLD at NaN is %v, %v; want 0 bar and valid", p, ok)
	}
	if p, _ := l.Freeze(99 * unit.Bar).Pressure(); p != 14*unit.Bar {
		t.Errorf("HOLD at 99 bar is %v, want the lowest rating", p)
	}
}

func TestLimitsWithoutRatingMakeNothing(t *testing.T) {
	if sp, err := (Limits{RiseRate: 1, FallRate: 1}).Step(0, 0, 0); err == nil {
		p, _ := sp.Pressure()
		t.Errorf("limits without a rating made setpoint %v", p)
	}
	if (Limits{Ratings: []Rating{{"cells", unit.Pascal(math.NaN())}}, RiseRate: 1, FallRate: 1}).Check() == nil {
		t.Error("a rating that is not a number was accepted")
	}
}

// Every pair of valves that would join supply, pump and room is refused
// (common practice, no source).
func TestForbiddenPairs(t *testing.T) {
	l := testLimits()
	low := 0.5 * unit.Bar
	for _, open := range []Valve{Inlet, Pump, Vent} {
		for _, asked := range []Valve{Inlet, Pump, Vent} {
			var now Panel
			now.Open[open] = true
			o, err := l.Open(asked, now, low)
			_, _, ok := o.Order()
			if want := open == asked; ok != want || (err == nil) != want {
				t.Errorf("opening %v with %v open: valid %v, error %v", asked, open, ok, err)
			}
		}
	}
}

func TestPumpOnlyBelowItsPressure(t *testing.T) {
	l := testLimits()
	for _, c := range []struct {
		p    unit.Pascal
		want bool
	}{{1.19 * unit.Bar, true}, {1.2 * unit.Bar, false}, {5 * unit.Bar, false}, {unit.Pascal(math.NaN()), false}} {
		if _, err := l.Open(Pump, Panel{}, c.p); (err == nil) != c.want {
			t.Errorf("pump at %v: %v", c.p, err)
		}
	}
	if _, err := l.Open(Inlet, Panel{}, unit.Pascal(math.NaN())); err == nil {
		t.Error("inlet opened on a pressure that is not a number")
	}
	if _, _, ok := (ValveOrder{}).Order(); ok {
		t.Error("a zero valve order is valid")
	}
}
