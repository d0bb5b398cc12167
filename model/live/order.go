package live

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"time"

	"barline/model/bench"
	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// MoveValve opens or shuts a valve by hand, where no program is under way.
// Shutting is always taken. An open valve stays open only as long as the bench
// is armed and its gauges can be believed; HOLD shuts it.
type MoveValve struct {
	Valve limit.Valve
	Open  bool
}

// Towards returns the program that says where the gas may go through the open
// valve, for its cautions: up to most, the lowest rating, or down to the room.
func (in MoveValve) Towards(most unit.Pascal) *Program {
	p := &Program{}
	switch {
	case in.Open && in.Valve == limit.Inlet:
		p.Phases = []Phase{{Target: most}}
	case in.Open && in.Valve == limit.Vent:
		p.Phases = []Phase{{Target: 0}}
	}
	return p
}

// Attenuate asks for a pulse energy in the fibre.
type Attenuate struct{ Energy unit.Joule }

// ZeroGauge says what the pressure is that the gauge of a role sees, such as
// that of the room with the cells open. It is corrected until the program
// ends.
type ZeroGauge struct {
	Role reading.Role
	Is   unit.Pascal
}

func (MoveValve) intent() {}
func (Attenuate) intent() {}
func (ZeroGauge) intent() {}

// SendOrder asks for an order on the wire, after its record. The answer comes
// back as Answered with the same number.
type SendOrder struct {
	Command uint64
	Order   limit.Order
}

func (SendOrder) effect() {}

// maxShifts bounds the gauges whose zero was corrected.
const maxShifts = 8

// aside is an order that is on its way beside the setpoints.
type aside struct {
	command uint64        // 0 where none is
	from    time.Duration // bench Mono
	order   limit.Order
	what    string
	taken   bool // by the instrument, at time at; it may still move
	at      time.Duration
}

// zeroed is a gauge and what is added to its readings.
type zeroed struct {
	channel string
	shift   unit.Pascal
}

// byHand is a valve that stands open because somebody opened it.
type byHand struct {
	open bool
	from unit.Pascal // when it was opened
	at   time.Duration
}

// valves by hand, in the order in which they are shut.
var handValves = [...]limit.Valve{limit.Inlet, limit.Pump, limit.Vent}

var valveRoles = map[limit.Valve]reading.Role{
	limit.Inlet: reading.InletValve, limit.Pump: reading.PumpValve, limit.Vent: reading.VentValve,
}

// Attenuates reports whether an instrument of the bench sets the pulse energy.
func (c *Core) Attenuates() bool { return c.limits.MostEnergy > 0 && c.attenuates }

// Moves reports whether an instrument of the bench drives a valve.
func (c *Core) Moves(v limit.Valve) bool { return c.moves[v] }

// actuator notes what a channel can move.
func (c *Core) actuator(ch *bench.Channel) {
	for v, role := range valveRoles {
		c.shows[v] = c.shows[v] || ch.Role == role
		c.moves[v] = c.moves[v] || ch.Role == role && ch.Write != ""
	}
	c.attenuates = c.attenuates || ch.Role == reading.Attenuator && ch.Write != ""
	if c.fullEnergy == 0 {
		c.fullEnergy = c.energy
	}
}

// order carries out MoveValve, Attenuate and ZeroGauge or says why not. It
// fills in what the record of the intent says.
func (c *Core) order(s *State, in Intent, data *IntentData) (limit.Order, error) {
	if s.aside.command != 0 {
		return nil, fmt.Errorf("%s is not confirmed yet", s.aside.what)
	}
	switch in := in.(type) {
	case MoveValve:
		data.Intent = "shut " + in.Valve.String()
		if in.Open {
			data.Intent = "open " + in.Valve.String()
		}
		return c.moveValve(s, in)
	case Attenuate:
		data.Intent = "attenuate"
		if e := float64(in.Energy); !math.IsNaN(e) && !math.IsInf(e, 0) {
			data.EnergyJ = e
		}
		return c.attenuate(s, in.Energy)
	case ZeroGauge:
		data.Intent = "zero " + in.Role.String()
		if p := float64(in.Is); !math.IsNaN(p) && !math.IsInf(p, 0) {
			data.TargetPa = &p
		}
		return c.zeroGauge(s, in)
	}
	return nil, fmt.Errorf("%T is no order", in)
}

