package live

import (
	"fmt"
	"math"
	"time"

	"barline/model/flow"
	"barline/model/reading"
	"barline/model/unit"
)

// Nodes returns how many full-field runs the predictions stand on, and how
// many are planned.
func (s *State) Nodes() (have, planned int) { return s.nodes, s.nodesPlanned }

// Outcome returns how the last program ended.
func (s *State) Outcome() Outcome { return s.outcome }

// start begins a program at its first phase.
func (c *Core) start(s *State, p *Program, fx []Effect) []Effect {
	s.run, s.outcome, s.tuning = progress{program: p}, NoOutcome, tuning{}
	return c.beginPhase(s, fx)
}

// beginPhase starts the phase that the program stands at.
func (c *Core) beginPhase(s *State, fx []Effect) []Effect {
	ph := s.run.phase()
	isolated := s.Mode == Isolated
	s.run = progress{program: s.run.program, index: s.run.index, began: s.Now.Mono}
	p, ok := c.pressure(s)
	if !ok {
		return c.hold(s, "no usable pressure reading", fx)
	}
	target := ph.Target
	underCommand := s.engaged && (s.commanding() || s.Mode == Steady)
	switch {
	case ph.Action == Isolate:
		s.run.from, s.run.settledAt = p, s.Now.Mono
		return c.isolate(s, fx)
	case ph.Action != Reach && (isolated || underCommand):
		// The valves stay shut, or the controller keeps its setpoint.
		s.Why = ph.Label
		if underCommand {
			s.Mode = Settling
		}
		c.settled(s)
		return fx
	case ph.Action != Reach:
		target = p // take over where the gas is
	}
	s.Target, s.Mode, s.Why, s.nearSince = min(target, c.limits.Lowest().Max), Ramping, ph.Label, 0
	c.expect(s, p, ph)
	if s.rampedAt != 0 && s.Now.Mono-s.rampedAt < rampEvery {
		return fx // somebody asks faster than the rate allows: the ramp goes on in its time
	}
	return c.rampOn(s, fx)
}

// rampFrom returns where the next setpoint starts from: the last one where the
// controller stands under it, so that there is no leap back to a gas that
// lags; else where the gas is. A setpoint that HOLD turned back, or that never
// went out, is no place to start from.
func (c *Core) rampFrom(s *State) (from unit.Pascal, ok bool) {
	if s.engaged {
		return s.Setpoint, true
	}
	p, ok := c.pressure(s)
	return min(max(p, 0), c.limits.Lowest().Max), ok
}

// settled goes on from the settling of a phase to what it is for.
func (c *Core) settled(s *State) {
	if s.run.phase().Action == SetEnergy {
		c.wantEnergy(s)
		return
	}
	s.run.settledAt = s.Now.Mono
}

// expect begins a forecast of how long the move to the target takes.
func (c *Core) expect(s *State, from unit.Pascal, ph *Phase) {
	h := c.handling
	l := c.limits.AtMost(ph.Rate)
	h.Rise, h.Fall = l.RiseRate, l.FallRate
	var err error
	s.forecast, err = flow.NewForecast(flow.Aim{
		Handling: h, From: from, Target: s.Target, Tolerance: ph.within(), Controlled: true, Core: c.spec,
	})
	s.forecasting = err == nil
}

// isolate shuts inlet, pump and vent. The pressure is then only watched.
func (c *Core) isolate(s *State, fx []Effect) []Effect {
	p, _ := c.pressure(s)
	sp := c.limits.Freeze(p)
	frozen, _ := sp.Pressure()
	s.command++
	s.Mode, s.Why, s.Target, s.Setpoint, s.engaged = Isolated, s.run.phase().Label, 0, frozen, false
	s.awaiting, s.awaitFrom, s.nearSince = s.command, s.Now.Mono, 0
	return append(fx,
		SendHold{Command: s.command, Setpoint: sp},
		Record{At: s.Now, Kind: KindCommand, Data: CommandData{Command: s.command, Hold: true, SetpointPa: float64(frozen), Why: isolating}, Sync: true})
}

