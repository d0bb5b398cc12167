package live

import (
	"fmt"
	"math"
	"strings"

	"barline/model/reading"
)

// asked carries out an intent or refuses it; either is recorded.
func (c *Core) asked(s *State, at reading.Stamp, in Intent, fx []Effect) []Effect {
	s.Notice = ""
	if _, ok := in.(Hold); ok {
		fx = c.hold(s, heldByPerson, fx)
		return append(fx, Record{At: s.Now, Kind: KindIntent, Data: IntentData{Intent: "hold"}})
	}
	data, err := IntentData{Intent: verb(in)}, error(nil)
	if moves(in) && s.heldAt != 0 && at.Mono <= s.heldAt {
		// Who asked did not know of the HOLD that came in between.
		err = fmt.Errorf("HOLD came before this was taken: %s", s.Why)
	} else {
		data, err = c.carryOut(s, in, &fx)
	}
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
		data.Intent, data.Caution = "arm", Arming.String()
		if !c.controlled {
			return data, fmt.Errorf("no instrument of this bench takes setpoints")
		}
		if !s.Record.Writing {
			return data, fmt.Errorf("nothing is being recorded: %s", s.Record.Reason)
		}
		record()
		s.ArmedUntil = s.Now.Mono + c.arming
		s.understood[Arming] = true
		if s.Mode == Watching || s.Mode == Held {
			s.Mode, s.Why = Armed, ""
		}
	case Disarm:
		data.Intent = "disarm"
		record()
		c.disarm(s)
		if s.Mode == Armed {
			s.Mode, s.Why = Watching, ""
		}
	case Understood:
		data.Intent, data.Caution = "understood", in.Caution.String()
		if in.Caution >= cautionCount {
			return data, fmt.Errorf("%v is not known", in.Caution)
		}
		if s.ArmedUntil == 0 {
			return data, fmt.Errorf("the bench is not armed")
		}
		record()
		s.understood[in.Caution] = true
	case GoTo:
		data.Intent = "go to"
		if p := float64(in.Target); !math.IsNaN(p) && !math.IsInf(p, 0) { // what is refused below is no number of a record
			data.TargetPa = &p
		}
		if err := c.movable(s); err != nil {
			return data, err
		}
		if err := c.limits.Admissible(in.Target); err != nil {
			return data, err
		}
		p := in.program()
		if err := c.cautious(s, p); err != nil {
			return data, err
		}
		record()
		s.ArmedUntil = s.Now.Mono + c.arming
		*fx = c.start(s, p, *fx)
	case Run:
		data.Intent = "run"
		if err := in.Program.Check(c.limits); err != nil {
			return data, err
		}
		data.Program, data.Phases = in.Program.Name, len(in.Program.Phases)
		if err := c.movable(s); err != nil {
			return data, err
		}
		if err := c.cautious(s, in.Program); err != nil {
			return data, err
		}
		data.Plan = in.Program.plan()
		record()
		s.ArmedUntil = s.Now.Mono + c.arming
		*fx = c.start(s, in.Program, *fx)
	case Tune:
		data.Intent = "tune"
		if in.Hold {
			data.Intent = "tune and hold"
		}
		if nm := float64(in.Emission); !math.IsNaN(nm) && !math.IsInf(nm, 0) {
			data.EmissionM = &nm
		}
		if err := c.movable(s); err != nil {
			return data, err
		}
		// Where tuning leads is found step by step: any pressure may come.
		if err := c.cautious(s, GoTo{Target: c.limits.Lowest().Max}.program()); err != nil {
			return data, err
		}
		record()
		s.ArmedUntil = s.Now.Mono + c.arming
		var err error
		*fx, err = c.tune(s, in, *fx)
		return data, err
	case Confirm:
		data.Intent = "confirm"
		if s.run.asks {
			data.Program, data.EnergyJ = s.run.program.Name, float64(s.run.phase().Energy)
		}
		if err := c.confirmed(s); err != nil {
			return data, err
		}
		record()
	case Pause, Resume, Skip, Stop:
		data.Intent = verb(in)
		if !s.run.active() && s.tuning.base == 0 {
			return data, fmt.Errorf("no program is under way")
		}
		if _, on := in.(Resume); on && s.run.paused {
			// Who pauses may come back after hours: what moves gas then is
			// armed anew.
			if err := c.movable(s); err != nil {
				return data, err
			}
		}
		record()
		var err error
		*fx, err = c.change(s, in, *fx)
		return data, err
	case MoveValve, Attenuate, ZeroGauge:
		o, err := c.order(s, in, &data)
		if err != nil {
			return data, err
		}
		record()
		if s.ArmedUntil != 0 {
			s.ArmedUntil = s.Now.Mono + c.arming
		}
		*fx = c.sendOrder(s, o, *fx)
	case Note:
		data.Intent = "note"
		*fx = append(*fx, Record{At: s.Now, Kind: KindNote, Data: NoteData(in), Sync: true})
	case Calibrate:
		data.Intent = "calibrate"
		record()
		var err error
		*fx, err = c.calibrate(s, *fx)
		return data, err
	case Adopt:
		data.Intent, data.Calibration = "adopt", in.Name
		record()
		var err error
		*fx, err = c.adopt(s, in.Name, *fx)
		return data, err
	case Revert:
		data.Intent = "revert"
		record()
		var err error
		*fx, err = c.revert(s, *fx)
		return data, err
	case LearnAnew:
		data.Intent = "learn anew"
		record()
		c.learnAnew(s)
	case Acknowledge, Reset, Shelve, Unshelve:
		data.Intent, data.Alarm = aboutAlarm(in)
		record()
		var err error
		*fx, err = c.person(s, in, *fx)
		return data, err
	default:
		panic(fmt.Sprintf("live: unknown intent %T", in))
	}
	return data, nil
}

// program returns the program of one step that goes there.
func (in GoTo) program() *Program {
	return &Program{
		Name:   "go to " + in.Target.String(),
		Phases: []Phase{{Label: "going to " + in.Target.String(), Target: in.Target}},
	}
}

// movable reports why gas may not be moved by a new command, or nil.
func (c *Core) movable(s *State) error {
	if s.ArmedUntil == 0 {
		return fmt.Errorf("the bench is not armed")
	}
	for _, v := range handValves {
		if s.hand[v].open {
			return fmt.Errorf("the %v valve stands open by hand; shut it first", v)
		}
	}
	if why := c.unsafe(s); why != "" {
		return fmt.Errorf("%s", why)
	}
	return nil
}

func aboutAlarm(in Intent) (verb, name string) {
	switch in := in.(type) {
	case Acknowledge:
		return "acknowledge", in.Alarm
	case Reset:
		return "reset", in.Alarm
	case Shelve:
		return "shelve for " + in.For.String(), in.Alarm
	case Unshelve:
		return "unshelve", in.Alarm
	}
	return "", ""
}

// moves reports whether an intent moves gas or makes that possible.
func moves(in Intent) bool {
	switch in := in.(type) {
	case Arm, GoTo, Run, Resume, Skip, Tune, Confirm, Attenuate, ZeroGauge:
		return true
	case MoveValve:
		return in.Open
	}
	return false
}

// verb is what an intent is called where nothing more is known of it.
func verb(in Intent) string {
	return strings.ToLower(strings.TrimPrefix(fmt.Sprintf("%T", in), "live."))
}
