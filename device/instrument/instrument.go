package instrument

import (
	"errors"
	"fmt"
	"os"
	"time"

	"barline/device/link"
	"barline/model/bench"
	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// Now tells bench time.
type Now func() reading.Stamp

// defaultTimeout is how long an answer may take where the bench file does not
// say, wall time.
const defaultTimeout = 500 * time.Millisecond

// Instrument is one instrument of the bench file. It is used by one goroutine
// at a time; Counts may be called by any.
type Instrument struct {
	spec     bench.Instrument
	channels []channel
	protocol protocol
	setpoint int // the channel that takes one, or -1
	valves   map[limit.Valve]*channel
	energy   *channel // the attenuator, where one is driven
	held     bool
	counts   counters
}

// protocol is how an instrument is spoken to. Errors of its methods wrap
// errLost where the line is gone; all others say why there is no value.
type protocol interface {
	// steps returns in how many steps one poll goes; 0 where it streams.
	steps() int
	step(i int, line link.Line, now Now, dst []reading.Reading) ([]reading.Reading, error)
	drain(line link.Line, now Now, dst []reading.Reading) ([]reading.Reading, error)
	// write sends the number of a channel, back reads it back.
	write(line link.Line, c *channel, number float64) error
	back(line link.Line, c *channel) (float64, error)
	// command sends text that has no answer, confirm asks what the instrument
	// made of all that was sent.
	command(line link.Line, text string) error
	confirm(line link.Line) error
	// idle takes what comes between polls, and notices that a line is gone.
	idle(line link.Line) error
	// opened forgets what was known of the line before.
	opened()
}

var errLost = errors.New("the line is gone")

// lost marks an error of the line, unless it is mere silence.
func lost(err error) error {
	if err == nil || errors.Is(err, os.ErrDeadlineExceeded) {
		return err
	}
	return fmt.Errorf("%w: %w", errLost, err)
}

// New checks the description of an instrument. Ambient is the air pressure
// that its gauge pressures count from.
func New(spec bench.Instrument, ambient unit.Pascal) (*Instrument, error) {
	in := &Instrument{spec: spec, setpoint: -1, valves: map[limit.Valve]*channel{}}
	fail := func(format string, args ...any) (*Instrument, error) {
		return nil, fmt.Errorf("instrument %q: %w", spec.Name, fmt.Errorf(format, args...))
	}
	if len(spec.Channel) == 0 {
		return fail("has no channel")
	}
	if !(ambient >= 0) {
		return fail("air pressure is %v: expected zero or more", ambient)
	}
	if in.spec.Timeout <= 0 {
		in.spec.Timeout = unit.Second(defaultTimeout.Seconds())
	}
	in.channels = make([]channel, 0, len(spec.Channel)) // valves point into it
	for i, c := range spec.Channel {
		ch, err := newChannel(c, ambient)
		if err != nil {
			return fail("%w", err)
		}
		in.channels = append(in.channels, ch)
		if v, ok := valveOf[c.Role]; ok && c.Write != "" {
			in.valves[v] = &in.channels[i]
		}
		if c.Role == reading.Attenuator && c.Write != "" {
			in.energy = &in.channels[i]
		}
		if c.Role == reading.Setpoint && c.Write != "" {
			if in.setpoint >= 0 {
				return fail("two channels take a setpoint, %q and %q", in.channels[in.setpoint].spec.Name, c.Name)
			}
			in.setpoint = i
		}
	}
	var err error
	switch spec.Protocol {
	case bench.ModbusRTU, bench.ModbusTCP:
		in.protocol, err = newModbus(in)
	case bench.SCPI:
		in.protocol, err = newSCPI(in)
	case bench.Lines:
		in.protocol, err = newLines(in)
	default:
		err = fmt.Errorf("protocol is %q: expected %s, %s, %s or %s", spec.Protocol, bench.ModbusRTU, bench.ModbusTCP, bench.SCPI, bench.Lines)
	}
	if err != nil {
		return fail("%w", err)
	}
	return in, nil
}

// WavelengthsInAir says that the instrument reports wavelengths in air, which
// become those in vacuum from now on.
func (in *Instrument) WavelengthsInAir() {
	p, _ := in.protocol.(*linesProtocol)
	for i := range in.channels {
		// The wavelengths of a whole spectrum are converted pixel by pixel.
		in.channels[i].air = p == nil || p.fields[i] != wholeSpectrum
	}
	if p != nil && p.pixels != nil {
		p.pixels.air = true
	}
}

// MadeBy says by which pump the light is made, and whether the emission is to
// be told by its peak instead of its centroid. Instruments that send whole
// spectra need it; for others it means nothing.
func (in *Instrument) MadeBy(pump unit.Metre, peak bool) {
	if p, ok := in.protocol.(*linesProtocol); ok && p.pixels != nil {
		p.pixels.pump, p.pixels.peak = pump, peak
	}
}

// Name returns the name in the bench file.
func (in *Instrument) Name() string { return in.spec.Name }

// Streams reports whether the instrument talks by itself: it is to be Drained,
// and Poll does nothing.
func (in *Instrument) Streams() bool { return in.protocol.steps() == 0 }

// TakesSetpoint reports whether Set can work.
func (in *Instrument) TakesSetpoint() bool { return in.setpoint >= 0 }

// Opened must be called when a line has been opened, before it is used.
func (in *Instrument) Opened() { in.protocol.opened() }

// Poll asks for every channel once and appends the readings to dst. An error
// says that the line is gone.
func (in *Instrument) Poll(line link.Line, now Now, dst []reading.Reading) ([]reading.Reading, error) {
	for i := range in.protocol.steps() {
		var err error
		if dst, err = in.protocol.step(i, line, now, dst); err != nil {
			return dst, err
		}
	}
	return dst, nil
}

// Drain waits a moment for an instrument that talks by itself and appends the
// readings of all whole lines to dst. An error says that the line is gone.
func (in *Instrument) Drain(line link.Line, now Now, dst []reading.Reading) ([]reading.Reading, error) {
	return in.protocol.drain(line, now, dst)
}

// Set sends a setpoint and reads it back. It refuses one that no limit made.
func (in *Instrument) Set(line link.Line, s limit.Setpoint) error {
	p, ok := s.Pressure()
	if !ok {
		return fmt.Errorf("%s: setpoint was not checked against the limits: %w", in.spec.Name, limit.ErrLimit)
	}
	if in.setpoint < 0 {
		return fmt.Errorf("%s takes no setpoint", in.spec.Name)
	}
	n, err := in.number(in.setpoint, float64(p))
	if err != nil {
		return err
	}
	if in.held {
		for _, text := range in.spec.Resume {
			if err := in.protocol.command(line, text); err != nil {
				return fmt.Errorf("%s: %q: %w", in.spec.Name, text, err)
			}
		}
		in.held = false
	}
	c := &in.channels[in.setpoint]
	if err := in.protocol.write(line, c, n); err != nil {
		return fmt.Errorf("%s: setpoint %v: %w", in.spec.Name, p, err)
	}
	return errors.Join(in.standsAt(line, p), in.confirmed(line))
}

// Hold shuts the valves that the instrument drives, sends the hold commands of
// the bench file and then the frozen setpoint. It tries all of them, whatever
// fails, and asks what became of them only when all have been sent: an answer
// that does not come must not keep the next command waiting.
func (in *Instrument) Hold(line link.Line, s limit.Setpoint) error {
	p, checked := s.Pressure()
	var errs []error
	if !checked {
		errs = append(errs, fmt.Errorf("%s: setpoint was not checked against the limits: %w", in.spec.Name, limit.ErrLimit))
	}
	in.held = true
	for _, v := range heldValves {
		if c := in.valves[v]; c != nil {
			if err := in.protocol.write(line, c, c.spec.Number(0)); err != nil {
				errs = append(errs, fmt.Errorf("%s: shutting the %v valve: %w", in.spec.Name, v, err))
			}
		}
	}
	for _, text := range in.spec.Hold {
		if err := in.protocol.command(line, text); err != nil {
			errs = append(errs, fmt.Errorf("%s: %q: %w", in.spec.Name, text, err))
		}
	}
	sets := checked && in.setpoint >= 0
	if sets {
		n, err := in.number(in.setpoint, float64(p))
		if err == nil {
			err = in.protocol.write(line, &in.channels[in.setpoint], n)
		}
		if sets = err == nil; !sets {
			errs = append(errs, fmt.Errorf("%s: setpoint %v: %w", in.spec.Name, p, err))
		}
	}
	for _, v := range heldValves {
		if in.valves[v] != nil {
			errs = append(errs, in.stands(line, in.valves[v], 0, fmt.Sprintf("shutting the %v valve", v)))
		}
	}
	if sets {
		errs = append(errs, in.standsAt(line, p))
	}
	return errors.Join(append(errs, in.confirmed(line))...)
}

// heldValves are shut on HOLD, in this order.
var heldValves = [...]limit.Valve{limit.Inlet, limit.Pump, limit.Vent}

// TakesHold reports whether Hold does anything.
func (in *Instrument) TakesHold() bool {
	return in.setpoint >= 0 || len(in.valves) > 0 || len(in.spec.Hold) > 0
}

// standsAt reads back whether the setpoint is the one that was sent.
func (in *Instrument) standsAt(line link.Line, p unit.Pascal) error {
	c := &in.channels[in.setpoint]
	back, err := in.protocol.back(line, c)
	if err != nil {
		return fmt.Errorf("%s: setpoint %v was sent, but is not read back: %w", in.spec.Name, p, err)
	}
	if got := c.absolute(back); !c.near(got, float64(p)) {
		return fmt.Errorf("%s did not take setpoint %v: it reads back %v", in.spec.Name, p, unit.Pascal(got))
	}
	return nil
}

func (in *Instrument) confirmed(line link.Line) error {
	if err := in.protocol.confirm(line); err != nil {
		return fmt.Errorf("%s: after what was sent: %w", in.spec.Name, err)
	}
	return nil
}

// number returns what to send to channel i for an absolute quantity in SI.
func (in *Instrument) number(i int, v float64) (float64, error) {
	n, err := in.channels[i].number(v)
	if err != nil {
		return 0, fmt.Errorf("%s: %w", in.spec.Name, err)
	}
	return n, nil
}

var valveOf = map[reading.Role]limit.Valve{
	reading.InletValve: limit.Inlet, reading.PumpValve: limit.Pump, reading.VentValve: limit.Vent,
}

// failure appends a failed reading for each channel.
func failure(dst []reading.Reading, channels []*channel, at reading.Stamp, reason string) []reading.Reading {
	for _, c := range channels {
		dst = append(dst, c.fail(at, reason))
	}
	return dst
}
