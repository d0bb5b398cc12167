package live

import (
	"fmt"
	"math"
	"time"

	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// bridged is how long a cell's last good reading stands in for answers that
// fail: one spoilt frame on a line must not end a scan of hours. It is one step
// of a ramp, and less than what makes a reading stale.
const bridged = time.Second

// gauge returns the reading of a cell that decisions lean on: the newest, or
// the last good one while the newest is a failure and that one is fresh.
func (c *Core) gauge(s *State, role reading.Role) reading.Reading {
	r := s.Reading(role, c.stale)
	if last := s.lastGood[role-reading.CellAPressure]; r.Status == reading.Failure && last.Channel != "" &&
		s.Now.Mono-last.Taken.Mono <= min(bridged, c.stale) {
		return last
	}
	return r
}

// pressure returns the pressure that decisions lean on: the higher of the
// usable cell gauges, so that the gauge nearer to a rating decides.
func (c *Core) pressure(s *State) (p unit.Pascal, ok bool) {
	for _, role := range [...]reading.Role{reading.CellAPressure, reading.CellBPressure} {
		if r := c.gauge(s, role); r.Status.Usable() {
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
	a, b := c.gauge(s, reading.CellAPressure), c.gauge(s, reading.CellBPressure)
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
		math.Abs(a.Value-b.Value) > float64(c.disagreement+c.between(a, b)) {
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

// between returns how far the gas may have moved by right between two readings
// that were not taken at the same time.
func (c *Core) between(a, b reading.Reading) unit.Pascal {
	apart := math.Abs((a.Taken.Mono - b.Taken.Mono).Seconds())
	return unit.Pascal(apart * float64(max(c.limits.RiseRate, c.limits.FallRate)))
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

// isolating is why a program shuts the valves.
const isolating = "isolating"

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
	c.disarm(s)
	s.Target, s.Setpoint, s.engaged, s.tuning = 0, p, false, tuning{}
	if s.run.active() {
		s.run, s.outcome = progress{}, EndedByHold
	}
	s.awaiting, s.awaitFrom, s.nearSince = s.command, s.Now.Mono, 0
	s.aside, s.hand = aside{}, [limit.ValveCount]byHand{}
	return append(fx,
		SendHold{Command: s.command, Setpoint: sp},
		Record{At: s.Now, Kind: KindCommand, Data: CommandData{Command: s.command, Hold: true, SetpointPa: float64(p), Why: why}, Sync: true})
}

// disarm ends the time in which gas may be moved by a new command, and what
// was said to be understood for that time.
func (c *Core) disarm(s *State) { s.ArmedUntil, s.understood = 0, [cautionCount]bool{} }

func (c *Core) answered(s *State, e Answered, fx []Effect) []Effect {
	fx = append(fx, Record{At: e.At, Kind: KindReadback, Data: ReadbackData{Command: e.Command, Error: e.Err}})
	if s.aside.command != 0 && e.Command == s.aside.command {
		return c.orderAnswered(s, e, fx)
	}
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
