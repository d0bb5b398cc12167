package instrument

import (
	"errors"
	"fmt"
	"os"
	"slices"
	"time"

	"barline/device/link"
	"barline/device/modbus"
	"barline/model/bench"
	"barline/model/reading"
)

// register is where one channel lies.
type register struct {
	channel *channel
	format  modbus.Format
	order   modbus.Order
	request modbus.Request // of this channel alone
	at      int            // offset in its group's values
}

// group is what one request reads: registers side by side in one unit.
type group struct {
	request   modbus.Request
	registers []register
	silent    int           // times in a row without an answer
	skip      int           // polls to leave it out
	asked     time.Duration // bench time when it was asked last
}

// modbusProtocol polls units over RTU or TCP.
//
// A unit that does not answer costs a timeout at every poll, which the others
// would pay for. It is asked less and less often: such units take no more than a
// tenth of the line's time together, and are asked one at a time.
type modbusProtocol struct {
	in     *Instrument
	wire   modbusWire
	groups []*group
	order  stepKeeper
	waited bool          // for a silent unit in this poll
	again  time.Duration // bench time before which no silent unit is asked
}

// modbusWire carries one request and its reply.
type modbusWire interface {
	exchange(line link.Line, now Now, r modbus.Request) (modbus.Reply, reading.Stamp, error)
	// numbered reports whether a reply names its request.
	numbered() bool
	// opened forgets what came over the line before.
	opened()
	idle(line link.Line) error
}

func newModbus(in *Instrument) (*modbusProtocol, error) {
	m := &modbusProtocol{in: in}
	timeout := in.spec.Timeout.Duration()
	if in.spec.Protocol == bench.ModbusTCP {
		m.wire = &tcpWire{timeout: timeout, counts: &in.counts}
	} else {
		m.wire = &rtuWire{timeout: timeout, echo: in.spec.Echo, counts: &in.counts, perByte: byteTime(in.spec)}
	}
	var all []register
	for i := range in.channels {
		r, err := newRegister(&in.channels[i])
		if err != nil {
			return nil, err
		}
		all = append(all, r)
	}
	m.groups = takeTurns(gather(all))
	return m, nil
}

func newRegister(c *channel) (register, error) {
	r := register{channel: c}
	var err error
	if r.format, err = modbus.ParseFormat(c.spec.Format); err != nil {
		return r, fmt.Errorf("channel %q: %w", c.spec.Name, err)
	}
	if r.order, err = modbus.ParseOrder(c.spec.Order); err != nil {
		return r, fmt.Errorf("channel %q: %w", c.spec.Name, err)
	}
	if c.spec.Unit < 1 || c.spec.Unit > 247 {
		return r, fmt.Errorf("channel %q: unit is %d: expected 1 to 247", c.spec.Name, c.spec.Unit)
	}
	if c.spec.Register < 0 || c.spec.Register > 65535 {
		return r, fmt.Errorf("channel %q: register is %d: expected 0 to 65535", c.spec.Name, c.spec.Register)
	}
	r.request = modbus.Request{Unit: byte(c.spec.Unit), Function: modbus.Function(c.spec.Function), Address: uint16(c.spec.Register), Count: r.format.Registers()}
	if r.request.Function != modbus.ReadHolding && r.request.Function != modbus.ReadInput {
		return r, fmt.Errorf("channel %q: function is %d: expected 3 or 4", c.spec.Name, c.spec.Function)
	}
	if c.spec.Write != "" && r.request.Function != modbus.ReadHolding {
		return r, fmt.Errorf("channel %q: input registers cannot be written: expected function 3", c.spec.Name)
	}
	if err := r.request.Check(); err != nil {
		return r, fmt.Errorf("channel %q: %w", c.spec.Name, err)
	}
	return r, nil
}

// gather puts registers that lie side by side in one unit into one request, so
// that they are of one moment. A gap is never read: it may be no register.
func gather(all []register) []*group {
	slices.SortStableFunc(all, func(a, b register) int {
		return int(place(a.request)) - int(place(b.request))
	})
	var groups []*group
	for _, r := range all {
		if n := len(groups); n > 0 {
			g := groups[n-1]
			end := int(g.request.Address) + g.request.Count
			grown := int(r.request.Address) + r.request.Count - int(g.request.Address)
			if g.request.Unit == r.request.Unit && g.request.Function == r.request.Function &&
				int(r.request.Address) <= end && grown <= modbus.MaxRead {
				r.at = int(r.request.Address - g.request.Address)
				g.request.Count = max(g.request.Count, grown)
				g.registers = append(g.registers, r)
				continue
			}
		}
		groups = append(groups, &group{request: r.request, registers: []register{r}})
	}
	return groups
}

func place(r modbus.Request) uint32 {
	return uint32(r.Unit)<<24 | uint32(r.Function)<<16 | uint32(r.Address)
}

// takeTurns orders requests so that units alternate as far as they can.
func takeTurns(groups []*group) []*group {
	byUnit := map[byte][]*group{}
	var units []byte
	for _, g := range groups {
		u := g.request.Unit
		if byUnit[u] == nil {
			units = append(units, u)
		}
		byUnit[u] = append(byUnit[u], g)
	}
	var turns []*group
	for len(turns) < len(groups) {
		for _, u := range units {
			if rest := byUnit[u]; len(rest) > 0 {
				turns = append(turns, rest[0])
				byUnit[u] = rest[1:]
			}
		}
	}
	return turns
}

