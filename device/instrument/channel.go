package instrument

import (
	"fmt"
	"math"
	"strconv"

	"barline/model/air"
	"barline/model/bench"
	"barline/model/reading"
	"barline/model/unit"
)

// channel turns the numbers of one channel into readings.
type channel struct {
	spec    bench.Channel
	ambient *Ambient // added to a gauge pressure
	shift   float64  // Pa, added to what a gauge reads: its zero, corrected
	air     bool     // wavelengths are those in air
	low     string   // the range in specification, as a person reads it
	high    string
}

func newChannel(spec bench.Channel, ambient unit.Pascal) (channel, error) {
	c := channel{spec: spec, ambient: NewAmbient(ambient)}
	if spec.Factor == 0 || math.IsNaN(spec.Factor) || math.IsInf(spec.Factor, 0) {
		return c, fmt.Errorf("channel %q: no scale is known; a bench file is read by bench.Parse", spec.Name)
	}
	if spec.Gauge && !spec.Role.IsPressure() {
		return c, fmt.Errorf("channel %q: gauge is for pressures, its role is %v", spec.Name, spec.Role)
	}
	if spec.Write != "" && spec.Query == "" && spec.Format == "" {
		return c, fmt.Errorf("channel %q: has write but no query: what is sent must be read back", spec.Name)
	}
	if spec.HasRange() {
		c.low, c.high = c.text(spec.Low), c.text(spec.High)
	}
	return c, nil
}

// Currents of NAMUR NE 43 (2003), in mA: measured values lie in 3.8 to 20.5,
// a failed transmitter sends 3.6 or less or 21 or more.
const (
	lowestCurrent  = 3.8
	highestCurrent = 20.5
	failedLow      = 3.6
	failedHigh     = 21.0
)

// read makes a reading of a number from the wire.
func (c *channel) read(number float64, at reading.Stamp) reading.Reading {
	switch {
	case math.IsNaN(number):
		switch c.spec.Role {
		case reading.Emission, reading.EmissionWidth, reading.EmissionStrength:
			// A spectrum without an emission, or without light, is seen by
			// an instrument that works.
			r := c.fail(at, "no emission in the spectrum")
			r.Status = reading.FunctionCheck
			return r
		}
		return c.fail(at, "the instrument says that it has no value")
	case math.IsInf(number, 0):
		return c.fail(at, "the instrument says that it is over its range")
	}
	r := reading.Reading{Channel: c.spec.Name, Role: c.spec.Role, Taken: at, Status: reading.Good}
	if c.spec.Milliamp > 0 {
		current := number * c.spec.Milliamp
		if current <= failedLow || current >= failedHigh {
			return c.fail(at, fmt.Sprintf("the loop carries %s mA: the transmitter reports a failure or the wire is broken", short(current)))
		}
		if current < lowestCurrent || current > highestCurrent {
			r.Status, r.Reason = reading.OutOfSpecification, fmt.Sprintf("the loop carries %s mA, outside 3.8 mA to 20.5 mA", short(current))
		}
	}
	v := c.spec.SI(number)
	if math.IsInf(v, 0) {
		return c.fail(at, "the number is too large")
	}
	if c.spec.HasRange() && (v < c.spec.Low || v > c.spec.High) {
		r.Status, r.Reason = reading.OutOfSpecification, fmt.Sprintf("%s is outside %s to %s", c.text(v), c.low, c.high)
		if c.spec.GasFactor > 0 && v > c.spec.High {
			// In a heavy gas such a gauge reads low without end: what it
			// says there bounds nothing.
			return c.fail(at, r.Reason+", and above it this gauge says nothing in this gas")
		}
	}
	r.Value = c.absolute(number)
	return r
}

// absolute returns the quantity in SI, a pressure absolute, a wavelength in
// vacuum.
func (c *channel) absolute(number float64) float64 {
	v := c.spec.SI(number)
	if c.spec.GasFactor > 0 {
		v *= c.spec.GasFactor
	}
	v += c.shift
	switch {
	case c.spec.Gauge:
		v += float64(c.ambient.Pressure())
	case c.air && c.spec.Role == reading.Emission && v > 0:
		v = float64(air.Vacuum(unit.Metre(v)))
	}
	return v
}

// number returns what to send for an absolute quantity in SI.
func (c *channel) number(v float64) (float64, error) {
	if c.spec.Gauge {
		v -= float64(c.ambient.Pressure())
	}
	if c.spec.HasRange() && !(v >= c.spec.Low && v <= c.spec.High) {
		return 0, fmt.Errorf("setpoint %s is outside the range of the instrument, %s to %s", c.text(v), c.low, c.high)
	}
	n, err := strconv.ParseFloat(strconv.FormatFloat(c.spec.Number(v), 'g', 9, 64), 64)
	if err != nil || math.IsNaN(n) || math.IsInf(n, 0) {
		return 0, fmt.Errorf("setpoint %s has no number on this channel", c.text(v))
	}
	return n, nil
}

// near reports whether a value read back is the one sent: within the
// resolution, or within a thousandth of the range where none is given.
func (c *channel) near(got, sent float64) bool {
	tolerance := c.spec.Step
	if tolerance <= 0 {
		tolerance = max(1e-3*(c.spec.High-c.spec.Low), 1e-3*math.Abs(sent))
	}
	return math.Abs(got-sent) <= tolerance*(1+1e-9)
}

func (c *channel) fail(at reading.Stamp, reason string) reading.Reading {
	return reading.Reading{Channel: c.spec.Name, Role: c.spec.Role, Taken: at, Status: reading.Failure, Reason: reason}
}

// text writes a quantity of the channel for a person.
func (c *channel) text(v float64) string {
	switch {
	case c.spec.Gauge:
		return short(v/1e5) + " bar(g)"
	case c.spec.Role.IsPressure():
		return unit.Pascal(v).String()
	case c.spec.Role.IsTemperature():
		return unit.Kelvin(v).String()
	case c.spec.Role == reading.Emission || c.spec.Role == reading.EmissionWidth:
		return short(v*1e9) + " nm"
	case c.spec.Role == reading.PulseEnergy:
		return short(v*1e6) + " uJ"
	case c.spec.Symbol == "1":
		return short(v*100) + " %"
	}
	return short(v) + " " + c.spec.Symbol
}

func short(v float64) string { return strconv.FormatFloat(v, 'g', 6, 64) }
