package tui

import (
	"math"
	"strconv"
	"strings"
	"time"

	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/tui/frame"
)

const minus = "\u2212"

// fixed writes v with so many decimals and a proper minus sign. What is not a
// number is a dash.
func fixed(v float64, decimals int) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return "–"
	}
	s := strconv.FormatFloat(math.Abs(v), 'f', decimals, 64)
	if v < 0 && math.Abs(v) >= 0.5*math.Pow(10, -float64(decimals)) {
		return minus + s
	}
	return s
}

// signed is fixed with a plus sign.
func signed(v float64, decimals int) string {
	s := fixed(v, decimals)
	if v >= 0.5*math.Pow(10, -float64(decimals)) && !math.IsInf(v, 0) {
		return "+" + s
	}
	return s
}

// pressureText writes a pressure to the millibar, below a tenth of a bar to
// the tenth of a millibar.
func pressureText(p unit.Pascal) string {
	if math.Abs(float64(p)) < 1e4 && p != 0 {
		return fixed(float64(p)/1e2, 1) + " mbar"
	}
	return fixed(p.Bar(), 3) + " bar"
}

// emissionText writes a wavelength with the digits that its uncertainty leaves:
// to the place in which that has one or two figures, at most to a hundredth of
// a nanometre, below which it is written as that.
func emissionText(m, sigma unit.Metre) string {
	s := sigma.Nanometres()
	if !(s > 0) {
		return fixed(m.Nanometres(), 1) + " nm"
	}
	decimals := 2
	switch {
	case s >= 3:
		decimals = 0
	case s >= 0.2:
		decimals = 1
	}
	return fixed(m.Nanometres(), decimals) + " ± " + fixed(max(s, 0.01), decimals) + " nm"
}

// spanText writes a time span in its two leading units.
func spanText(d time.Duration) string {
	d = max(d, 0).Round(time.Second)
	switch h, m, s := int(d.Hours()), int(d.Minutes())%60, int(d.Seconds())%60; {
	case h >= 48:
		return strconv.Itoa(h/24) + " d " + strconv.Itoa(h%24) + " h"
	case h > 0:
		return strconv.Itoa(h) + " h " + strconv.Itoa(m) + " min"
	case m > 0 && s > 0:
		return strconv.Itoa(m) + " min " + strconv.Itoa(s) + " s"
	case m > 0:
		return strconv.Itoa(m) + " min"
	default:
		return strconv.Itoa(s) + " s"
	}
}

// countText groups digits by threes with narrow blanks.
func countText(n uint64) string {
	s := strconv.FormatUint(n, 10)
	for i := len(s) - 3; i > 0; i -= 3 {
		s = s[:i] + " " + s[i:]
	}
	return s
}

// shown is a reading as the screen tells it.
type shown struct {
	value string // with its unit; a dash where there is none
	mark  string // glyph and word of the status
	ink   frame.Ink
	known bool // the value may be believed enough to be drawn
}

// view of one role: value, status and, when it is old, age.
func show(s *live.Snapshot, role reading.Role) shown {
	r := s.Latest[role]
	age, stale := s.Now.Mono-r.Taken.Mono, staleAfter(s)
	status := r.Status
	never := silent(r)
	if status != reading.Failure && age > stale {
		status = reading.Failure // whoever should have said so has not
	}
	out := shown{value: valueText(role, r.Value), ink: frame.Measured, known: true}
	switch status {
	case reading.Good:
		out.mark = "● good"
		if age > stale/2 {
			out.mark, out.ink = "● "+fixed(age.Seconds(), 1)+" s old", frame.Caution
		}
	case reading.MaintenanceRequired:
		out.mark = "◆ maintenance"
	case reading.OutOfSpecification:
		out.mark, out.ink = "△ out of spec.", frame.Caution
	case reading.FunctionCheck:
		out.mark, out.ink, out.known = "○ check", frame.Caution, false
		out.value = valueText(role, math.NaN())
	default:
		out.ink, out.known = frame.Alarm, false
		out.value = valueText(role, math.NaN())
		out.mark = "✕ failure"
		if never {
			out.mark, out.ink = "○ none yet", frame.Faint
		} else if age > stale {
			out.mark = "✕ silent " + spanText(age)
		}
	}
	if math.IsNaN(r.Value) || math.IsInf(r.Value, 0) {
		out.known = false
	}
	return out
}

func staleAfter(s *live.Snapshot) time.Duration {
	if s.Bench != nil && s.Bench.Limits.Stale > 0 {
		return s.Bench.Limits.Stale.Duration()
	}
	return 2 * time.Second
}

// valueText writes a value in the unit that people read its role in.
func valueText(role reading.Role, v float64) string {
	switch role {
	case reading.FibreTemperature, reading.CellTemperature, reading.RoomTemperature:
		return fixed(unit.Kelvin(v).Celsius(), 1) + " °C"
	case reading.PulseEnergy:
		return fixed(unit.Joule(v).Microjoules(), 2) + " µJ"
	case reading.Emission, reading.EmissionWidth:
		return fixed(unit.Metre(v).Nanometres(), 1) + " nm"
	case reading.EmissionStrength, reading.Attenuator:
		return fixed(v*100, 1) + " %"
	case reading.LaserOn:
		switch {
		case math.IsNaN(v):
			return "–"
		case v < 0.5:
			return "off"
		}
		return "on"
	case reading.InletValve, reading.PumpValve, reading.VentValve, reading.ShutterOpen:
		switch {
		case math.IsNaN(v):
			return "–"
		case v < 0.01:
			return "shut"
		case v > 0.99:
			return "open"
		}
		return fixed(v*100, 0) + " % open"
	}
	if math.IsNaN(v) {
		return "– bar"
	}
	return pressureText(unit.Pascal(v))
}

// silent reports whether no channel has ever filled r.
func silent(r reading.Reading) bool { return r.Channel == "" && r.Taken.UTC.IsZero() }

// brief is the mark without what follows its word, for narrow places.
func (r shown) brief() string {
	words := strings.SplitN(r.mark, " ", 3)
	if len(words) < 2 {
		return r.mark
	}
	return words[0] + " " + words[1]
}

// fitted reports whether the bench has a channel of this role.
func fitted(s *live.Snapshot, role reading.Role) bool {
	if !silent(s.Latest[role]) {
		return true
	}
	if s.Bench == nil {
		return false
	}
	for i := range s.Bench.Instrument {
		for j := range s.Bench.Instrument[i].Channel {
			if s.Bench.Instrument[i].Channel[j].Role == role {
				return true
			}
		}
	}
	return false
}
