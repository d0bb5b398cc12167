package instrument

import (
	"fmt"
	"math"
	"time"

	"barline/device/link"
	"barline/model/limit"
	"barline/model/reading"
)

// Takes reports whether the instrument is the one that carries out an order:
// it drives the valve or the attenuator, or has the gauge.
func (in *Instrument) Takes(o limit.Order) bool {
	switch o := o.(type) {
	case limit.ValveOrder:
		v, _, _ := o.Order()
		return in.valves[v] != nil
	case limit.EnergyOrder:
		return in.energy != nil
	case limit.ZeroShift:
		name, _, _ := o.Shift()
		return in.gauge(name) != nil
	}
	return false
}

// gauge returns the channel of a gauge, or nil.
func (in *Instrument) gauge(name string) *channel {
	for i := range in.channels {
		if c := &in.channels[i]; c.spec.Name == name && c.spec.Role.IsPressure() && c.spec.Role != reading.Setpoint {
			return c
		}
	}
	return nil
}

// Move carries out an order. It refuses one that no limit made. A valve or an
// attenuator takes its time: Move reads back that it answers, and polls show
// where it stands. A zero goes to no wire: it is added to what the gauge reads
// from now on, until the program ends.
func (in *Instrument) Move(line link.Line, o limit.Order) error {
	if !in.Takes(o) {
		return fmt.Errorf("%s does not take %s", in.spec.Name, what(o))
	}
	ok := false
	c, share, text := in.energy, 0.0, what(o)
	switch o := o.(type) {
	case limit.ValveOrder:
		var v limit.Valve
		var open bool
		v, open, ok = o.Order()
		c, share = in.valves[v], opening(open)
	case limit.EnergyOrder:
		_, s, made := o.Order()
		share, ok = float64(s), made
	case limit.ZeroShift:
		name, shift, made := o.Shift()
		if ok = made; ok {
			in.gauge(name).shift = float64(shift)
			return nil
		}
	}
	if !ok {
		return fmt.Errorf("%s: %s was not checked against the limits: %w", in.spec.Name, text, limit.ErrLimit)
	}
	if err := in.protocol.write(line, c, c.spec.Number(share)); err != nil {
		return fmt.Errorf("%s: %s: %w", in.spec.Name, text, err)
	}
	if _, err := in.protocol.back(line, c); err != nil {
		return fmt.Errorf("%s: %s was sent, but is not read back: %w", in.spec.Name, text, err)
	}
	return in.confirmed(line)
}

// what says for a person what an order is about.
func what(o limit.Order) string {
	switch o := o.(type) {
	case limit.ValveOrder:
		v, open, _ := o.Order()
		if open {
			return fmt.Sprintf("opening the %v valve", v)
		}
		return fmt.Sprintf("shutting the %v valve", v)
	case limit.EnergyOrder:
		e, _, _ := o.Order()
		return fmt.Sprintf("pulse energy %v", e)
	case limit.ZeroShift:
		name, _, _ := o.Shift()
		return fmt.Sprintf("the zero of %q", name)
	}
	return fmt.Sprintf("%T", o)
}

func opening(open bool) float64 {
	if open {
		return 1
	}
	return 0
}

// shareWithin is how far the share that an actuator reads back may be from the
// one it was sent, where the bench file gives no resolution. Half open is
// neither open nor shut.
const shareWithin = 0.02

// standsWithin is how long an actuator may take to get where HOLD sent it
// before HOLD is said not to have been taken, wall time.
const standsWithin = 300 * time.Millisecond

// stands reads back, for a moment, whether an actuator is where it was sent.
func (in *Instrument) stands(line link.Line, c *channel, share float64, text string) error {
	within := c.spec.Step
	if within <= 0 {
		within = shareWithin
	}
	for deadline := time.Now().Add(standsWithin); ; {
		back, err := in.protocol.back(line, c)
		if err != nil {
			return fmt.Errorf("%s: %s was sent, but is not read back: %w", in.spec.Name, text, err)
		}
		got := c.absolute(back)
		if math.Abs(got-share) <= within*(1+1e-9) {
			return nil
		}
		if time.Now().After(deadline) {
			return fmt.Errorf("%s: %s: expected %s read back, got %s", in.spec.Name, text, c.text(share), c.text(got))
		}
	}
}
