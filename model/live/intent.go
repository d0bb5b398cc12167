package live

import (
	"fmt"
)

// asked carries out an intent or refuses it; either is recorded.
func (c *Core) asked(s *State, in Intent, fx []Effect) []Effect {
	s.Notice = ""
	if _, ok := in.(Hold); ok {
		fx = c.hold(s, "asked for", fx)
		return append(fx, Record{At: s.Now, Kind: KindIntent, Data: IntentData{Intent: "hold"}})
	}
	data, err := c.carryOut(s, in, &fx)
	if err != nil {
		data.Refused = err.Error()
		s.Notice = "refused: " + err.Error()
		return append(fx, Record{At: s.Now, Kind: KindIntent, Data: data})
	}
	return fx
}

// carryOut does what in asks, or says why not. It appends the intent's record
// before the effects that it causes.
func (c *Core) carryOut(s *State, in Intent, fx *[]Effect) (IntentData, error) {
	var data IntentData
	record := func() { *fx = append(*fx, Record{At: s.Now, Kind: KindIntent, Data: data, Sync: true}) }
	switch in := in.(type) {
	case Arm:
		data.Intent = "arm"
		if !c.controlled {
			return data, fmt.Errorf("no instrument of this bench takes setpoints")
		}
		if !s.Record.Writing {
			return data, fmt.Errorf("nothing is being recorded: %s", s.Record.Reason)
		}
		record()
		s.ArmedUntil = s.Now.Mono + c.arming
		if s.Mode == Watching || s.Mode == Held {
			s.Mode, s.Why = Armed, ""
		}
	case Disarm:
		data.Intent = "disarm"
		record()
		s.ArmedUntil = 0
		if s.Mode == Armed {
			s.Mode, s.Why = Watching, ""
		}
	case GoTo:
		data.Intent, data.TargetPa = "go to", []float64{float64(in.Target)}
		if err := c.movable(s); err != nil {
			return data, err
		}
		if err := c.limits.Admissible(in.Target); err != nil {
			return data, err
		}
		record()
		s.Steps = Steps{}
		s.ArmedUntil = s.Now.Mono + c.arming
		*fx = c.begin(s, in.Target, *fx)
	case Run:
		data.Intent, data.DwellS = "run steps", in.Dwell.Seconds()
		for _, p := range in.Targets {
			data.TargetPa = append(data.TargetPa, float64(p))
		}
		if err := c.movable(s); err != nil {
			return data, err
		}
		if err := in.check(c.limits); err != nil {
			return data, err
		}
		record()
		s.Steps = Steps{Count: len(in.Targets), Dwell: in.Dwell}
		copy(s.Steps.Targets[:], in.Targets)
		s.ArmedUntil = s.Now.Mono + c.arming
		*fx = c.begin(s, in.Targets[0], *fx)
	case Note:
		data.Intent = "note"
		*fx = append(*fx, Record{At: s.Now, Kind: KindNote, Data: NoteData{Text: in.Text}, Sync: true})
	case Acknowledge:
		data.Intent, data.Alarm = "acknowledge", in.Alarm
		record()
	default:
		panic(fmt.Sprintf("live: unknown intent %T", in))
	}
	return data, nil
}

// movable reports why gas may not be moved by a new command, or nil.
func (c *Core) movable(s *State) error {
	if s.ArmedUntil == 0 {
		return fmt.Errorf("the bench is not armed")
	}
	if why := c.unsafe(s); why != "" {
		return fmt.Errorf("%s", why)
	}
	return nil
}
