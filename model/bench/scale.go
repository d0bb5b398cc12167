package bench

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"barline/model/form"
	"barline/model/reading"
	"barline/model/unit"
)

// kind is what the numbers of a role are.
type kind struct {
	symbol string
	parse  func(text string) (float64, error) // a value, SI
	span   func(text string) (float64, error) // a difference of two values, SI
}

func parser[Q ~float64](parse func(string) (Q, error)) func(string) (float64, error) {
	return func(text string) (float64, error) {
		q, err := parse(text)
		return float64(q), err
	}
}

func linear(symbol string, parse func(string) (float64, error)) kind {
	return kind{symbol, parse, parse}
}

// kindOf returns how the texts of a channel of this role are read.
func kindOf(role reading.Role, gauge bool) kind {
	switch {
	case role.IsPressure() && gauge:
		return linear("Pa", gaugePressure)
	case role.IsPressure():
		return linear("Pa", parser(unit.ParsePressure))
	case role.IsTemperature():
		return kind{"K", parser(unit.ParseTemperature), parser(unit.ParseKelvinDifference)}
	}
	switch role {
	case reading.PulseEnergy:
		return linear("J", parser(unit.ParseEnergy))
	case reading.Emission, reading.EmissionWidth:
		return linear("m", parser(unit.ParseLength))
	case reading.EmissionStrength:
		return linear("1", strength)
	case reading.InletValve, reading.PumpValve, reading.VentValve, reading.ShutterOpen, reading.LaserOn, reading.Attenuator:
		return linear("1", parser(unit.ParseFraction))
	}
	return linear("", anyQuantity)
}

// gaugePressure reads a text of a gauge channel, where "3 bar" and "3 bar(g)"
// mean the same.
func gaugePressure(text string) (float64, error) {
	if unit.IsGauge(text) {
		g, err := unit.ParseGauge(text)
		return float64(g), err
	}
	p, err := unit.ParsePressure(text)
	return float64(p), err
}

// strength reads a share of the output energy, or counts of a spectrometer.
func strength(text string) (float64, error) {
	if number, name := unit.Cut(text); name == "counts" || name == "count" {
		v, err := unit.ParseFraction(number + " %")
		return float64(v) * 100, err
	}
	v, err := unit.ParseFraction(text)
	return float64(v), err
}

// anyQuantity reads the quantity of a channel without a role: its unit is
// shown beside it and means nothing to the program.
func anyQuantity(text string) (float64, error) {
	number, name := unit.Cut(text)
	v, err := unit.ParseFraction(number + " %")
	if err != nil || name == "" {
		return 0, errors.New(`expected a number and a unit such as "0.1 V"`)
	}
	return float64(v) * 100, nil
}

// scale fills in Factor, Zero, Low, High and Symbol of a channel.
func (c checker) scale(path string, ch *Channel) {
	if _, name := unit.Cut(ch.Scale); unit.IsGauge(ch.Scale) && !ch.Gauge && ch.Role.IsPressure() {
		c.Wrong(path+".scale", "it is a gauge pressure; write gauge = true beside it")
		return
	} else if ch.Role == reading.NoRole || name == "counts" || name == "count" {
		ch.Symbol = name
	}
	k := kindOf(ch.Role, ch.Gauge)
	if k.symbol != "" && ch.Symbol == "" {
		ch.Symbol = k.symbol
	}
	if c.Has(path + ".resolution") {
		var err error
		if ch.Step, err = k.span(ch.Resolution); err != nil || !(ch.Step > 0) {
			c.Wrong(path+".resolution", "expected a step above zero, such as \"1 mbar\"")
		}
	}
	if c.Has(path + ".span") {
		c.current(path, ch, k)
		return
	}
	if c.Has(path + ".current") {
		c.About(path+".current", "goes with span, the quantities at 4 mA and at 20 mA")
	}
	factor, err := k.span(ch.Scale)
	switch {
	case err != nil && c.Has(path+".scale"):
		c.Wrong(path+".scale", "%s", form.Reason(err))
		return
	case err != nil:
		c.Missing(path+".scale", "%s", "it says what the number grows by from 0 to 1: "+form.Reason(err))
		return
	case factor == 0 || math.IsInf(factor, 0):
		c.Wrong(path+".scale", "expected another quantity than zero")
		return
	}
	ch.Factor = factor
	// On a scale with a zero of its own, such as degC, the number 0 means
	// that zero unless the file says otherwise.
	if _, name := unit.Cut(ch.Scale); ch.Role.IsTemperature() {
		if zero, err := k.parse("0 " + name); err == nil {
			ch.Zero = zero
		}
	}
	if c.Has(path + ".offset") {
		zero, err := k.parse(ch.Offset)
		if err != nil {
			c.Wrong(path+".offset", "%s", form.Reason(err))
		}
		ch.Zero = zero
	}
	if c.Has(path + ".range") {
		c.limits(path+".range", ch, k)
	}
}

