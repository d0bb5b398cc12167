package main

import (
	"fmt"
	"io"
	"strings"
	"text/tabwriter"

	"barline/model/bench"
	"barline/model/reading"
	"barline/model/unit"
)

// writeSummary says in a person's words what was understood of a bench file.
func writeSummary(w io.Writer, file string, b *bench.Bench) {
	fmt.Fprintf(w, "%s was understood.\n\n", file)
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	row := func(name, format string, args ...any) {
		fmt.Fprintf(table, "%s\t%s\n", name, fmt.Sprintf(format, args...))
	}

	row("bench", "%s", listed(b.Bench.Name, b.Bench.Cylinder, b.Bench.FibrePiece))
	wall := ""
	if b.Fibre.Wall > 0 {
		wall = fmt.Sprintf(", wall %v", b.Fibre.Wall)
	}
	row("fibre", "%s, core %v%s, length %v, loss %v", b.Fibre.Kind, b.Fibre.CoreDiameter, wall, b.Fibre.Length, b.Fibre.Loss)
	row("gas", "%s, density %s, index %s, n2 %s", b.Gas.Species, b.Gas.Density, orElse(b.Gas.Index, "the gas's own"), orElse(b.Gas.N2, "the gas's own"))
	row("pulse", "%v, %v %s, %v, chirp %v, %v", b.Pulse.Wavelength, b.Pulse.Duration, b.Pulse.Shape, b.Pulse.Energy, b.Pulse.GDD, b.Pulse.RepetitionRate)
	row("panel", "cells of %v, supply %v, ambient %v", b.Panel.CellVolume, b.Panel.Supply, b.Panel.Ambient)
	low := b.Limits.Enforced().Lowest()
	row("limits", "setpoints up to %v, the rating of %s", low.Max, low.Part)
	row("", "fibre seal %v, cells %v, windows %v, line %v", b.Limits.FibreSeal, b.Limits.Cells, b.Limits.Windows, b.Limits.Line)
	row("", "ramps %v up, %v down", b.Limits.RiseRate, b.Limits.FallRate)
	if b.Limits.PumpBelow > 0 {
		row("", "pump valve opens below %v", b.Limits.PumpBelow)
	} else {
		row("", "pump valve never opens: limits.pump_below is not given")
	}
	row("", "a reading is stale after %v, gauges disagree beyond %v, arming lasts %v", b.Limits.Stale, b.Limits.Disagreement, b.Limits.Arming)
	row("emission", "%s prediction against the %s in %s", b.Emission.Answer, b.Emission.Reports, b.Emission.Wavelengths)
	row("logbook", "%s; at least every %v", orElse(b.Logbook.Folder, "in the user's data folder"), b.Logbook.Heartbeat)
	if len(b.Alarms.OnAlarm) > 0 {
		row("alarms", "run %s", strings.Join(b.Alarms.OnAlarm, " "))
	}
	table.Flush()

	for i := range b.Instrument {
		inst := &b.Instrument[i]
		pace := fmt.Sprintf("asked every %v, %v to answer", inst.Every, inst.Timeout)
		if inst.Streams {
			pace = "talks by itself"
		}
		fmt.Fprintf(w, "\n%s: %s on %s, %s\n", inst.Name, inst.Protocol, reachedBy(inst), pace)
		table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
		for j := range inst.Channel {
			ch := &inst.Channel[j]
			fmt.Fprintf(table, "  %s\t%s\t%s\t%s\n", ch.Name, ch.Role, wireOf(ch), scaleOf(ch))
		}
		table.Flush()
	}
	if without := lacking(b); len(without) > 0 {
		fmt.Fprintln(w, "\nWithout:")
		for _, line := range without {
			fmt.Fprintln(w, "  "+line)
		}
	}
}

// reachedBy says which line leads to an instrument.
func reachedBy(inst *bench.Instrument) string {
	switch {
	case inst.Port != "":
		parity := "N"
		if inst.Parity != "" && inst.Parity != "none" {
			parity = strings.ToUpper(inst.Parity[:1])
		}
		return fmt.Sprintf("%s %d %d%s%d", inst.Port, inst.Baud, inst.DataBits, parity, inst.StopBits)
	case inst.Address != "":
		return inst.Address
	}
	return "the program " + strings.Join(inst.Command, " ")
}

// wireOf says where the number of a channel stands on the wire.
func wireOf(ch *bench.Channel) string {
	switch {
	case ch.Format != "":
		bank := "holding"
		if ch.Function == 4 {
			bank = "input"
		}
		return fmt.Sprintf("unit %d, %s register %d, %s %s", ch.Unit, bank, ch.Register, ch.Format, ch.Order)
	case ch.Field != "":
		return "field " + ch.Field
	case ch.Write != "" && ch.Query != "":
		return ch.Query + " and " + ch.Write
	}
	return ch.Query + ch.Write
}

// scaleOf says what the number of a channel means.
func scaleOf(ch *bench.Channel) string {
	text := "1 is " + ch.Scale
	if ch.Offset != "" {
		text = "0 is " + ch.Offset + ", each count adds " + ch.Scale
	}
	if ch.Gauge {
		text += " above ambient"
	}
	if ch.HasRange() {
		text += "; in specification from " + ch.Range[0] + " to " + ch.Range[1]
	}
	return text
}

// lacking says what a bench cannot do for want of an instrument.
func lacking(b *bench.Bench) []string {
	var has [reading.RoleCount]bool
	writes := false
	for _, inst := range b.Instrument {
		for _, ch := range inst.Channel {
			has[ch.Role] = true
			writes = writes || ch.Role == reading.Setpoint && ch.Write != ""
		}
	}
	var without []string
	say := func(missing bool, line string) {
		if missing {
			without = append(without, line)
		}
	}
	say(!has[reading.CellAPressure] && !has[reading.CellBPressure], "a cell pressure: nothing can be predicted from a measurement")
	say(has[reading.CellAPressure] != has[reading.CellBPressure], "a second cell pressure: one gauge is believed alone, and no flow through the fibre is seen")
	say(!has[reading.FibreTemperature] && !has[reading.CellTemperature], "a thermometer at the gas: the room's temperature is assumed, 1 K is about 0.3 % of density")
	say(!has[reading.Emission], "a spectrometer: predictions stand without a measurement beside them")
	say(!writes, "a setpoint that can be written: this bench can be watched, not driven")
	say(!has[reading.PulseEnergy], fmt.Sprintf("an energy meter: %v is assumed", b.Pulse.Energy))
	say(!has[reading.Ambient] && b.Panel.Ambient == unit.Atmosphere, "a barometer or panel.ambient: one standard atmosphere is assumed round the bench")
	return without
}

// listed joins what is not empty.
func listed(parts ...string) string {
	var given []string
	for _, p := range parts {
		if p != "" {
			given = append(given, p)
		}
	}
	return strings.Join(given, "; ")
}

func orElse(text, otherwise string) string {
	if text == "" {
		return otherwise
	}
	return text
}
