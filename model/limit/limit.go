// Package limit is the one place where a command to an instrument can be made.
//
// Drivers accept only a Setpoint, a ValveOrder, an EnergyOrder or a ZeroShift,
// and only the methods of Limits return them; the zero value of each is refused
// by every driver.
// This is a check against mistakes. It is no safety device: pressure ratings,
// relief valves and hardware interlocks come first.
package limit

import (
	"errors"
	"fmt"
	"math"
	"time"

	"barline/model/unit"
)

// ErrLimit is wrapped by every refusal of this package.
var ErrLimit = errors.New("outside the limits")

// Rating is the highest pressure that one part of the gas path may see.
type Rating struct {
	Part string
	Max  unit.Pascal
}

// Limits are the bounds of one bench.
type Limits struct {
	Ratings   []Rating // at least one
	RiseRate  unit.PascalPerSecond
	FallRate  unit.PascalPerSecond
	PumpBelow unit.Pascal // the pump valve opens only below this

	MostEnergy unit.Joule  // of a pulse in the fibre; 0: the attenuator is never moved
	MostZero   unit.Pascal // that is ever added to what a gauge reads; 0: nothing is
}

// Check reports what is wrong with the limits themselves.
func (l Limits) Check() error {
	if len(l.Ratings) == 0 {
		return errors.New("limits: no rating is given, at least one part must have its highest pressure")
	}
	for _, r := range l.Ratings {
		if !(r.Max > 0) || math.IsInf(float64(r.Max), 0) {
			return fmt.Errorf("limits: rating of %s is %v, expected a pressure above zero", r.Part, r.Max)
		}
	}
	if !(l.RiseRate > 0) || !(l.FallRate > 0) {
		return fmt.Errorf("limits: rates are %v rising and %v falling, expected both above zero", l.RiseRate, l.FallRate)
	}
	return nil
}

// Lowest returns the lowest rating, which bounds every setpoint.
func (l Limits) Lowest() Rating {
	low := Rating{Part: "no part", Max: 0}
	for i, r := range l.Ratings {
		if i == 0 || r.Max < low.Max {
			low = r
		}
	}
	return low
}

// Setpoint is a pressure that passed the limits. Only Limits makes one.
type Setpoint struct {
	p     unit.Pascal
	valid bool
}

// Pressure returns the absolute pressure and whether the setpoint was made by
// a limit check; a driver refuses one that was not.
func (s Setpoint) Pressure() (p unit.Pascal, ok bool) { return s.p, s.valid }

// Admissible reports why target may not be a setpoint, or nil.
func (l Limits) Admissible(target unit.Pascal) error {
	low := l.Lowest()
	if !(target >= 0 && target <= low.Max) { // this way round, NaN is refused too
		return fmt.Errorf("setpoint %v, %s allows 0 bar to %v: %w", target, low.Part, low.Max, ErrLimit)
	}
	return nil
}

// Step returns the setpoint one step of a ramp from the pressure from towards
// target: at most rate × dt away, rising or falling.
func (l Limits) Step(from, target unit.Pascal, dt time.Duration) (Setpoint, error) {
	if err := l.Check(); err != nil {
		return Setpoint{}, fmt.Errorf("%w: %w", err, ErrLimit)
	}
	if err := l.Admissible(target); err != nil {
		return Setpoint{}, err
	}
	if err := l.Admissible(from); err != nil {
		return Setpoint{}, fmt.Errorf("ramp starts outside: %w", err)
	}
	if dt < 0 {
		return Setpoint{}, fmt.Errorf("ramp step of %v: %w", dt, ErrLimit)
	}
	if dt > time.Second { // a late tick must not become a leap
		dt = time.Second
	}
	up := from + unit.Pascal(float64(l.RiseRate)*dt.Seconds())
	down := from - unit.Pascal(float64(l.FallRate)*dt.Seconds())
	return Setpoint{min(max(target, down), up), true}, nil
}

// Freeze returns the setpoint that HOLD sends: the last pressure read back.
// A pressure above a rating is cut to the rating, because HOLD must never
// fail; NaN and negative ones become zero.
func (l Limits) Freeze(last unit.Pascal) Setpoint {
	if !(last >= 0) {
		last = 0
	}
	return Setpoint{min(last, l.Lowest().Max), true}
}

// AtMost returns the limits with neither rate above rate; a rate of zero
// changes nothing.
func (l Limits) AtMost(rate unit.PascalPerSecond) Limits {
	if rate > 0 {
		l.RiseRate, l.FallRate = min(l.RiseRate, rate), min(l.FallRate, rate)
	}
	return l
}

// RampTime returns how long a ramp takes at the allowed rate.
func (l Limits) RampTime(from, to unit.Pascal) time.Duration {
	rate := l.RiseRate
	if to < from {
		rate = l.FallRate
	}
	return time.Duration(math.Abs(float64(to-from)) / float64(rate) * float64(time.Second))
}
