package bench

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"barline/model/form"
	"barline/model/reading"
	"barline/model/unit"
)

// Where keys mean something: on which lines, and for which protocols.
var (
	serialKeys   = []string{"baud", "data_bits", "parity", "stop_bits"}
	protocolKeys = map[string][]string{
		"pattern": {Lines}, "checksum": {Lines}, "streams": {Lines}, "identify": {SCPI}, "hold": {SCPI, Lines},
		"calibration": {Lines}, "dark": {Lines}, "threshold": {Lines}, "saturation": {Lines},
		"resume": {SCPI, Lines}, "terminator": {SCPI, Lines}, "ask": {Lines}, "errors": {SCPI}, "echo": {ModbusRTU, SCPI, Lines},
	}
	channelKeys = map[string][]string{
		"unit": {ModbusRTU, ModbusTCP}, "function": {ModbusRTU, ModbusTCP}, "register": {ModbusRTU, ModbusTCP},
		"format": {ModbusRTU, ModbusTCP}, "order": {ModbusRTU, ModbusTCP},
		"query": {SCPI}, "write": {SCPI, ModbusRTU, ModbusTCP}, "field": {Lines},
	}
)

func instrumentPath(i int) string { return fmt.Sprintf("instrument[%d]", i) }

func channelPath(i, j int) string { return fmt.Sprintf("instrument[%d].channel[%d]", i, j) }

func (c checker) instruments() {
	names, channels := map[string]int{}, map[string]string{}
	for i := range c.b.Instrument {
		inst := &c.b.Instrument[i]
		path := instrumentPath(i)
		if first, there := names[inst.Name]; there && inst.Name != "" {
			c.Wrong(path+".name", "instrument %d of the file has this name already", first+1)
		} else {
			names[inst.Name] = i
		}
		c.line(path, inst)
		c.meaning(path, inst.Protocol, protocolKeys)
		fields := c.protocol(path, inst)
		for j := range inst.Channel {
			ch, at := &inst.Channel[j], channelPath(i, j)
			if other, there := channels[ch.Name]; there && ch.Name != "" {
				c.Wrong(at+".name", "instrument %q has a channel of this name already", other)
			} else {
				channels[ch.Name] = inst.Name
			}
			c.meaning(at, inst.Protocol, channelKeys)
			c.channel(at, inst, ch, fields)
		}
	}
	c.roles()
}

// line checks how the instrument is reached.
func (c checker) line(path string, inst *Instrument) {
	var ways []string
	for _, key := range []string{"port", "address", "command"} {
		if c.Has(path + "." + key) {
			ways = append(ways, key)
		}
	}
	switch {
	case len(ways) == 0:
		c.About(path, "%s does not say how it is reached; expected port, address or command", named(inst.Name))
	case len(ways) > 1:
		c.About(path+"."+ways[1], "is one way too many: %s is given as well; expected one of port, address and command", ways[0])
	}
	if c.Has(path+".port") && strings.TrimSpace(inst.Port) == "" {
		c.Wrong(path+".port", "it is empty; expected a port such as %q", "/dev/ttyUSB0")
	}
	if c.Has(path+".port") && inst.Protocol == ModbusTCP {
		c.About(path+".port", "is a serial port, and modbus-tcp has none; expected address, or the protocol modbus-rtu")
	}
	if c.Has(path + ".address") {
		colon := strings.LastIndexByte(inst.Address, ':')
		port, err := strconv.Atoi(inst.Address[colon+1:])
		if colon < 1 || err != nil || port < 1 || port > 65535 {
			c.Wrong(path+".address", "expected a host and a port such as %q", "192.168.0.7:502")
		}
	}
	if c.Has(path+".command") && (len(inst.Command) == 0 || inst.Command[0] == "") {
		c.Wrong(path+".command", `it is empty; expected a program and its arguments such as ["reader", "-q"]`)
	}
	for _, key := range serialKeys {
		if c.Has(path+"."+key) && !c.Has(path+".port") {
			c.About(path+"."+key, "means something on a serial port only, and port is not given")
		}
	}
	if inst.Protocol == ModbusRTU && c.Has(path+".data_bits") && inst.DataBits != 8 && inst.DataBits != 0 {
		c.Wrong(path+".data_bits", "modbus-rtu needs 8")
	}
	if c.Has(path+".every") && inst.Streams {
		c.About(path+".every", "is for instruments that are asked, and this one has streams = true")
	}
}

// meaning refuses keys that the protocol does not use.
func (c checker) meaning(path, protocol string, users map[string][]string) {
	if protocol == "" {
		return
	}
	for key, protocols := range users {
		if c.Has(path+"."+key) && !slices.Contains(protocols, protocol) {
			c.About(path+"."+key, "is for %s, and this instrument speaks %s", form.Enumerate(protocols, "and"), protocol)
		}
	}
}

