package live

import (
	"fmt"
	"math"
	"time"

	"barline/model/alarm"
	"barline/model/bench"
	"barline/model/drift"
	"barline/model/reading"
)

// Names of the alarms that every bench has.
const (
	alarmRating   = "pressure above rating"
	alarmHeld     = "held by itself"
	alarmRecord   = "nothing is being recorded"
	alarmCommand  = "command not confirmed"
	alarmDisagree = "cell gauges disagree"
	alarmAway     = "pressure away from its setpoint"
	alarmLight    = "the light drifts"
	alarmGauges   = "cell gauges drift apart"
	alarmLeak     = "pressure falls with every valve shut"
)

// watched is a channel whose silence somebody must hear of.
type watched struct {
	role reading.Role
	name string // of its alarm
	link int    // its instrument's place among the links
}

// lineAlarm returns the name of the alarm of an instrument's line.
func lineAlarm(instrument string) string { return "line to " + instrument + " lost" }

// alarmsOf returns the alarms of a bench and the channels watched.
func alarmsOf(b *bench.Bench) (definitions []alarm.Definition, channels []watched) {
	definitions = []alarm.Definition{
		{
			Name: alarmRating, Priority: alarm.High, Latching: true,
			Cause: "a cell gauge reads more than the lowest rating", Consequence: "HOLD: inlet, pump and vent are shut",
			Action:   "Check that the relief valve has opened. Keep clear. Vent by hand if it is safe to.",
			Deadband: float64(b.Limits.Enforced().Lowest().Max) * 0.01,
		},
		{
			Name: alarmHeld, Priority: alarm.High,
			Cause: "what a command leans on was lost", Consequence: "HOLD: nothing resumes by itself",
			Action: "Read why beside HOLD, mend it, then arm again.",
		},
		{
			Name: alarmRecord, Priority: alarm.High,
			Cause: "the logbook's disk refuses", Consequence: "records wait in memory; only HOLD is taken",
			Action: "Make room on the disk or bring it back; nothing else is needed.",
		},
		{
			Name: alarmCommand, Priority: alarm.High,
			Cause: "the controller did not confirm the last command", Consequence: "what the controller does is not known",
			Action: "Look at the controller's own display. Shut the valves by hand if it differs.",
		},
		{
			Name: alarmDisagree, Priority: alarm.Medium, OnDelay: 10 * time.Second, OffDelay: 5 * time.Second,
			Cause: "two cell gauges differ by more than the bench file allows", Consequence: "the prediction rests on their mean",
			Action: "Check both cell valves and the zero of both gauges.", ShelveAtMost: 8 * time.Hour,
		},
	}
	if b.Drift.Wavelength > 0 {
		definitions = append(definitions, driftAlarms()...)
	}
	definitions = append(definitions, alarm.Definition{
		Name: alarmAway, Priority: alarm.High, OnDelay: 10 * time.Second, OffDelay: 5 * time.Second,
		Cause: "the gas has left the setpoint that the controller keeps", Consequence: "HOLD, if it goes further than limits.follow",
		Action: "Look for a leak, an empty or failing supply, a valve that sticks. HOLD shuts inlet, pump and vent.",
	})
	for i := range b.Instrument {
		in := &b.Instrument[i]
		definitions = append(definitions, alarm.Definition{
			Name: lineAlarm(in.Name), Priority: alarm.Medium, OnDelay: 2 * time.Second, OffDelay: time.Second,
			Cause: "the line is closed or silent", Consequence: "its readings are failures",
			Action: "Check cable and power; the line opens again by itself.", ShelveAtMost: 8 * time.Hour,
		})
		for j := range in.Channel {
			ch := &in.Channel[j]
			if ch.Role == reading.NoRole || len(definitions)+len(b.Instrument) >= alarm.Capacity {
				continue
			}
			w := watched{role: ch.Role, name: ch.Name + ": no valid reading", link: i}
			priority := alarm.Medium
			if ch.Role == reading.CellAPressure || ch.Role == reading.CellBPressure || ch.Role == reading.Setpoint {
				priority = alarm.High
			}
			definitions = append(definitions, alarm.Definition{
				Name: w.name, Priority: priority, OnDelay: time.Second, OffDelay: time.Second,
				Cause: "the instrument is silent or says failure", Consequence: "a ramp that leans on it is held",
				Action: "Check the instrument; its reading says why.", ShelveAtMost: 8 * time.Hour,
			})
			channels = append(channels, w)
		}
	}
	return definitions, channels
}

// driftAlarms are those of a light that moves. What explains it stands in the
// place of their cause.
func driftAlarms() []alarm.Definition {
	return []alarm.Definition{
		{
			Name: alarmLight, Priority: alarm.Medium, Cause: "the light is not where it was quiet",
			Consequence: "nothing is changed by itself", Action: "Look at the drift page: causes, and the step that would tell them apart.", ShelveAtMost: 24 * time.Hour,
		},
		{
			Name: alarmGauges, Priority: alarm.Medium, Cause: "two cell gauges moved against each other",
			Consequence: "the prediction rests on their mean", Action: "Look at the drift page.", ShelveAtMost: 24 * time.Hour,
		},
		{
			Name: alarmLeak, Priority: alarm.Medium, Cause: "gas leaves the cells",
			Consequence: "nothing is changed by itself", Action: "Look for the leak. Noble gas displaces the air that you breathe: air the room.", ShelveAtMost: 8 * time.Hour,
		},
	}
}