func (c *Core) moveValve(s *State, in MoveValve) (limit.Order, error) {
	if !c.Moves(in.Valve) {
		return nil, fmt.Errorf("no instrument of this bench drives the %v valve", in.Valve)
	}
	if !in.Open {
		return c.limits.Close(in.Valve), nil
	}
	if s.commanding() {
		return nil, fmt.Errorf("%s is under way; stop it first", s.Why)
	}
	if err := c.deliberate(s); err != nil {
		return nil, err
	}
	if why := c.unsafe(s); why != "" {
		return nil, errors.New(why)
	}
	if err := c.cautious(s, in.Towards(c.limits.Lowest().Max)); err != nil {
		return nil, err
	}
	p, _ := c.pressure(s)
	return c.limits.Open(in.Valve, c.panel(s), p)
}

func (c *Core) attenuate(s *State, energy unit.Joule) (limit.Order, error) {
	if !c.attenuates {
		return nil, errors.New("no instrument of this bench sets the pulse energy")
	}
	if err := c.deliberate(s); err != nil {
		return nil, err
	}
	return c.limits.Energy(energy, c.fullEnergy)
}

func (c *Core) zeroGauge(s *State, in ZeroGauge) (limit.Order, error) {
	if !in.Role.IsPressure() || in.Role == reading.Setpoint || in.Role == reading.Ambient {
		return nil, fmt.Errorf("%v is no gauge of this bench", in.Role)
	}
	if s.commanding() {
		return nil, fmt.Errorf("%s is under way; stop it first", s.Why)
	}
	if err := c.deliberate(s); err != nil {
		return nil, err
	}
	r := s.Reading(in.Role, c.stale)
	if !r.Status.Usable() {
		return nil, fmt.Errorf("%s: %s", in.Role, r.Reason)
	}
	if !s.room(r.Channel) {
		return nil, fmt.Errorf("the zeros of %d gauges are corrected already", maxShifts)
	}
	return c.limits.Zero(r.Channel, unit.Pascal(r.Value), in.Is, s.Shift(r.Channel))
}

// deliberate reports why nothing may be changed now, or nil.
func (c *Core) deliberate(s *State) error {
	if s.ArmedUntil == 0 {
		return errors.New("the bench is not armed")
	}
	if !s.Record.Writing {
		return fmt.Errorf("nothing is being recorded: %s", s.Record.Reason)
	}
	return nil
}

// panel returns which valves stand open. One whose position is not known
// counts as open, so that nothing is opened beside it; one without a channel
// is not of this bench.
func (c *Core) panel(s *State) (p limit.Panel) {
	for v, role := range valveRoles {
		if c.shows[v] {
			r := s.Reading(role, c.stale)
			p.Open[v] = !r.Status.Usable() || !(r.Value <= 0.02)
		}
		p.Open[v] = p.Open[v] || s.hand[v].open
	}
	return p
}

// Shift returns what is added to the readings of a channel.
func (s *State) Shift(channel string) unit.Pascal {
	for _, z := range s.shifts {
		if z.channel == channel {
			return z.shift
		}
	}
	return 0
}

// room reports whether a gauge's zero can be kept.
func (s *State) room(channel string) bool {
	for _, z := range s.shifts {
		if z.channel == channel || z.channel == "" {
			return true
		}
	}
	return false
}

// sendOrder puts an order on its way: the record first, on the disk.
func (c *Core) sendOrder(s *State, o limit.Order, fx []Effect) []Effect {
	s.command++
	d := CommandData{Command: s.command, SetpointPa: float64(s.Setpoint)}
	what := ""
	switch o := o.(type) {
	case limit.ValveOrder:
		v, open, _ := o.Order()
		d.Valve, d.Open = v.String(), &open
		what = "shutting the " + d.Valve + " valve"
		if open {
			what = "opening the " + d.Valve + " valve"
			p, _ := c.pressure(s)
			s.hand[v] = byHand{open: true, from: p, at: s.Now.Mono}
		}
	case limit.EnergyOrder:
		e, share, _ := o.Order()
		d.EnergyJ, d.Share = float64(e), float64(share)
		what = fmt.Sprintf("pulse energy %.4g uJ", e.Microjoules())
	case limit.ZeroShift:
		channel, shift, _ := o.Shift()
		f := float64(shift)
		d.ZeroOf, d.ShiftPa = channel, &f
		what = fmt.Sprintf("%+.4g mbar on the zero of %s until the program ends", f/float64(unit.Millibar), channel)
	}
	s.aside = aside{command: s.command, from: s.Now.Mono, order: o, what: what}
	s.Notice = what
	return append(fx, Record{At: s.Now, Kind: KindCommand, Data: d, Sync: true}, SendOrder{Command: s.command, Order: o})
}

// orderAnswered folds the answer to the order on its way.
func (c *Core) orderAnswered(s *State, e Answered, fx []Effect) []Effect {
	a := s.aside
	if _, isZero := a.order.(limit.ZeroShift); e.Err == "" && !isZero {
		s.aside.taken, s.aside.at = true, e.At.Mono // what it reads back says when it is there
		return fx
	}
	return c.orderDone(s, a, e.Err, fx)
}