// protocol checks what the instrument's protocol needs and returns the fields
// of its pattern.
func (c checker) protocol(path string, inst *Instrument) (fields []string) {
	if inst.Protocol == Lines {
		if !c.Has(path + ".pattern") {
			c.Missing(path+".pattern", "expected the lines of the instrument with its fields in braces, such as %q", "P {pressure} bar")
			return nil
		}
		var err error
		if fields, err = patternFields(inst.Pattern); err != nil {
			c.Wrong(path+".pattern", "%s", err)
		}
	}
	for key, commands := range map[string][]string{"hold": inst.Hold, "resume": inst.Resume} {
		for k, command := range commands {
			if strings.TrimSpace(command) == "" || strings.ContainsAny(command, "\r\n") {
				c.Wrong(fmt.Sprintf("%s.%s[%d]", path, key, k), "expected one command without a line break")
			}
		}
	}
	for k, text := range inst.Calibration {
		if _, err := unit.ParseLength(text); err != nil {
			c.Wrong(fmt.Sprintf("%s.calibration[%d]", path, k), "%s", form.Reason(err))
		}
	}
	if c.Has(path+".calibration") && len(inst.Calibration) < 2 {
		c.Wrong(path+".calibration", "expected the wavelength of pixel 0 and the step to the next at least, such as [\"190 nm\", \"0.4 nm\"]")
	}
	if inst.Streams && c.Has(path+".ask") {
		c.About(path+".ask", "is for instruments that are asked, and this one has streams = true")
	}
	if len(inst.Channel) == 0 {
		c.About(path, "%s has no channel; expected at least one [[instrument.channel]] below it", named(inst.Name))
	}
	return fields
}

// channel checks one channel and fills in its scale.
func (c checker) channel(path string, inst *Instrument, ch *Channel, fields []string) {
	switch inst.Protocol {
	case ModbusRTU, ModbusTCP:
		if !c.Has(path + ".register") {
			c.Missing(path+".register", "expected the register's number, counted from 0")
		}
	case SCPI:
		if !c.Has(path+".query") && !c.Has(path+".write") {
			c.Missing(path+".query", "expected the query that reads the channel, such as %q", "MEAS:PRES?")
		}
	case Lines:
		c.patternField(path, ch, fields)
	}
	if c.Has(path + ".write") {
		if strings.Count(ch.Write, "{value}") != 1 {
			c.Wrong(path+".write", "expected {value} in it once, where the number goes, such as %q", "SOUR:PRES:LEV {value}")
		}
		if ch.Function == 4 {
			c.About(path+".write", "needs function 3: input registers cannot be written")
		}
		if ch.Role == reading.Attenuator && !c.Has("limits.energy") {
			c.Missing("limits.energy", "%s moves an attenuator: the highest pulse energy that may be asked for, such as \"1.5 uJ\"", named(ch.Name))
		}
		if !ch.Role.IsCommanded() {
			c.About(path+".write", "is for channels that are set, and nothing is ever sent to one with the role %s", ch.Role)
		}
	}
	for key, text := range map[string]string{"query": ch.Query, "write": ch.Write} {
		if c.Has(path+"."+key) && (strings.TrimSpace(text) == "" || strings.ContainsAny(text, "\r\n")) {
			c.Wrong(path+"."+key, "expected one command without a line break")
		}
	}
	if ch.Gauge && (!ch.Role.IsPressure() || ch.Role == reading.Ambient) {
		c.About(path+".gauge", "is for pressures, and this channel has the role %s", ch.Role)
		return
	}
	if ch.Gauge && !c.Has("panel.ambient") && !c.measures(reading.Ambient) {
		c.About(path+".gauge", "needs the air pressure that it counts from; give panel.ambient or a channel with the role ambient-pressure")
	}
	if ch.Scale == "" && isShare(ch.Role) {
		ch.Scale = "100 %" // the number 1 means open, on, or all of it
	}
	if c.Has(path+".gas_factor") && !(ch.GasFactor >= 0.01 && ch.GasFactor <= 100) {
		c.Wrong(path+".gas_factor", "expected 0.01 to 100")
	}
	c.scale(path, ch)
}

func (c checker) patternField(path string, ch *Channel, fields []string) {
	switch {
	case !c.Has(path + ".field"):
		c.Missing(path+".field", "expected one of the pattern's fields: %s", form.Enumerate(fields, "or"))
	case fields != nil && !slices.Contains(fields, ch.Field):
		c.Wrong(path+".field", "the pattern has no such field; %s", form.ExpectOne(fields, ch.Field))
	}
}

// measures reports whether any channel has the role.
func (c checker) measures(role reading.Role) bool {
	for _, inst := range c.b.Instrument {
		for _, ch := range inst.Channel {
			if ch.Role == role {
				return true
			}
		}
	}
	return false
}

func isShare(r reading.Role) bool {
	return r == reading.InletValve || r == reading.PumpValve || r == reading.VentValve ||
		r == reading.ShutterOpen || r == reading.LaserOn || r == reading.Attenuator
}

func named(name string) string {
	if name == "" {
		return "without a name"
	}
	return fmt.Sprintf("%q", name)
}
