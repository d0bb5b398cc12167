package limit

import (
	"errors"
	"math"
	"testing"

	"barline/model/unit"
)

func TestEnergyObeysItsLimit(t *testing.T) {
	nan := unit.Joule(math.NaN())
	l := Limits{MostEnergy: 1.6 * unit.Microjoule}
	for _, c := range []struct {
		wanted, full unit.Joule
		share        float64 // 0: refused
	}{
		{1.3 * unit.Microjoule, 2.6 * unit.Microjoule, 0.5},
		{1.6 * unit.Microjoule, 2 * unit.Microjoule, 0.8},
		{1.7 * unit.Microjoule, 2 * unit.Microjoule, 0}, // above the limit
		{1.5 * unit.Microjoule, 1.4 * unit.Microjoule, 0},
		{0, 2 * unit.Microjoule, 0},
		{-1, 2 * unit.Microjoule, 0},
		{nan, 2 * unit.Microjoule, 0},
		{1 * unit.Microjoule, nan, 0},
		{1 * unit.Microjoule, 0, 0},
		{1 * unit.Microjoule, unit.Joule(math.Inf(1)), 0},
	} {
		o, err := l.Energy(c.wanted, c.full)
		energy, share, ok := o.Order()
		if c.share == 0 {
			if ok || !errors.Is(err, ErrLimit) {
				t.Errorf("%v of %v: %v, %v", c.wanted, c.full, ok, err)
			}
			continue
		}
		if err != nil || !ok || energy != c.wanted || math.Abs(float64(share)-c.share) > 1e-12 {
			t.Errorf("%v of %v: %v at %v, %v", c.wanted, c.full, energy, share, err)
		}
	}
	if _, err := (Limits{}).Energy(1*unit.Microjoule, 2*unit.Microjoule); !errors.Is(err, ErrLimit) {
		t.Errorf("without a limit: %v", err)
	}
	if _, _, ok := (EnergyOrder{}).Order(); ok {
		t.Error("a zero order is valid")
	}
}

func TestZeroIsBoundedAsAWhole(t *testing.T) {
	l := Limits{MostZero: 50 * unit.Millibar}
	first, err := l.Zero("cell A", 30*unit.Millibar, 0, 0)
	channel, shift, ok := first.Shift()
	if err != nil || !ok || channel != "cell A" || math.Abs(float64(shift+30*unit.Millibar)) > 1e-9 {
		t.Fatalf("%q %v %v, %v", channel, shift, ok, err)
	}
	// Another 30 mbar on top is 60 in all.
	if _, err := l.Zero("cell A", 30*unit.Millibar, 0, shift); !errors.Is(err, ErrLimit) {
		t.Errorf("60 mbar in all: %v", err)
	}
	if _, err := l.Zero("cell A", unit.Pascal(math.NaN()), 0, 0); !errors.Is(err, ErrLimit) {
		t.Errorf("not a number: %v", err)
	}
	if _, err := (Limits{}).Zero("cell A", 1, 0, 0); !errors.Is(err, ErrLimit) {
		t.Errorf("without a bound: %v", err)
	}
	if _, _, ok := (ZeroShift{}).Shift(); ok {
		t.Error("a zero shift is valid")
	}
}
