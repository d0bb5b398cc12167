package flow

import (
	"fmt"
	"math"
	"time"

	"barline/model/unit"
)

// Aim is a move of the cells' pressure that is being watched.
type Aim struct {
	Handling
	From, Target unit.Pascal
	// Tolerance is how near the target counts as there.
	Tolerance unit.Pascal
	// Controlled says that something closes in on the target and holds it, as
	// a pressure controller does. Otherwise the pressure runs until it is
	// there, as in pumping down.
	Controlled bool
	// Follow is the time constant with which the controlled pressure follows
	// its setpoint, until it has been seen. Zero is one second.
	Follow time.Duration
	// Core is the channel whose settling is waited for.
	Core Spec
}

const (
	forecastNodes = 97
	// setpointPause is how long a setpoint may stand between two steps of a
	// ramp: controllers are read a few times a second.
	setpointPause = 500 * time.Millisecond
)

// Forecast says how long a move still takes: the model gives the shape of the
// way, what is seen gives its scale. The rate is taken as
//
//	dp/dt = min(k·r(p), (target − p)/λ)
//
// where r is what valves, pump and allowed rates give, k how much faster it
// turns out to be, and λ how closely the controller follows; k and λ are
// learnt from the readings. A Forecast is a value.
type Forecast struct {
	aim    Aim
	rising bool
	place  [forecastNodes]float64 // Pa from From to Target
	rate   [forecastNodes]float64 // Pa/s of the model there
	core   float64                // s, time constant of the core at the target

	seen, start  time.Duration
	changed      time.Duration // when the setpoint last moved
	started      bool
	p, setpoint  float64
	k, lambda    float64
	follow       float64 // s, λ that counts where the valve decides
	moved, model float64 // Pa, over the slow window: seen, and by the model
	quick, ramp  float64 // Pa over the quick window: pressure, setpoint
	span         float64 // s, of the quick window
	closed, gap  float64 // Pa moved while following, Pa s behind the setpoint
	kept         float64 // s for which the pressure has kept up with a ramp
	limited      bool    // the setpoint has run away from what the valve gives
}

// NewForecast works out the shape of the way. It refuses a target that the
// panel never reaches, with ErrNever.
func NewForecast(a Aim) (Forecast, error) {
	f := Forecast{aim: a, rising: a.Target > a.From, k: 1}
	f.follow = f.aimFollow()
	f.lambda = f.follow
	if !(a.Tolerance > 0) {
		return f, fmt.Errorf("tolerance %v Pa: %w: wanted above zero", float64(a.Tolerance), ErrRange)
	}
	for _, p := range [...]unit.Pascal{a.From, a.Target} {
		if err := checkState(p, a.Wall); err != nil {
			return f, err
		}
	}
	scale := 1e-3 * float64(max(a.From, a.Target, 1))
	from, to := math.Asinh(float64(a.From)/scale), math.Asinh(float64(a.Target)/scale)
	for i := range f.place {
		x := float64(i) / (forecastNodes - 1)
		f.place[i] = scale * math.Sinh(from+(to-from)*x)
		p := unit.Pascal(f.place[i])
		r, err := a.Handling.rate(p, f.rising)
		if err != nil {
			return f, err
		}
		f.rate[i] = r
	}
	if a.Core.Length > 0 {
		tau, err := a.Core.Relaxation(a.Target)
		if err != nil {
			return f, err
		}
		f.core = tau.Seconds()
	}
	return f, nil
}

// modelRate returns r(p), that of the nearer end beyond the ends.
func (f *Forecast) modelRate(p float64) float64 {
	sign := 1.0
	if !f.rising {
		sign = -1
	}
	low, high := 0, forecastNodes-1
	if sign*(p-f.place[low]) <= 0 {
		return f.rate[low]
	}
	if sign*(p-f.place[high]) >= 0 {
		return f.rate[high]
	}
	for high-low > 1 {
		mid := (low + high) / 2
		if sign*(p-f.place[mid]) >= 0 {
			low = mid
		} else {
			high = mid
		}
	}
	x := (p - f.place[low]) / (f.place[high] - f.place[low])
	return f.rate[low] + (f.rate[high]-f.rate[low])*x
}

// See takes a reading of the cell's pressure, and the setpoint that stands
// then, zero where there is none. A reading that is not after the last, not a
// number or infinite changes nothing and is refused.
func (f *Forecast) See(at time.Duration, p, setpoint unit.Pascal) error {
	if math.IsNaN(float64(p)) || math.IsInf(float64(p), 0) || math.IsNaN(float64(setpoint)) {
		return fmt.Errorf("reading %v Pa with setpoint %v Pa: %w", float64(p), float64(setpoint), ErrRange)
	}
	if !f.started {
		f.started, f.seen, f.start = true, at, at
		f.p, f.setpoint = float64(p), float64(setpoint)
		return nil
	}
	if at <= f.seen {
		return fmt.Errorf("reading at %v: %w: not after the one before, at %v", at, ErrRange, f.seen)
	}
	dt := (at - f.seen).Seconds()
	sign := 1.0
	if !f.rising {
		sign = -1
	}
	step := sign * (float64(p) - f.p)
	mid := 0.5 * (float64(p) + f.p)
	elapsed := (at - f.start).Seconds()
	slow := math.Exp(-dt / min(60, max(3, 0.3*elapsed)))
	const quickWindow = 2.0 // s: shorter drowns in the gauge's noise
	quick := math.Exp(-dt / quickWindow)
	f.moved, f.model = slow*f.moved+step, slow*f.model+f.modelRate(mid)*dt
	f.quick, f.span, f.ramp = quick*f.quick+step, quick*f.span+dt, quick*f.ramp
	behind := sign * (float64(f.aim.Target) - mid)
	if setpoint > 0 && f.setpoint > 0 {
		f.ramp += sign * (float64(setpoint) - f.setpoint)
		if float64(setpoint) != f.setpoint {
			f.changed = at
		}
		behind = sign * (0.5*(float64(setpoint)+f.setpoint) - mid)
	}
	f.seen, f.p, f.setpoint = at, float64(p), float64(setpoint)
	f.learn(elapsed, mid, behind, step, dt)
	return nil
}

