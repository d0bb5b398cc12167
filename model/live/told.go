package live

import (
	"barline/model/reading"
	"barline/model/unit"
)

// Told is what a record says that another core did: a replay, or a second
// person who follows, takes it as it was and decides nothing.
type Told struct {
	At       reading.Stamp
	Setpoint unit.Pascal // where HasSetpoint
	Mode     Mode        // where HasMode
	Why      string      // beside Mode

	HasSetpoint, HasMode bool
}

// When implements Event.
func (e Told) When() reading.Stamp { return e.At }

func (c *Core) told(s *State, e Told) {
	if e.HasSetpoint {
		s.Setpoint, s.Target = e.Setpoint, e.Setpoint
	}
	if e.HasMode {
		s.Mode, s.Why, s.following = e.Mode, e.Why, true
	}
}

// ToldBy returns what a record of a command, an intent or its completion tells
// a core that follows; ok is false where it tells nothing.
func ToldBy(at reading.Stamp, data any) (e Told, ok bool) {
	e.At = at
	switch d := data.(type) {
	case CommandData:
		e.Setpoint, e.HasSetpoint, e.HasMode = unit.Pascal(d.SetpointPa), true, true
		e.Mode, e.Why = Ramping, d.Why
		if d.Hold {
			e.Mode = Held
		}
		if d.Hold && d.Why == "isolating" {
			e.Mode = Isolated
		}
		return e, true
	case IntentData:
		if d.Refused != "" {
			return e, false
		}
		e.HasMode, e.Why = true, d.Program
		switch d.Intent {
		case "arm":
			e.Mode, e.Why = Armed, ""
		case "disarm":
			e.Mode = Watching
		case "complete":
			e.Mode, e.Why = Steady, d.Program+": complete"
		default:
			return e, false
		}
		return e, true
	}
	return e, false
}
