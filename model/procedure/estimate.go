package procedure

import (
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
// after each, dwells; gas for what is let in; the share of air that is left. A pressure that the panel cannot
// reach is an error that wraps flow.ErrNever.
func (s Site) Estimate(p *live.Program, from unit.Pascal) (each []Cost, sum Cost, err error) {
	at, air := from, s.Air
	for i, ph := range p.Phases {
		c := Cost{Time: ph.Dwell}
		if ph.Action == live.Reach {
			h := s.Panel
			if ph.Rate > 0 {
				h.Rise, h.Fall = min(h.Rise, ph.Rate), min(h.Fall, ph.Rate)
			}
			stage, err := h.Move(at, ph.Target)
			if err != nil {
				return nil, Cost{}, fmt.Errorf("phase %d (%s): %w", i+1, ph.Label, err)
			}
			c.Time += s.Settle + stage.Time
			c.Gas = stage.Gas
			if ph.Target > at { // what comes in dilutes what is there
				air = (air*unit.Fraction(at) + s.Supply*unit.Fraction(ph.Target-at)) / unit.Fraction(ph.Target)
			}
			at = ph.Target
		}
		c.Air = air
		each = append(each, c)
		sum.Time += c.Time
		sum.Gas += c.Gas
		sum.Air = c.Air
	}
	return each, sum, nil
}