// learn updates k and λ. Of late the pressure moved f.quick and the setpoint
// f.ramp. Where the pressure keeps up with its setpoint, or where it is slow at
// the start and near the target, it shows how closely the controller follows;
// where the setpoint runs away, what the valve lets through.
func (f *Forecast) learn(elapsed, mid, behind, step, dt float64) {
	tolerance := float64(f.aim.Tolerance)
	limit := f.k * f.modelRate(mid)
	slow := f.quick < 0.8*limit*f.span
	if !f.aim.Controlled || !slow {
		if f.model > 0 && f.moved > tolerance && elapsed > 2 {
			f.k = min(50, max(0.02, f.moved/f.model))
		}
	} else {
		f.moved, f.model = 0, 0
	}
	if !f.aim.Controlled {
		return
	}
	ramping := f.ramp > 2*tolerance && f.seen-f.changed <= setpointPause
	if keeps := math.Abs(f.quick-f.ramp) < 0.05*f.ramp; ramping && keeps {
		f.kept += dt
	} else {
		f.kept = 0
	}
	switch {
	case ramping && f.quick < 0.95*f.ramp && elapsed > 2+2.5*f.follow:
		f.limited = true
	case slow || f.kept > 1:
		f.limited = false
	}
	if f.limited {
		if slow { // by the model's limit, which is too high
			f.k = max(0.02, f.k*math.Exp(-dt))
		}
		f.closed, f.gap, f.lambda = 0, 0, f.follow
		return
	}
	const window = 2.0 // s
	forget := math.Exp(-dt / window)
	f.closed, f.gap = forget*f.closed+step, forget*f.gap+behind*dt
	if f.closed > 2*tolerance && f.gap > 0 {
		// dp/dt = (setpoint − p)/λ, summed.
		f.lambda = min(4*f.aimFollow(), max(0.25*f.aimFollow(), f.gap/f.closed))
		if f.kept > 1 {
			f.follow = f.lambda
		}
	}
}

// aimFollow returns λ as it was given, in s.
func (f *Forecast) aimFollow() float64 {
	if f.aim.Follow > 0 {
		return f.aim.Follow.Seconds()
	}
	return 1
}

// Left returns how long until the cells are within the tolerance of the target
// and the core has followed. coreWait is what the core itself needs with the
// ends as they are now (Core.TimeToSettle): it counts once the cells are there.
// ok is false before the first reading and for waits beyond two days.
func (f *Forecast) Left(coreWait time.Duration) (wait time.Duration, ok bool) {
	if !f.started {
		return 0, false
	}
	sign := 1.0
	if !f.rising {
		sign = -1
	}
	target, tolerance := float64(f.aim.Target), float64(f.aim.Tolerance)
	left := sign * (target - f.p)
	if left <= 0 || f.aim.Controlled && left <= tolerance {
		return coreWait, true
	}
	seconds, rate, ok := f.between(left, min(left, tolerance))
	if !ok {
		return 0, false
	}
	// In a ramp the middle of the core lags by rate·L²/8D, which is π²/8 of
	// rate·τ, and loses that with τ once the cells stand still.
	if lag := rate * f.core * math.Pi * math.Pi / 8; lag > tolerance {
		if !f.aim.Controlled {
			rest, _, ok := f.between(min(left, tolerance), 0.01*min(left, tolerance))
			if !ok {
				return 0, false
			}
			seconds += rest
		}
		seconds += f.core * math.Log(lag/tolerance)
	}
	if seconds > panelHorizon.Seconds() {
		return 0, false
	}
	return time.Duration(seconds * 1e9), true
}

// between returns the time that the pressure takes from far to near, both Pa
// before the target, and the rate at near: ∫dp/rate by the midpoint rule in
// stretches equal in the logarithm of what is left.
func (f *Forecast) between(far, near float64) (seconds, rate float64, ok bool) {
	sign := 1.0
	if !f.rising {
		sign = -1
	}
	const stretches = 150
	shrink := math.Pow(near/far, 1.0/stretches)
	for range stretches {
		next := far * shrink
		gap := math.Sqrt(far * next)
		rate = f.k * f.modelRate(float64(f.aim.Target)-sign*gap)
		if f.aim.Controlled {
			rate = min(rate, gap/f.lambda)
		}
		if !(rate > 0) {
			return 0, 0, false
		}
		seconds += (far - next) / rate
		far = next
	}
	return seconds, rate, true
}
