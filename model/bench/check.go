package bench

import (
	"slices"
	"strings"

	"barline/model/form"
	"barline/model/gas"
	"barline/model/reading"
	"barline/model/unit"
)

// checker finds what is wrong between keys that are right by themselves. A
// value that was refused before is zero here and is not complained of again.
type checker struct {
	*form.Report
	b *Bench
}

func (c checker) all() {
	c.fibre()
	c.cladding()
	c.gas()
	c.pressures()
	c.energy()
	c.instruments()
	if zone := c.b.Screen.TimeZone; strings.TrimSpace(zone) != zone || zone == "" {
		c.Wrong("screen.time_zone", `expected "local", "UTC" or a name such as "Europe/Lisbon"`)
	}
}

func (c checker) fibre() {
	f := c.b.Fibre
	switch {
	case f.Kind == "capillary" && c.Has("fibre.wall"):
		c.Wrong("fibre.wall", "a capillary has no thin wall round its core; leave it out")
	case (f.Kind == "kagome" || f.Kind == "antiresonant") && !c.Has("fibre.wall"):
		c.Missing("fibre.wall", "a fibre of kind %q needs the thickness of the glass round its core, such as \"180 nm\"", f.Kind)
	}
	if f.Wall > 0 && f.CoreDiameter > 0 && f.Wall > f.CoreDiameter/2 {
		c.Wrong("fibre.wall", "it is more than the core's radius, %v", f.CoreDiameter/2)
	}
}

// cladding wants number and size of the holes, or neither.
func (c checker) cladding() {
	switch holes, size := c.Has("fibre.cladding_holes"), c.Has("fibre.cladding_hole_diameter"); {
	case holes && !size:
		c.Missing("fibre.cladding_hole_diameter", "cladding_holes is given: the diameter of one hole, such as \"12 um\"")
	case size && !holes:
		c.Missing("fibre.cladding_holes", "cladding_hole_diameter is given: how many holes there are")
	}
}

// gas checks the names of sources, and a nonlinear index that is written as a
// value instead.
func (c checker) gas() {
	species, err := gas.Named(c.b.Gas.Species)
	if err != nil {
		return // refused before
	}
	if names := gas.IndexNames(species); c.b.Gas.Index != "" && !slices.Contains(names, c.b.Gas.Index) {
		c.Wrong("gas.index", "%s", form.ExpectOne(names, c.b.Gas.Index))
	}
	n2 := strings.TrimSpace(c.b.Gas.N2)
	if n2 == "" {
		return
	}
	if n2[0] != '-' && n2[0] != '.' && (n2[0] < '0' || n2[0] > '9') {
		if names := gas.KerrNames(species); !slices.Contains(names, n2) {
			c.Wrong("gas.n2", "%s, or a value such as \"9.11e-24 m2/W\"", form.ExpectOne(names, n2))
		}
		return
	}
	if v, err := unit.ParseNonlinearIndex(n2); err != nil {
		c.Wrong("gas.n2", "%s", form.Reason(err))
	} else if !(v > 0) {
		c.Wrong("gas.n2", "expected more than 0 m2/W")
	}
}

// pressures checks the ratings against each other.
func (c checker) pressures() {
	l, p := c.b.Limits, c.b.Panel
	if l.Line > 0 && p.Supply > l.Line {
		c.Wrong("panel.supply", "it is above limits.line, %v: a valve left open would break the line", l.Line)
	}
	low := l.Enforced().Lowest()
	if low.Max > 0 && l.PumpBelow > low.Max {
		c.Wrong("limits.pump_below", "it is above the rating of %s, %v", low.Part, low.Max)
	}
	if low.Max > 0 && l.Disagreement > low.Max {
		c.Wrong("limits.disagreement", "it is above the rating of %s, %v: two gauges could never disagree", low.Part, low.Max)
	}
}

// energy checks what the attenuator may do against what it can do.
func (c checker) energy() {
	p := c.b.Pulse
	if p.FullEnergy > 0 && p.FullEnergy < p.Energy {
		c.Wrong("pulse.full_energy", "it is below pulse.energy, %v, which the attenuator then has to let through", p.Energy)
	}
	if most := c.b.Limits.Energy; most > 0 && most < p.Energy {
		c.Wrong("limits.energy", "it is below pulse.energy, %v", p.Energy)
	}
}

// roles refuses two channels of one role; those without a role may repeat.
// Gauges of different range may share one: the finest that can tell has it.
func (c checker) roles() {
	var taken [reading.RoleCount]*Channel
	for i, inst := range c.b.Instrument {
		for j := range inst.Channel {
			ch := &c.b.Instrument[i].Channel[j]
			if ch.Role == reading.NoRole {
				continue
			}
			first := taken[ch.Role]
			gauges := ch.Role.IsPressure() && ch.Role != reading.Setpoint
			if first != nil && !(gauges && ch.HasRange() && first.HasRange() && ch.High != first.High) {
				c.Wrong(channelPath(i, j)+".role", "channel %q has this role already", first.Name)
				continue
			}
			taken[ch.Role] = ch
		}
	}
}
