package procedure

import (
	"errors"
	"fmt"
	"time"

	"barline/model/flow"
	"barline/model/live"
	"barline/model/unit"
)

// Site is where a program would run, for an estimate of what it takes.
type Site struct {
	Panel  flow.Handling // its rates are the limits'
	Settle time.Duration // after each ramp
	Air    unit.Fraction // in the gas at the start
	Supply unit.Fraction // air in what the cylinder gives
}

// Cost is what one phase takes, by estimate.
type Cost struct {
	Time time.Duration
	Gas  float64       // mol taken from the cylinder
	Air  unit.Fraction // in the gas at the end, by perfect mixing
}

// Estimate works out what every phase of a program takes from a pressure on,
// and the sum: ramps as fast as valves and rates let them, a settling time
// after each, dwells; gas for what is let in; the share of air that is left. An
// evacuation to a rate ends where the panel's own rate has come down to it; a
// person who sets an energy takes no time. A pressure that
// the panel cannot reach is an error that wraps flow.ErrNever.
func (s Site) Estimate(p *live.Program, from unit.Pascal) (each []Cost, sum Cost, err error) {
	at, air := from, s.Air
	for i, ph := range p.Phases {
		c := Cost{Time: ph.Dwell}
		if ph.Action == live.Reach {
			h := s.Panel
			if ph.Rate > 0 {
				h.Rise, h.Fall = min(h.Rise, ph.Rate), min(h.Fall, ph.Rate)
			}
			to, took, err := ph.Target, time.Duration(0), error(nil)
			if ph.Floor > 0 && to < at {
				to, took, err = evacuate(h, at, ph)
			} else {
				var stage flow.Stage
				stage, err = h.Move(at, to)
				took, c.Gas = stage.Time, stage.Gas
			}
			if err != nil {
				return nil, Cost{}, fmt.Errorf("phase %d (%s): %w", i+1, ph.Label, err)
			}
			c.Time += s.Settle + took
			if to > at { // what comes in dilutes what is there
				air = (air*unit.Fraction(at) + s.Supply*unit.Fraction(to-at)) / unit.Fraction(to)
			}
			at = to
		}
		c.Air = air
		each = append(each, c)
		sum.Time += c.Time
		sum.Gas += c.Gas
		sum.Air = c.Air
	}
	return each, sum, nil
}

// evacuate returns where an evacuation to a rate ends, and when: it goes down
// in stretches of a tenth until the pressure falls more slowly than the phase
// wants, or the pump can do no more.
func evacuate(h flow.Handling, from unit.Pascal, ph live.Phase) (to unit.Pascal, took time.Duration, err error) {
	const stretch, least = 0.9, 0.01 // Pa: below it no gauge of such a bench tells
	for to = from; to > max(ph.Target, least); {
		next := max(ph.Target, to*stretch)
		stage, err := h.Move(to, next)
		if errors.Is(err, flow.ErrNever) {
			return to, took, nil
		}
		if err != nil {
			return to, took, err
		}
		took += stage.Time
		rate := unit.PascalPerSecond(float64(to-next) / stage.Time.Seconds())
		to = next
		if rate < ph.Floor {
			break
		}
	}
	return to, took, nil
}