// rampOn moves the setpoint on by at most one second's worth of the allowed
// rate.
func (c *Core) rampOn(s *State, fx []Effect) []Effect {
	ph := s.run.phase()
	from, ok := c.rampFrom(s)
	if !ok {
		return c.hold(s, "no usable pressure reading", fx)
	}
	sp, err := c.limits.AtMost(ph.Rate).Step(from, s.Target, rampEvery)
	if err != nil {
		return c.hold(s, err.Error(), fx)
	}
	fx = c.send(s, sp, fx)
	if s.Setpoint == s.Target {
		s.Mode, s.run.began, s.run.halfFrom, s.run.halves = Settling, s.Now.Mono, s.Now.Mono, [2]mean{}
	}
	return fx
}

// proceed carries the program on by one tick.
func (c *Core) proceed(s *State, fx []Effect) []Effect {
	r := &s.run
	if !r.active() || r.paused || r.asks || r.turning {
		return fx
	}
	ph := r.phase()
	switch s.Mode {
	case Ramping:
		if s.Now.Mono-s.rampedAt < rampEvery || s.awaiting != 0 {
			return fx
		}
		return c.rampOn(s, fx)
	case Settling:
		if r.settledAt == 0 {
			return c.settle(s, fx)
		}
	case Isolated:
		p, _ := c.pressure(s)
		elapsed := s.Now.Mono - r.settledAt
		if ph.MaxRise > 0 && elapsed >= ph.Dwell {
			if rise := unit.PascalPerSecond(float64(p-r.from) / elapsed.Seconds()); rise > ph.MaxRise {
				fx = c.row(s, fx)
				return c.hold(s, fmt.Sprintf("%s: pressure rose by %.3g Pa/s, allowed %.3g Pa/s", ph.Label, float64(rise), float64(ph.MaxRise)), fx)
			}
		}
	default:
		return fx
	}
	if s.Now.Mono-r.settledAt < ph.Dwell {
		return fx
	}
	fx = c.row(s, fx)
	return c.next(s, fx)
}

// settle watches a gas that is on its way to the target: settled is what has
// been near to it and still for a while, in the cell and in the core. The
// controller keeps its own sensor at the target, and the cell's gauge may read
// a little beside that for ever.
func (c *Core) settle(s *State, fx []Effect) []Effect {
	ph := s.run.phase()
	a := c.gauge(s, reading.CellAPressure)
	near := math.Abs(a.Value-float64(s.Target)) <= float64(ph.near(s.Target)) && math.Abs(float64(s.Lag)) <= float64(ph.within())
	if c.slow(s) {
		c.settled(s)
		return fx
	}
	if ph.Floor > 0 && ph.Within == 0 {
		near = false // the rate alone decides
	}
	s.nearLow, s.nearHigh = min(s.nearLow, a.Value), max(s.nearHigh, a.Value)
	switch {
	case !near:
		s.nearSince = 0
		if s.Now.Mono-s.run.began > ph.patience() {
			return c.hold(s, fmt.Sprintf("the gas did not settle at %v within %v", s.Target, ph.patience()), fx)
		}
	case s.nearSince == 0 || s.nearHigh-s.nearLow > float64(stillWithin):
		s.nearSince, s.nearLow, s.nearHigh = s.Now.Mono, a.Value, a.Value
	case s.Now.Mono-s.nearSince >= settledFor:
		c.settled(s)
	}
	return fx
}

// floorSpan is how long a pressure is averaged twice over to tell how fast it
// changes.
const floorSpan = 10 * time.Second

// slow reports whether the pressure of a phase with a floor has come to change
// more slowly than that.
func (c *Core) slow(s *State) bool {
	r := &s.run
	if r.phase().Floor == 0 || s.Now.Mono-r.halfFrom < floorSpan {
		return false
	}
	before, now := r.halves[0], r.halves[1]
	r.halves, r.halfFrom = [2]mean{now, {}}, s.Now.Mono
	rate := math.Abs(now.value-before.value) / floorSpan.Seconds()
	return before.n >= leastSamples && now.n >= leastSamples && rate < float64(r.phase().Floor)
}

