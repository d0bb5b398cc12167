package live

import (
	"fmt"
	"math"

	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// pressure returns the pressure that decisions lean on: the higher of the
// usable cell gauges, so that the gauge nearer to a rating decides.
func (c *Core) pressure(s *State) (p unit.Pascal, ok bool) {
	for _, role := range [...]reading.Role{reading.CellAPressure, reading.CellBPressure} {
		if r := s.Reading(role, c.stale); r.Status.Usable() {
			p, ok = max(p, unit.Pascal(r.Value)), true
		}
	}
	return p, ok
}

// commanding reports whether the core is moving gas or about to.
func (s *State) commanding() bool {
	return s.Mode == Ramping || s.Mode == Settling || s.Mode == Isolated
}

// unsafe says why gas may not be moved now, or "".
func (c *Core) unsafe(s *State) string {
	a, b := s.Reading(reading.CellAPressure, c.stale), s.Reading(reading.CellBPressure, c.stale)
	for _, r := range [...]reading.Reading{a, b} {
		if r.Channel != "" && !r.Status.Usable() {
			return fmt.Sprintf("%s: %s, %s", r.Channel, r.Status, r.Reason)
		}
	}
	p, ok := c.pressure(s)
	if !ok {
		return "no usable pressure reading"
	}
	if why := c.overRating(p); why != "" {
		return why
	}
	if s.Mode == Settling && a.Status.Usable() && b.Status.Usable() && c.disagreement > 0 && s.nearSince != 0 &&
		math.Abs(a.Value-b.Value) > float64(c.disagreement) {
		return fmt.Sprintf("%s and %s differ by %v, allowed %v", a.Channel, b.Channel, unit.Pascal(math.Abs(a.Value-b.Value)), c.disagreement)
	}
	ramping := s.Mode == Ramping || s.Mode == Settling
	if c.follow > 0 && ramping && s.engaged && unit.Pascal(math.Abs(float64(p-s.Setpoint))) > c.follow {
		return fmt.Sprintf("pressure %v does not follow the setpoint %v", p, s.Setpoint)
	}
	if s.commanding() && s.awaiting != 0 && s.Now.Mono-s.awaitFrom > c.confirm {
		return fmt.Sprintf("the controller did not confirm the setpoint %v within %v", s.Setpoint, c.confirm)
	}
	if !s.Record.Writing {
		return "nothing is being recorded: " + s.Record.Reason
	}
	return ""
}

// overRating says which rating p is above, or "".
func (c *Core) overRating(p unit.Pascal) string {
	if low := c.limits.Lowest(); p > low.Max {
		return fmt.Sprintf("%v is above the rating of %s, %v", p, low.Part, low.Max)
	}
	return ""
}

// send puts a setpoint on its way: the record first, on the disk, then the
// wire.
func (c *Core) send(s *State, sp limit.Setpoint, fx []Effect) []Effect {
	p, _ := sp.Pressure()
	s.command++
	s.refused = false
	s.Setpoint, s.engaged, s.awaiting, s.awaitFrom, s.rampedAt = p, true, s.command, s.Now.Mono, s.Now.Mono
	return append(fx,
		Record{At: s.Now, Kind: KindCommand, Data: CommandData{Command: s.command, SetpointPa: float64(p)}, Sync: true},
		SendSetpoint{Command: s.command, Setpoint: sp})
}

// heldByPerson is why the bench is held when somebody asked for it.
const heldByPerson = "asked for"

// hold goes to the safe state: it acts first and records afterwards.
func (c *Core) hold(s *State, why string, fx []Effect) []Effect {
	last := s.Setpoint
	if p, ok := c.pressure(s); ok {
		last = p
	}
	sp := c.limits.Freeze(last)
	p, _ := sp.Pressure()
	s.command++
	s.heldAt = s.Now.Mono
	s.Mode, s.Why, s.heldByItself, s.refused = Held, why, why != heldByPerson, false
	s.ArmedUntil, s.Target, s.Setpoint, s.engaged, s.tuning = 0, 0, p, false, tuning{}
	if s.run.active() {
		s.run, s.outcome = progress{}, EndedByHold
	}
	s.awaiting, s.awaitFrom, s.nearSince = s.command, s.Now.Mono, 0
	return append(fx,
		SendHold{Command: s.command, Setpoint: sp},
		Record{At: s.Now, Kind: KindCommand, Data: CommandData{Command: s.command, Hold: true, SetpointPa: float64(p), Why: why}, Sync: true})
}

func (c *Core) answered(s *State, e Answered, fx []Effect) []Effect {
	fx = append(fx, Record{At: e.At, Kind: KindReadback, Data: ReadbackData{Command: e.Command, Error: e.Err}})
	if e.Command != s.awaiting {
		return fx
	}
	s.awaiting = 0
	if e.Err == "" {
		return fx
	}
	s.refused = true
	if s.Mode == Held {
		s.Why += "; the controller did not take HOLD: " + e.Err
		return fx
	}
	fx = c.hold(s, "the controller did not take the setpoint: "+e.Err, fx)
	s.refused = true
	return fx
}
