package procedure

import (
	"time"

	"barline/model/flow"
	"barline/model/limit"
	"barline/model/live"
	"barline/model/unit"
)

// Site is where a program would run, for an estimate of what it takes.
type Site struct {
	Limits      limit.Limits
	Volume      unit.CubicMetre // of both cells
	Gas         flow.Medium
	Temperature unit.Kelvin
	Settle      time.Duration // after each ramp
}

// Cost is what one phase takes, by estimate.
type Cost struct {
	Time time.Duration
	Gas  float64 // mol taken from the cylinder
}

// Estimate works out what every phase of a program takes from a pressure on,
// and the sum: ramps at their rate, a settling time after each, dwells; gas
// for what the cells hold more at the end of a ramp than at its start. What a
// valve cannot pass or a pump cannot reach in that time comes on top.
func (s Site) Estimate(p *live.Program, from unit.Pascal) (each []Cost, sum Cost, err error) {
	at := from
	held, err := s.Gas.Density(at, s.Temperature)
	if err != nil {
		return nil, Cost{}, err
	}
	for _, ph := range p.Phases {
		c := Cost{Time: ph.Dwell}
		if ph.Action == live.Reach {
			c.Time += s.Settle + s.Limits.AtMost(ph.Rate).RampTime(at, ph.Target)
			at = ph.Target
			holds, err := s.Gas.Density(at, s.Temperature)
			if err != nil {
				return nil, Cost{}, err
			}
			c.Gas = max(0, float64(holds-held)*float64(s.Volume))
			held = holds
		}
		each = append(each, c)
		sum.Time += c.Time
		sum.Gas += c.Gas
	}
	return each, sum, nil
}