func (m *modbusProtocol) steps() int { return len(m.groups) }

func (m *modbusProtocol) opened() {
	m.order.reset()
	m.wire.opened()
}

func (m *modbusProtocol) drain(_ link.Line, _ Now, dst []reading.Reading) ([]reading.Reading, error) {
	return dst, nil
}

func (m *modbusProtocol) idle(line link.Line) error { return m.wire.idle(line) }

const (
	patientFor = 3  // times without an answer before a unit is asked less often
	longestGap = 15 // polls left out at least between two questions to a silent unit
	mostOfLine = 9  // silent units are left out this many times as long as the last silence took
)

func (m *modbusProtocol) step(i int, line link.Line, now Now, dst []reading.Reading) ([]reading.Reading, error) {
	g := m.groups[i]
	if i == 0 {
		m.waited = false
	}
	asked := now().Mono
	if g.skip > 0 || g.silent >= patientFor && (m.waited || asked < m.again || m.first(g) != g) {
		g.skip = max(g.skip-1, 0)
		return g.fail(dst, now(), fmt.Sprintf("unit %d does not answer and is asked less often", g.request.Unit)), nil
	}
	g.asked = asked
	reply, at, err := m.ask(line, now, g.request)
	switch {
	case errors.Is(err, errLost):
		return dst, err
	case errors.Is(err, os.ErrDeadlineExceeded):
		at = now()
		m.waited = true
		if g.silent++; g.silent >= patientFor {
			more := 1<<(g.silent-patientFor) - 1
			g.skip = min(more, longestGap)
			m.again = at.Mono + time.Duration(min(more, mostOfLine))*(at.Mono-asked)
			g.silent = min(g.silent, patientFor+8)
		}
		return g.fail(dst, at, err.Error()), nil
	}
	g.silent = 0
	if err != nil {
		return g.fail(dst, now(), err.Error()), nil
	}
	for _, r := range g.registers {
		number, err := r.format.Decode(r.order, reply.Values[r.at:r.at+r.format.Registers()])
		if err != nil {
			dst = append(dst, r.channel.fail(at, err.Error()))
			continue
		}
		dst = append(dst, r.channel.read(number, at))
	}
	return dst, nil
}

// first returns the silent request that has waited longest, or g.
func (m *modbusProtocol) first(g *group) *group {
	for _, other := range m.groups {
		if other.silent >= patientFor && other.skip == 0 && other.asked < g.asked {
			g = other
		}
	}
	return g
}

func (g *group) fail(dst []reading.Reading, at reading.Stamp, reason string) []reading.Reading {
	for _, r := range g.registers {
		dst = append(dst, r.channel.fail(at, reason))
	}
	return dst
}

// ask sends one read and returns its reply, never that of another read.
func (m *modbusProtocol) ask(line link.Line, now Now, r modbus.Request) (modbus.Reply, reading.Stamp, error) {
	if m.wire.numbered() {
		return m.wire.exchange(line, now, r)
	}
	for tries := 0; m.order.confusable(r); tries++ {
		between, ok := m.order.between(r)
		if !ok || tries == mostPending {
			return modbus.Reply{}, reading.Stamp{}, fmt.Errorf("unit %d: replies can no longer be told apart", r.Unit)
		}
		m.in.counts.resynced.Add(1)
		if _, _, err := m.send(line, now, between); err != nil && !isException(err) {
			return modbus.Reply{}, reading.Stamp{}, err
		}
	}
	return m.send(line, now, r)
}

func (m *modbusProtocol) send(line link.Line, now Now, r modbus.Request) (modbus.Reply, reading.Stamp, error) {
	m.order.sent(r)
	reply, at, err := m.wire.exchange(line, now, r)
	switch {
	case err == nil:
		m.order.answered(r)
	case isException(err):
		m.order.refused()
	}
	return reply, at, err
}

func isException(err error) bool {
	var e modbus.Exception
	return errors.As(err, &e)
}

func noStamp() reading.Stamp { return reading.Stamp{} }

func (m *modbusProtocol) write(line link.Line, c *channel, number float64) error {
	r, err := newRegister(c)
	if err != nil {
		return err
	}
	values, err := r.format.Encode(nil, r.order, number)
	if err != nil {
		return err
	}
	w := modbus.Request{Unit: r.request.Unit, Function: modbus.WriteMultiple, Address: r.request.Address, Values: values}
	if len(values) == 1 {
		w.Function = modbus.WriteSingle
	}
	_, _, err = m.wire.exchange(line, noStamp, w)
	return err
}

func (m *modbusProtocol) back(line link.Line, c *channel) (float64, error) {
	r, err := newRegister(c)
	if err != nil {
		return 0, err
	}
	reply, _, err := m.ask(line, noStamp, r.request)
	if err != nil {
		return 0, err
	}
	return r.format.Decode(r.order, reply.Values)
}

// confirm has nothing to ask: every write was answered.
func (m *modbusProtocol) confirm(link.Line) error { return nil }

func (m *modbusProtocol) command(link.Line, string) error {
	return errors.New("commands of text are not for modbus")
}

// byteTime is how long one byte takes on a serial line.
func byteTime(spec bench.Instrument) time.Duration {
	if spec.Port == "" || spec.Baud <= 0 {
		return 0
	}
	return 12 * time.Second / time.Duration(spec.Baud)
}