// watchLight evaluates the alarms of drift. Where nothing can be said they
// stay as they are.
func (c *Core) watchLight(s *State, evaluate func(name string, condition alarm.Condition)) {
	if c.driftOf.Matters[drift.Wavelength] == 0 {
		return
	}
	by, _, standing := s.drift.monitor.Standing()
	for _, a := range [...]struct {
		name string
		is   bool
	}{
		{alarmLight, by != drift.Disagreement && by != drift.Decay}, {alarmGauges, by == drift.Disagreement}, {alarmLeak, by == drift.Decay},
	} {
		evaluate(a.name, alarm.When(standing && a.is))
	}
}

// watch evaluates every alarm at the present instant.
func (c *Core) watch(s *State, fx []Effect) []Effect {
	at := s.Now
	note := func(t alarm.Transition, ok bool) {
		if ok {
			fx = c.annunciate(s, t, fx)
		}
	}
	evaluate := func(name string, condition alarm.Condition) {
		note(s.alarms.Evaluate(name, condition, at))
	}
	if p, ok := c.pressure(s); ok {
		note(s.alarms.High(alarmRating, float64(p), float64(c.limits.Lowest().Max), at))
	}
	evaluate(alarmHeld, alarm.When(s.Mode == Held && s.heldByItself))
	evaluate(alarmRecord, alarm.When(!s.Record.Writing))
	evaluate(alarmCommand, alarm.When(s.refused || s.awaiting != 0 && at.Mono-s.awaitFrom > c.confirm))

	a, b := s.Reading(reading.CellAPressure, c.stale), s.Reading(reading.CellBPressure, c.stale)
	disagree := alarm.Unknown
	if a.Status.Usable() && b.Status.Usable() && c.disagreement > 0 {
		// While gas flows the cells differ by right.
		disagree = alarm.When(s.Mode != Ramping && math.Abs(a.Value-b.Value) > float64(c.disagreement))
	}
	evaluate(alarmDisagree, disagree)
	away := alarm.Absent
	if s.Mode == Steady && !s.following {
		away = alarm.Unknown
		if p, ok := c.pressure(s); ok {
			away = alarm.When(math.Abs(float64(p-s.Setpoint)) > max(awayFrom, awayShare*float64(s.Setpoint)))
		}
	}
	evaluate(alarmAway, away)

	c.watchLight(s, evaluate)
	for i := range s.Links[:s.LinkCount] {
		evaluate(c.lineAlarms[i], alarm.When(!s.Links[i].Up))
	}
	for _, w := range c.watched {
		if at.Mono < startup && s.Latest[w.role].Channel == "" {
			continue // not heard of yet
		}
		// A lost line explains its channels: one alarm, not five.
		note(s.alarms.Suppress(w.name, !s.Links[w.link].Up, at))
		r := s.Reading(w.role, c.stale)
		evaluate(w.name, alarm.When(r.Status == reading.Failure))
	}
	for {
		t, ok := s.alarms.Tick(at)
		if !ok {
			return fx
		}
		note(t, ok)
	}
}

// The gas has left a setpoint that is kept when it is further away than two
// gauges may differ, at low pressure by this (common practice, no source).
const (
	awayFrom  = 0.1e5 // Pa
	awayShare = 0.02
)

// startup is how long an instrument may take to speak for the first time.
const startup = 5 * time.Second

// annunciate records a change of an alarm and calls for a person where it is
// new.
func (c *Core) annunciate(s *State, t alarm.Transition, fx []Effect) []Effect {
	d, _, _ := s.alarms.Get(t.Name)
	data := AlarmData{Name: t.Name, State: t.To.String(), Was: t.From.String(), Priority: int(t.Priority), Cause: d.Cause}
	if t.Active {
		data.Cause = s.causeOf(t.Name, d.Cause)
	}
	fx = append(fx, Record{At: t.At, Kind: KindAlarm, Data: data, Sync: true})
	if t.Rings() {
		fx = append(fx, Bell{}, Call{Alarm: t.Name, Cause: data.Cause, Action: d.Action})
	}
	return fx
}

// causeOf is what is known of the cause of an alarm, beyond its definition.
func (s *State) causeOf(name, otherwise string) string {
	switch name {
	case alarmHeld:
		return s.Why
	case alarmLight, alarmGauges, alarmLeak:
		if s.drift.text != "" {
			return s.drift.text
		}
	}
	return otherwise
}

// person carries out what somebody asked of an alarm.
func (c *Core) person(s *State, in Intent, fx []Effect) ([]Effect, error) {
	var t alarm.Transition
	var err error
	switch in := in.(type) {
	case Acknowledge:
		t, err = s.alarms.Acknowledge(in.Alarm, s.Now)
	case Reset:
		t, err = s.alarms.Reset(in.Alarm, s.Now)
	case Shelve:
		t, err = s.alarms.Shelve(in.Alarm, in.For, s.Now)
	case Unshelve:
		t, err = s.alarms.Unshelve(in.Alarm, s.Now)
	default:
		panic(fmt.Sprintf("live: unknown intent %T", in))
	}
	if err != nil {
		return fx, err
	}
	return c.annunciate(s, t, fx), nil
}

// Alarms returns the alarms that are not normal, most urgent first.
func (c *Core) Alarms(s *State) []Alarm {
	var out []Alarm
	for _, i := range s.alarms.Standing(nil) {
		d, e := s.alarms.At(i)
		a := Alarm{
			Name: d.Name, Priority: int(d.Priority), State: e.State.String(), Active: e.Active, Since: e.Raised,
			Acked:  e.State != alarm.Unacknowledged && e.State != alarm.ReturnedUnacknowledged && e.State != alarm.LatchedUnacknowledged,
			Hidden: e.State.Hidden(),
			Cause:  d.Cause, Consequence: d.Consequence, Action: d.Action,
		}
		a.Cause = s.causeOf(d.Name, d.Cause)
		out = append(out, a)
	}
	return out
}