// current fills in the scale of a channel whose number is a current of 4 to
// 20 mA.
func (c checker) current(path string, ch *Channel, k kind) {
	for _, key := range []string{"scale", "offset"} {
		if c.Has(path + "." + key) {
			c.About(path+"."+key, "is one scale too many: span is given as well")
			return
		}
	}
	if len(ch.Span) != 2 {
		c.Wrong(path+".span", `expected the quantities at 4 mA and at 20 mA, such as ["0 bar", "16 bar"]`)
		return
	}
	var v [2]float64
	for i, text := range ch.Span {
		var err error
		if v[i], err = k.parse(text); err != nil {
			c.Wrong(fmt.Sprintf("%s.span[%d]", path, i), "%s", form.Reason(err))
			return
		}
	}
	if v[0] == v[1] {
		c.Wrong(path+".span", "expected two different quantities")
		return
	}
	ch.Milliamp = 1
	if c.Has(path + ".current") {
		if ch.Milliamp = milliamps(ch.Current); !(ch.Milliamp > 0) {
			c.Wrong(path+".current", "expected a current such as \"1 uA\"")
			return
		}
	}
	slope := (v[1] - v[0]) / 16 // SI per mA
	ch.Factor = slope * ch.Milliamp
	ch.Zero = v[0] - 4*slope
	if c.Has(path + ".range") {
		c.limits(path+".range", ch, k)
	}
}

// milliamps reads a current in mA, or returns 0 where text is none.
func milliamps(text string) float64 {
	number, name := unit.Cut(text)
	share, err := unit.ParseFraction(number + " %")
	if err != nil {
		return 0
	}
	v := float64(share) * 100
	switch name {
	case "A":
		return v * 1e3
	case "mA":
		return v
	case "uA", "µA":
		return v * 1e-3
	}
	return 0
}

// limits fills in the range in specification.
func (c checker) limits(path string, ch *Channel, k kind) {
	if len(ch.Range) != 2 {
		c.Wrong(path, `expected the lowest and the highest value, such as ["0 bar", "20 bar"]`)
		return
	}
	var v [2]float64
	for i, text := range ch.Range {
		var err error
		at := fmt.Sprintf("%s[%d]", path, i)
		if v[i], err = k.parse(text); err != nil {
			c.Wrong(at, "%s", form.Reason(err))
			return
		}
		if _, name := unit.Cut(text); ch.Role == reading.NoRole && name != ch.Symbol {
			c.Wrong(at, "expected the unit of the scale, %q", ch.Symbol)
			return
		}
	}
	if !(v[0] < v[1]) {
		c.Wrong(path, "%s is not below %s; expected the lowest value first", strings.TrimSpace(ch.Range[0]), strings.TrimSpace(ch.Range[1]))
		return
	}
	ch.Low, ch.High = v[0], v[1]
}
