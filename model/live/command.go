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
	if low := c.limits.Lowest(); p > low.Max {
		return fmt.Sprintf("%v is above the rating of %s, %v", p, low.Part, low.Max)
	}
	if s.Mode == Settling && a.Status.Usable() && b.Status.Usable() && c.disagreement > 0 && s.nearSince != 0 &&
		math.Abs(a.Value-b.Value) > float64(c.disagreement) {
		return fmt.Sprintf("%s and %s differ by %v, allowed %v", a.Channel, b.Channel, unit.Pascal(math.Abs(a.Value-b.Value)), c.disagreement)
	}
	moving := s.Mode == Ramping || s.Mode == Settling
	if c.follow > 0 && moving && unit.Pascal(math.Abs(float64(p-s.Setpoint))) > c.follow {
		return fmt.Sprintf("pressure %v does not follow the setpoint %v", p, s.Setpoint)
	}
	if moving && s.awaiting != 0 && s.Now.Mono-s.awaitFrom > answerWithin {
		return fmt.Sprintf("the controller did not confirm the setpoint %v within %v", s.Setpoint, answerWithin)
	}
	if !s.Record.Writing {
		return "nothing is being recorded: " + s.Record.Reason
	}
	return ""
}

// send puts a setpoint on its way: the record first, on the disk, then the
// wire.
func (c *Core) send(s *State, sp limit.Setpoint, fx []Effect) []Effect {
	p, _ := sp.Pressure()
	s.command++
	s.Setpoint, s.awaiting, s.awaitFrom, s.rampedAt = p, s.command, s.Now.Mono, s.Now.Mono
	return append(fx,
		Record{At: s.Now, Kind: KindCommand, Data: CommandData{Command: s.command, SetpointPa: float64(p)}, Sync: true},
		SendSetpoint{Command: s.command, Setpoint: sp})
}

// ramp moves the setpoint on by at most one second's worth of the allowed
// rate.
func (c *Core) ramp(s *State, fx []Effect) []Effect {
	if s.Mode != Ramping || s.Now.Mono-s.rampedAt < rampEvery || s.awaiting != 0 {
		return fx
	}
	sp, err := c.limits.Step(s.Setpoint, s.Target, rampEvery)
	if err != nil {
		return c.hold(s, err.Error(), fx)
	}
	fx = c.send(s, sp, fx)
	if s.Setpoint == s.Target {
		s.Mode, s.Why, s.nearSince = Settling, "waiting for the gas to settle", 0
	}
	return fx
}

// advance watches a settling gas and, in a run of steps, goes on to the next.
func (c *Core) advance(s *State, fx []Effect) []Effect {
	if s.Mode != Settling {
		return fx
	}
	a := s.Reading(reading.CellAPressure, c.stale)
	if math.Abs(a.Value-float64(s.Target)) > float64(settledWithin) {
		s.nearSince = 0
		return fx
	}
	if s.nearSince == 0 {
		s.nearSince = s.Now.Mono
	}
	if s.Now.Mono-s.nearSince < settledFor {
		return fx
	}
	st := &s.Steps
	if !st.Active() {
		s.Why = "settled"
		return fx
	}
	if st.SettledAt == 0 {
		st.SettledAt, st.sum, st.taken = s.Now.Mono, 0, 0
		s.Why = "dwelling"
		return fx
	}
	if s.Now.Mono-st.SettledAt < st.Dwell {
		return fx
	}
	fx = append(fx, Record{At: s.Now, Kind: KindStep, Data: c.stepData(s), Sync: true})
	st.Index++
	st.SettledAt = 0
	if !st.Active() {
		s.Why = "settled"
		s.Notice = "run of steps complete"
		return fx
	}
	return c.begin(s, st.Targets[st.Index], fx)
}

// begin starts a ramp to target from where the gas is now.
func (c *Core) begin(s *State, target unit.Pascal, fx []Effect) []Effect {
	from, ok := c.pressure(s)
	if !ok {
		return c.hold(s, "no usable pressure reading", fx)
	}
	if s.Mode == Ramping || s.Mode == Settling {
		from = s.Setpoint // under way: no leap back to a gas that lags
	}
	from = min(max(from, 0), c.limits.Lowest().Max)
	s.Target, s.Mode, s.Why, s.nearSince = target, Ramping, "ramping", 0
	sp, err := c.limits.Step(from, target, rampEvery)
	if err != nil {
		return c.hold(s, err.Error(), fx)
	}
	fx = c.send(s, sp, fx)
	if s.Setpoint == target {
		s.Mode, s.Why = Settling, "waiting for the gas to settle"
	}
	return fx
}

// hold goes to the safe state: it acts first and records afterwards.
func (c *Core) hold(s *State, why string, fx []Effect) []Effect {
	last := s.Setpoint
	if p, ok := c.pressure(s); ok {
		last = p
	}
	sp := c.limits.Freeze(last)
	p, _ := sp.Pressure()
	s.command++
	s.Mode, s.Why = Held, why
	s.ArmedUntil, s.Target, s.Setpoint = 0, 0, p
	s.Steps = Steps{}
	s.awaiting, s.awaitFrom, s.nearSince = s.command, s.Now.Mono, 0
	return append(fx,
		SendHold{Command: s.command, Setpoint: sp},
		Record{At: s.Now, Kind: KindCommand, Data: CommandData{Command: s.command, Hold: true, SetpointPa: float64(p), Why: why}, Sync: true},
		Bell{})
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
	if s.Mode == Held {
		s.Why += "; the controller did not take HOLD: " + e.Err
		return append(fx, Bell{})
	}
	return c.hold(s, "the controller did not take the setpoint: "+e.Err, fx)
}
