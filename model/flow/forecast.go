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
	// blockSpan is how long readings are taken together, in s: a gauge's noise
	// drowns the rate of single ones.
	blockSpan = 0.45
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
	aim   Aim
	place [forecastNodes]float64 // Pa from From to Target
	rate  [forecastNodes]float64 // Pa/s of the model there
	core  float64                // s, time constant of the core at the target

	seen, start time.Duration
	started     bool
	p, setpoint float64
	level       float64 // Pa: p without its noise
	rateNow     float64 // Pa/s, of the last block
	block       stretch // of readings that have not taught anything yet

	k, lambda float64
	// Sums over blocks, which fade: of pressure moved, Pa, and of what the
	// model would have moved; of squares and products of rate x, model rate m
	// and distance behind the setpoint y.
	moved, model       float64
	xx, xm, mm, xy, yy float64
	blocks             int     // in the sums
	limited            float64 // s for which a valve has decided
}

// stretch is some readings taken together.
type stretch struct {
	moved, model float64 // Pa
	behind       float64 // Pa s
	span         float64 // s
}

// NewForecast works out the shape of the way. It refuses a target that the
// panel never reaches, with ErrNever.
func NewForecast(a Aim) (Forecast, error) {
	f := Forecast{aim: a, k: 1}
	f.lambda = f.aimFollow()
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
		r, err := a.Handling.rate(p, f.sign() > 0)
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

// sign is 1 where the pressure is to rise and -1 where it is to fall.
func (f *Forecast) sign() float64 {
	if f.aim.Target > f.aim.From {
		return 1
	}
	return -1
}

// modelRate returns r(p), that of the nearer end beyond the ends.
func (f *Forecast) modelRate(p float64) float64 {
	sign := f.sign()
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
		f.p, f.setpoint, f.level = float64(p), float64(setpoint), float64(p)
		return nil
	}
	if at <= f.seen {
		return fmt.Errorf("reading at %v: %w: not after the one before, at %v", at, ErrRange, f.seen)
	}
	dt := (at - f.seen).Seconds()
	sign := f.sign()
	mid := 0.5 * (float64(p) + f.p)
	behind := sign * (float64(f.aim.Target) - mid)
	if setpoint > 0 && f.setpoint > 0 {
		behind = sign * (0.5*(float64(setpoint)+f.setpoint) - mid)
	}
	// Noise is smoothed over a second, along the rate of the last block.
	const smooth = 1.0 // s
	f.level += sign * f.rateNow * dt
	f.level += (1 - math.Exp(-dt/smooth)) * (float64(p) - f.level)
	f.block.moved += sign * (float64(p) - f.p)
	f.block.model += f.modelRate(mid) * dt
	f.block.behind += behind * dt
	f.block.span += dt
	f.seen, f.p, f.setpoint = at, float64(p), float64(setpoint)
	if f.block.span >= blockSpan {
		f.rateNow = f.block.moved / f.block.span
		f.learn((at - f.start).Seconds())
		f.block = stretch{}
	}
	return nil
}

// learn updates k and λ from one block of readings. Where the pressure follows
// its setpoint, its rate is proportional to how far it is behind; where a valve
// decides, to what the model lets through. Both lines are fitted to the blocks
// of late, and the better one learns.
func (f *Forecast) learn(elapsed float64) {
	b, w := f.block, f.block.span
	slow := math.Exp(-w / min(60, max(3, 0.3*elapsed)))
	f.moved, f.model = slow*f.moved+b.moved, slow*f.model+b.model
	if !f.aim.Controlled {
		if elapsed > 2 && f.moved > float64(f.aim.Tolerance) {
			f.k = min(50, max(0.02, f.moved/f.model))
		}
		return
	}
	const window = 3.0 // s
	forget := math.Exp(-w / window)
	x, m, y := b.moved/w, b.model/w, b.behind/w
	if f.limited > 1 && x < 0.8*f.k*m {
		// It begins to close in: what was before would blur that.
		f.xx, f.xm, f.mm, f.xy, f.yy, f.blocks = 0, 0, 0, 0, 0, 0
		f.limited = 0
	}
	f.blocks++
	f.xx, f.xm, f.mm = forget*f.xx+x*x, forget*f.xm+x*m, forget*f.mm+m*m
	f.xy, f.yy = forget*f.xy+x*y, forget*f.yy+y*y
	// Only a pressure that moves well beyond the noise tells anything.
	told := f.xx*w*w > 4*float64(f.aim.Tolerance)*float64(f.aim.Tolerance)
	if !told || f.blocks < 4 || !(f.xm > 0) || !(f.xy > 0) {
		return
	}
	follows, limited := f.xx-f.xy*f.xy/f.yy, f.xx-f.xm*f.xm/f.mm
	switch {
	case follows < 0.1*limited:
		f.limited = 0
		f.lambda = min(4*f.aimFollow(), max(0.25*f.aimFollow(), f.yy/f.xy))
		f.k = max(f.k, f.xm/f.mm) // what is seen, the valve lets through
	case limited < 0.5*follows:
		if f.limited == 0 { // what was before does not count
			f.moved, f.model = b.moved, b.model
		}
		f.limited += w
		if f.limited > 1 {
			f.k = min(50, max(0.02, f.moved/f.model))
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
	sign := f.sign()
	target, tolerance := float64(f.aim.Target), float64(f.aim.Tolerance)
	left := sign * (target - f.level)
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
	sign := f.sign()
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