// orderDone ends an order, failed or carried out.
func (c *Core) orderDone(s *State, a aside, failed string, fx []Effect) []Effect {
	s.aside = aside{}
	if failed != "" {
		s.Notice = a.what + ": " + failed
		if _, is := a.order.(limit.EnergyOrder); is {
			return c.turned(s, failed, fx)
		}
		if v, _, ok := valveOf(a.order); ok && s.Mode != Held {
			return c.hold(s, fmt.Sprintf("the %v valve did not move as it was told: %s", v, failed), fx)
		}
		return fx
	}
	s.Notice = a.what + ": done"
	switch o := a.order.(type) {
	case limit.ValveOrder:
		if v, open, _ := o.Order(); !open {
			s.hand[v] = byHand{}
		}
	case limit.EnergyOrder:
		s.energy, _, _ = o.Order()
		return c.turned(s, "", fx)
	case limit.ZeroShift:
		channel, shift, _ := o.Shift()
		for i := range s.shifts {
			if z := &s.shifts[i]; z.channel == channel || z.channel == "" {
				*z = zeroed{channel, shift}
				break
			}
		}
	}
	return fx
}

// arrivedWithin is how far from its order an actuator may stand, as a share.
const arrivedWithin = 0.02

// arrived reports whether the actuator of an order reads back that it is there,
// by a reading that is younger than the order.
func (c *Core) arrived(s *State, a aside) bool {
	role, want := reading.Attenuator, 0.0
	switch o := a.order.(type) {
	case limit.ValveOrder:
		v, open, _ := o.Order()
		role = valveRoles[v]
		if open {
			want = 1
		}
	case limit.EnergyOrder:
		_, share, _ := o.Order()
		want = float64(share)
	}
	r := s.Reading(role, c.stale)
	within := arrivedWithin
	if role == reading.Attenuator {
		within *= want // of the energy asked for
	}
	return r.Status.Usable() && r.Taken.Mono >= a.at && math.Abs(r.Value-want) <= within
}

func valveOf(o limit.Order) (v limit.Valve, open, ok bool) {
	if o, is := o.(limit.ValveOrder); is {
		return o.Order()
	}
	return 0, false, false
}

// watchOrders looks after an order on its way and after valves that somebody
// opened: whatever goes wrong with either ends in HOLD.
func (c *Core) watchOrders(s *State, fx []Effect) []Effect {
	now := s.Now.Mono
	fx = c.turnAttenuator(s, fx)
	if a := s.aside; a.command != 0 {
		switch {
		case a.taken && c.arrived(s, a):
			fx = c.orderDone(s, a, "", fx)
		case now-a.from > c.confirm && a.taken:
			fx = c.orderDone(s, a, fmt.Sprintf("not there within %v", c.confirm), fx)
		case now-a.from > c.confirm:
			fx = c.orderDone(s, a, fmt.Sprintf("not confirmed within %v", c.confirm), fx)
		}
	}
	var open []string
	for _, v := range handValves {
		h := s.hand[v]
		if !h.open {
			continue
		}
		open = append(open, v.String())
		if why := c.unsafeByHand(s, v, h); why != "" {
			return c.hold(s, fmt.Sprintf("the %v valve stands open: %s", v, why), fx)
		}
	}
	if len(open) > 0 && s.Mode == Armed {
		s.Why = "open by hand: " + strings.Join(open, ", ")
	}
	return fx
}

// unsafeByHand says why a valve may no longer stand open, or "".
func (c *Core) unsafeByHand(s *State, v limit.Valve, h byHand) string {
	if s.ArmedUntil == 0 {
		return "the bench is no longer armed"
	}
	if why := c.unsafe(s); why != "" {
		return why
	}
	p, _ := c.pressure(s)
	if v == limit.Pump && !(p < c.limits.PumpBelow) {
		return fmt.Sprintf("%v is too much for the pump, it takes less than %v", p, c.limits.PumpBelow)
	}
	// The gas may move as fast as a ramp may, and no further ahead of that
	// than a ramp may be left behind.
	since := (s.Now.Mono - h.at).Seconds()
	ahead := c.follow
	if ahead <= 0 {
		ahead = c.disagreement
	}
	if up := h.from + unit.Pascal(float64(c.limits.RiseRate)*since) + ahead; p > up {
		return fmt.Sprintf("pressure %v rises faster than %.3g bar/s", p, float64(c.limits.RiseRate)/1e5)
	}
	if down := h.from - unit.Pascal(float64(c.limits.FallRate)*since) - ahead; p < down {
		return fmt.Sprintf("pressure %v falls faster than %.3g bar/s", p, float64(c.limits.FallRate)/1e5)
	}
	return ""
}