// next goes on to the next phase or ends the program.
func (c *Core) next(s *State, fx []Effect) []Effect {
	if s.run.index+1 < len(s.run.program.Phases) {
		s.run.index++
		fx = append(fx, Record{At: s.Now, Kind: KindIntent, Data: IntentData{
			Intent: "begin", Program: s.run.program.Name, Phase: s.run.program.First + s.run.index + 1,
		}})
		return c.beginPhase(s, fx)
	}
	name, measured := s.run.program.Name, s.run.emission
	s.run, s.outcome = progress{}, Completed
	s.Notice = name + ": complete"
	c.rest(s, "settled", "valves shut at the end of "+name)
	fx = append(fx, Record{At: s.Now, Kind: KindIntent, Data: IntentData{Intent: "complete", Program: name}})
	if s.tuning.wanted != 0 {
		return c.tuned(s, measured, fx)
	}
	return fx
}

// rest ends a program: the controller keeps its setpoint, or, where it has
// none since the valves were shut, they stay so.
func (c *Core) rest(s *State, steady, shut string) {
	if s.engaged {
		s.Target, s.Mode, s.Why = s.Setpoint, Steady, steady
		return
	}
	s.Target, s.Mode, s.Why, s.heldByItself = 0, Held, shut, false
}

// row writes what was measured during the dwell of a phase that asks for it.
func (c *Core) row(s *State, fx []Effect) []Effect {
	if !s.run.phase().Row {
		return fx
	}
	d := c.stepData(s)
	if s.Mode == Isolated {
		d.Rise = c.judgeRise(s)
	}
	return c.shown(s, d, append(fx, Record{At: s.Now, Kind: KindStep, Data: d, Sync: true}))
}

// sample adds a reading to the row that is being measured.
func (c *Core) sample(s *State, r reading.Reading) {
	if s.tuning.base != 0 && r.Role == reading.Emission && r.Status.Usable() {
		s.tuning.seen.add(r.Value)
	}
	if s.forecasting && r.Role == reading.CellAPressure && r.Status.Usable() {
		// A reading that teaches nothing is refused there and does no harm.
		_ = s.forecast.See(r.Taken.Mono, unit.Pascal(max(r.Value, 0)), s.Setpoint)
	}
	if !s.run.active() || s.run.paused || !r.Status.Usable() {
		return
	}
	if s.run.settledAt == 0 {
		if r.Role == reading.CellAPressure {
			s.run.halves[1].add(r.Value)
		}
		return
	}
	switch r.Role {
	case reading.CellAPressure:
		s.run.pressure.add(r.Value)
		if b := s.Reading(reading.CellBPressure, c.stale); b.Status.Usable() {
			s.run.apart.add(r.Value - b.Value)
		}
		if s.Mode == Isolated {
			c.watchRise(s, r)
		}
	case reading.Emission:
		s.run.emission.add(r.Value)
		if s.ResidualAt == r.Taken.Mono {
			s.run.residual.add(float64(s.Residual))
		}
	}
}

// change carries out Pause, Resume, Skip and Stop.
func (c *Core) change(s *State, in Intent, fx []Effect) ([]Effect, error) {
	r := &s.run
	if _, stop := in.(Stop); stop && !r.active() && s.tuning.base != 0 {
		s.tuning, s.Why = tuning{}, "settled"
		return fx, nil
	}
	if !r.active() {
		return fx, fmt.Errorf("no program is under way")
	}
	switch in.(type) {
	case Pause:
		if r.paused {
			return fx, fmt.Errorf("the program is paused already")
		}
		r.paused, r.pausedAt, s.Why = true, s.Now.Mono, "paused"
	case Resume:
		if !r.paused {
			return fx, fmt.Errorf("the program is not paused")
		}
		away := s.Now.Mono - r.pausedAt
		r.began += away
		if r.settledAt != 0 {
			r.settledAt += away
		}
		r.paused, s.Why = false, r.phase().Label
		r.halfFrom, r.halves = s.Now.Mono, [2]mean{}
		if r.asks {
			s.Why = r.request()
		}
	case Skip:
		return c.next(s, fx), nil
	case Stop:
		name := r.program.Name
		*r, s.outcome, s.tuning = progress{}, Stopped, tuning{}
		c.rest(s, name+" stopped", "valves shut; "+name+" stopped")
	}
	return fx, nil
}
