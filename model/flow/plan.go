package flow

import (
	"fmt"
	"math"
	"time"

	"barline/model/unit"
)

// Relaxation returns the slowest time constant of small deviations from p in
// the channel, both ends at p: L²/(π²·D(p)), four times that with one end
// sealed. In the molecular regime it no longer depends on p.
func (s Spec) Relaxation(p unit.Pascal) (time.Duration, error) {
	s.Cells = 4
	c, err := NewCore(s)
	if err != nil {
		return 0, err
	}
	if err := c.Fill(p, p, s.Temperature); err != nil {
		return 0, err
	}
	return time.Duration(c.relaxation() * 1e9), nil
}

// Handling is how fast gas may be moved and by what.
type Handling struct {
	// Panel has the valves as they stand when open. Where one has no
	// conductance its size is not known, and only the allowed rate counts.
	Panel
	Rise, Fall unit.PascalPerSecond // allowed; zero is any
	PumpBelow  unit.Pascal          // above it the vent, below it the pump
}

// Stage is one move of the pressure.
type Stage struct {
	From, To unit.Pascal
	Time     time.Duration
	Gas      float64 // mol taken from the cylinder
}

// Move returns what it takes to bring the panel from one pressure to another,
// at the temperature of the wall: each stretch as fast as the valve lets it
// and the limits allow. Where the valve cannot, the error wraps ErrNever.
func (h Handling) Move(from, to unit.Pascal) (Stage, error) {
	stage := Stage{From: from, To: to}
	a, err := h.At(from, h.Wall)
	if err != nil {
		return stage, err
	}
	b, err := h.At(to, h.Wall)
	if err != nil {
		return stage, err
	}
	stage.Gas = max(0, b.Amount-a.Amount)
	if from == to {
		return stage, nil
	}
	// Time is ∫dp/rate, by the midpoint rule in stretches that are equal in
	// pressure far from the end and in its logarithm near vacuum. What cannot
	// be reached shows at the very end first.
	const stretches, end = 300, 1 - 1.0/4000
	scale := unit.Pascal(1e-3) * max(from, to)
	place := func(f float64) unit.Pascal {
		x := (1-f)*math.Asinh(float64(from/scale)) + f*math.Asinh(float64(to/scale))
		return scale * unit.Pascal(math.Sinh(x))
	}
	if _, err := h.rate(place(end), to > from); err != nil {
		return stage, fmt.Errorf("%v to %v: %w", from, to, err)
	}
	seconds, low := 0.0, from
	for k := range stretches {
		high := place(float64(k+1) / stretches)
		rate, err := h.rate((low+high)/2, to > from)
		if err != nil {
			return stage, fmt.Errorf("%v to %v: %w", from, to, err)
		}
		seconds += math.Abs(float64(high-low)) / rate
		low = high
	}
	if seconds > panelHorizon.Seconds() {
		return stage, fmt.Errorf("%v to %v: %w: it would take %.0f h", from, to, ErrNever, seconds/3600)
	}
	stage.Time = time.Duration(seconds * 1e9)
	return stage, nil
}

// rate returns how fast the pressure moves at p, in Pa/s.
func (h Handling) rate(p unit.Pascal, rising bool) (float64, error) {
	cell, err := h.At(p, h.Wall)
	if err != nil {
		return 0, err
	}
	open := Panel{Cell: h.Cell, Ambient: h.Ambient}
	open.WallTime = 0
	allowed, known := float64(h.Fall), false
	switch {
	case rising:
		allowed = float64(h.Rise)
		open.Inlet, open.Needle, known = h.Inlet, h.Needle, h.Needle.Conductance > 0
	case p >= h.PumpBelow:
		open.Vent, known = h.Vent, h.Vent.Conductance > 0
	default:
		open.Pump, known = h.Pump, h.Pump.Speed > 0
	}
	if allowed == 0 {
		allowed = math.Inf(1)
	}
	if known {
		open.Leak = h.Leak
		dn, _ := open.rates(cell.Amount, cell.Amount*float64(h.Wall), 1)
		if rising != (dn > 0) || dn == 0 {
			return 0, fmt.Errorf("%w: it stops at %v", ErrNever, p)
		}
		// dp/dt = (∂p/∂n)·dn/dt, from a small step of the virial equation.
		more := cell
		more.Amount += 1e-6 * max(cell.Amount, 1e-12)
		slope := float64(h.Pressure(more)-h.Pressure(cell)) / (more.Amount - cell.Amount)
		allowed = min(allowed, math.Abs(dn)*slope)
	}
	if math.IsInf(allowed, 1) {
		return 0, fmt.Errorf("the rate at %v: %w: neither a valve nor an allowed rate is given", p, ErrRange)
	}
	return allowed, nil
}

// PurgePlan is a purge before it is done.
type PurgePlan struct {
	Cycles   int
	First    Stage         // from the pressure at the start to Low
	Up, Down Stage         // of each cycle
	Hold     time.Duration // at Low, three time constants of the slowest channel
	Total    time.Duration // all cycles, ending at High
	Gas      float64       // mol taken from the cylinder
	Reached  unit.Fraction // air at the end
	Floor    unit.Fraction // air that more cycles would not go below
}

// PlanPurge plans cycles from the pressure at which the panel stands until the
// share of air is at or below want. channels are the core and the cladding
// between the cells.
func PlanPurge(h Handling, p Purge, from unit.Pascal, want unit.Fraction, channels ...Spec) (PurgePlan, error) {
	n, err := p.Cycles(want)
	if err != nil {
		return PurgePlan{}, err
	}
	plan := PurgePlan{Cycles: n, Reached: p.After(n), Floor: p.Floor()}
	if n == 0 {
		return plan, nil
	}
	for _, s := range channels {
		tau, err := s.Relaxation(p.Low)
		if err != nil {
			return plan, err
		}
		plan.Hold = max(plan.Hold, 3*tau)
	}
	if plan.First, err = h.Move(from, p.Low); err != nil {
		return plan, err
	}
	if plan.Up, err = h.Move(p.Low, p.High); err != nil {
		return plan, err
	}
	if plan.Down, err = h.Move(p.High, p.Low); err != nil {
		return plan, err
	}
	cycles := time.Duration(n)
	plan.Total = plan.First.Time + cycles*(plan.Hold+plan.Up.Time) + (cycles-1)*plan.Down.Time
	plan.Gas = plan.First.Gas + float64(n)*plan.Up.Gas
	return plan, nil
}

// NormLitres returns the volume of an amount in mol as an ideal gas at 0 °C and
// 101325 Pa, the norm state of DIN 1343, as flow meters and suppliers count.
func NormLitres(mol float64) float64 {
	return mol * GasConstant * float64(unit.ZeroCelsius) / float64(unit.Atmosphere) * 1e3
}
