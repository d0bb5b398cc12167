package main

import (
	"fmt"
	"strings"

	"barline/model/bench"
	"barline/model/reading"
)

// scaleFor is how a number of a role is usually meant.
func scaleFor(r reading.Role) string {
	switch {
	case r.IsPressure():
		return "1 bar"
	case r.IsTemperature():
		return "1 degC"
	}
	switch r {
	case reading.Emission, reading.EmissionWidth:
		return "1 nm"
	case reading.EmissionStrength:
		return "1 %"
	case reading.PulseEnergy:
		return "1 uJ"
	case reading.InletValve, reading.PumpValve, reading.VentValve, reading.ShutterOpen:
		return "100 %"
	}
	return ""
}

// rolesIn is the width of the list of roles on the screen.
const rolesIn = 76

// channel asks for one channel.
func (v *interview) channel(path, protocol, field string) {
	v.table("[[instrument.channel]]", path)
	v.channels++
	preset := field
	if preset == "" {
		preset = fmt.Sprintf("channel %d", v.channels)
	}
	v.text("name", "Name of the channel, as the screen shows it", preset)
	if v.channels == 1 {
		v.say("What it is:\n%s", wrapped(reading.Role(0).Words()))
	}
	var role reading.Role
	if word := v.text("role", "Role", "none"); v.err == nil {
		_ = role.UnmarshalText([]byte(word)) // the checker has read it
	}
	switch protocol {
	case bench.ModbusRTU, bench.ModbusTCP:
		v.key("unit", "Modbus unit", "1", bare)
		v.key("function", "Function: 3 (holding) or 4 (input)", "3", bare)
		v.key("register", "Register, counted from 0", "0", bare)
		format := v.text("format", "Format: uint16, int16, uint32, int32 or float32", "float32")
		if strings.HasSuffix(format, "32") {
			v.text("order", "Order of the bytes: ABCD, CDAB, BADC or DCBA", "ABCD")
		}
		if role == reading.Setpoint {
			v.set("write", quoted("{value}"))
		}
	case bench.SCPI:
		v.text("query", "Query, such as MEAS:PRES?", "")
		if role.IsCommanded() {
			v.text("write", "Command that sets it, with {value} where the number goes; empty: it is only read", "")
		}
	case bench.Lines:
		v.set("field", quoted(field))
	}
	v.text("scale", `What the number 1 means, such as "1 bar" or "2.5 mbar"`, scaleFor(role))
	if role.IsPressure() && role != reading.Ambient && v.yes("Does it count from air pressure (a gauge)?", false) {
		v.set("gauge", "true")
	}
	v.key("range", `Range in specification, such as "0 bar to 20 bar"; empty: not judged`, "", func(text string) string {
		low, high, _ := strings.Cut(text, " to ")
		return tomlList(strings.TrimSpace(low), strings.TrimSpace(high))
	})
}

// wrapped sets words in lines.
func wrapped(words []string) string {
	var b strings.Builder
	width := 0
	for i, w := range words {
		if width+len(w) > rolesIn {
			b.WriteByte('\n')
			width = 0
		}
		if width == 0 {
			b.WriteString("  ")
		}
		b.WriteString(w)
		if i < len(words)-1 {
			b.WriteString(", ")
		}
		width += len(w) + 2
	}
	return b.String()
}
