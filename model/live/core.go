package live

import (
	"errors"
	"fmt"
	"math"
	"time"

	"barline/model/alarm"
	"barline/model/bench"
	"barline/model/drift"
	"barline/model/emission"
	"barline/model/flow"
	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// Predictor is the part of emission.Predictor that the core leans on.
// The answer must depend on its arguments alone.
type Predictor interface {
	Predict(in emission.Input, prev *emission.Prediction) emission.Prediction
}

// Core is what stays the same while an experiment runs.
type Core struct {
	limits    limit.Limits
	predictor Predictor
	core      *flow.Core // scratch: every step restores it from the state
	cladding  *flow.Core // likewise: one hole of the cladding; nil where none is configured
	mixing    flow.Mixing
	spec      flow.Spec     // of the core
	handling  flow.Handling // of the panel, for how long a move takes
	energy    unit.Joule    // used while no meter says otherwise

	stale        time.Duration
	confirm      time.Duration // how long an instrument may take to confirm a command
	arming       time.Duration
	follow       unit.Pascal
	disagreement unit.Pascal
	heartbeat    time.Duration
	wavelength   unit.Metre // deadband of recorded predictions
	controlled   bool       // an instrument takes setpoints
	driftOf      drift.Watch
	cautionAbove unit.Pascal
	ambient      unit.Pascal // of the bench file; 0 where it says nothing
	watched      []watched
	lineAlarms   []string // names, in the order of the links

	attenuates bool // an instrument sets the pulse energy
	fullEnergy unit.Joule
	moves      [limit.ValveCount]bool // an instrument drives the valve
	shows      [limit.ValveCount]bool // and it is read back
}

const (
	// rampEvery is the longest reach of one setpoint: a lost link leaves the
	// bench at most this far along the ramp.
	rampEvery = time.Second
	// predictEvery bounds how often the model is asked.
	predictEvery = 50 * time.Millisecond
	// settledWithin and settledFor say when the gas has reached a target.
	settledWithin = 20 * unit.Millibar
	settledFor    = 3 * time.Second
	// stillWithin is how much a settled pressure may wander in that time.
	stillWithin = 10 * unit.Millibar
	// gaugesWithin is the share by which a cell's gauge and the controller's
	// sensor may differ.
	gaugesWithin = 0.01
	// assumedTemperature stands in until a thermometer has spoken; the
	// prediction then says so by its input.
	assumedTemperature = unit.Kelvin(295.15)
)

// New returns the core of bench b and the state in which an experiment
// starts: watching, nothing armed, nothing known.
func New(b *bench.Bench, p Predictor) (*Core, State, error) {
	if p == nil {
		return nil, State{}, errors.New("live: no predictor")
	}
	c := &Core{
		limits:       b.Limits.Enforced(),
		predictor:    p,
		energy:       b.Pulse.Energy,
		fullEnergy:   b.Pulse.FullEnergy,
		stale:        b.Limits.Stale.Duration(),
		confirm:      b.Limits.Confirm.Duration(),
		arming:       b.Limits.Arming.Duration(),
		follow:       b.Limits.Follow,
		disagreement: b.Limits.Disagreement,
		cautionAbove: b.Limits.CautionAbove,
		ambient:      b.Panel.Ambient,
		heartbeat:    b.Logbook.Heartbeat.Duration(),
		wavelength:   b.Logbook.DeadbandWavelength,
		driftOf:      WatchOf(b),
	}
	if err := c.limits.Check(); err != nil {
		return nil, State{}, err
	}
	if c.stale <= 0 || c.arming <= 0 || c.confirm <= 0 {
		return nil, State{}, fmt.Errorf("limits.stale is %v, limits.confirm %v and limits.arming %v, expected all above zero", c.stale, c.confirm, c.arming)
	}
	spec, holes, err := flow.BenchFibre(b, assumedTemperature)
	if err != nil {
		return nil, State{}, err
	}
	spec.Cells = coreCells
	c.spec = spec
	if c.core, err = flow.NewCore(spec); err != nil {
		return nil, State{}, err
	}
	for _, set := range holes { // a bench file describes one set at most
		hole := spec
		hole.Radius = set.Radius
		if c.cladding, err = flow.NewCore(hole); err != nil {
			return nil, State{}, fmt.Errorf("cladding: %w", err)
		}
	}
	c.mixing = flow.Mixing{Core: spec, Cylinder: b.Gas.SupplyAir, Lowest: b.Panel.PumpUltimate}
	if c.handling, err = flow.BenchHandling(b, assumedTemperature); err != nil {
		return nil, State{}, err
	}
	var s State
	if s.residue, err = flow.NewResidue(b.Gas.Air); err != nil {
		return nil, State{}, err
	}
	for _, in := range b.Instrument {
		if s.LinkCount == MaxLinks {
			return nil, State{}, fmt.Errorf("%d instruments, expected at most %d", len(b.Instrument), MaxLinks)
		}
		s.Links[s.LinkCount] = LinkHealth{Instrument: in.Name, Reason: "not opened yet"}
		s.LinkCount++
		c.lineAlarms = append(c.lineAlarms, lineAlarm(in.Name))
		for _, ch := range in.Channel {
			if ch.Role == reading.Setpoint && ch.Write != "" {
				c.controlled = true
			}
			c.actuator(&ch)
			s.staleBy[ch.Role] = max(s.staleBy[ch.Role], ch.Stale.Duration())
		}
	}
	definitions, channels := alarmsOf(b)
	c.watched = channels
	if s.alarms, err = alarm.New(definitions, reading.Stamp{}); err != nil {
		return nil, State{}, err
	}
	return c, s, nil
}

// Limits returns the limits that commands are checked against.
func (c *Core) Limits() limit.Limits { return c.limits }

// Stale returns the age beyond which a reading is a failure.
func (c *Core) Stale() time.Duration { return c.stale }

// Step folds e into s and appends to fx the work that follows, which is to be
// carried out in order. It depends on its arguments alone.
func (c *Core) Step(s *State, e Event, fx []Effect) []Effect {
	// Readings are stamped when their last byte arrived, and may reach the
	// core after a later tick: time never steps back.
	if at := e.When(); at.Mono >= s.Now.Mono {
		s.Now = at
	}
	switch e := e.(type) {
	case Read:
		fx = c.read(s, e.Reading, fx)
	case Tick:
		fx = c.tick(s, fx)
	case LinkChanged:
		fx = c.link(s, e, fx)
	case Asked:
		fx = c.asked(s, e.At, e.Intent, fx)
	case Answered:
		fx = c.answered(s, e, fx)
	case RecordChanged:
		fx = c.record(s, e.Health, fx)
	case Told:
		c.told(s, e)
	case ModelChanged:
		fx = c.modelChanged(s, e, fx)
	case Fitted:
		fx = c.fitted(s, e, fx)
	case CalibrationsFound:
		fx = c.found(s, e, fx)
	default:
		panic(fmt.Sprintf("live: unknown event %T", e))
	}
	return fx
}

func (c *Core) read(s *State, r reading.Reading, fx []Effect) []Effect {
	if int(r.Role) >= reading.RoleCount || r.Role == reading.NoRole {
		return fx
	}
	if r.Taken.Mono < s.Latest[r.Role].Taken.Mono {
		return fx // answers may overtake each other; never step back
	}
	r = c.Judge(s, r)
	was := c.dark(s)
	s.Latest[r.Role] = r
	if r.Status.Usable() && (r.Role == reading.CellAPressure || r.Role == reading.CellBPressure) {
		s.lastGood[r.Role-reading.CellAPressure] = r
	}
	if was != "" && c.dark(s) == "" {
		s.litAt = r.Taken.Mono
	}
	if r.Role == reading.Emission {
		c.compare(s, r)
	}
	c.sample(s, r)
	c.average(s, r)
	return fx
}

// compare lays a measured emission over the prediction that stood when it was
// taken.
func (c *Core) compare(s *State, r reading.Reading) {
	if !r.Status.Usable() || !s.CoreKnown || !s.Prediction.Valid || s.Prediction.Emission == 0 {
		return
	}
	s.Residual = unit.Metre(r.Value) - s.Prediction.Emission
	s.ResidualAt = r.Taken.Mono
}

func (c *Core) tick(s *State, fx []Effect) []Effect {
	if s.ArmedUntil != 0 && s.Now.Mono >= s.ArmedUntil {
		c.disarm(s)
		if s.Mode == Armed {
			s.Mode, s.Why = Watching, ""
		}
	}
	c.coreGas(s)
	fx = c.predict(s, fx)
	fx = c.watchDrift(s, fx)
	fx = c.act(s, fx)
	fx = c.watchOrders(s, fx)
	return c.watch(s, fx)
}

// act moves gas, or stops moving it.
func (c *Core) act(s *State, fx []Effect) []Effect {
	switch {
	case s.following:
		return fx
	case s.commanding():
		if why := c.unsafe(s); why != "" {
			return c.hold(s, why, fx)
		}
		return c.proceed(s, fx)
	case s.Mode == Steady:
		// The controller keeps the pressure by its own sensor: a lost gauge
		// is an alarm here, and no reason to stop somebody's light.
		if p, ok := c.pressure(s); ok {
			if why := c.overRating(p); why != "" {
				return c.hold(s, why, fx)
			}
			if c.follow > 0 && unit.Pascal(math.Abs(float64(p-s.Setpoint))) > c.follow {
				return c.hold(s, fmt.Sprintf("pressure %v has left the setpoint %v", p, s.Setpoint), fx)
			}
		}
		return c.keepWavelength(s, fx)
	}
	return fx
}

func (c *Core) link(s *State, e LinkChanged, fx []Effect) []Effect {
	for i := range s.Links[:s.LinkCount] {
		if l := &s.Links[i]; l.Instrument == e.Instrument {
			l.Up, l.Since, l.Reason = e.Up, e.At, e.Reason
		}
	}
	state := "up"
	if !e.Up {
		state = "down"
	}
	return append(fx, Record{At: e.At, Kind: KindReadback, Data: LinkData{Instrument: e.Instrument, Link: state, Reason: e.Reason}})
}

func (c *Core) record(s *State, h RecordHealth, fx []Effect) []Effect {
	s.Record = h
	if !h.Writing && s.commanding() {
		return c.hold(s, "nothing is being recorded: "+h.Reason, fx)
	}
	return fx
}

// Controlled reports whether an instrument of the bench takes setpoints.
func (c *Core) Controlled() bool { return c.controlled }

// Unconfirmed reports whether a command still waits for its answer.
func (s *State) Unconfirmed() bool { return s.awaiting != 0 }
