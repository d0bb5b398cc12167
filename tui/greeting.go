package tui

import (
	"barline/model/live"
	"barline/tui/frame"
)

// drawGreeting tells a newcomer how to begin.
func drawGreeting(a frame.Area, s *live.Snapshot) {
	what := "The dashboard of a gas-filled hollow-core-fibre ultraviolet source."
	if s.Simulated {
		what = "A simulated bench: no gas and no light, so nothing can break."
	}
	lines := []struct {
		key, text string
	}{
		{"", what},
		{"", ""},
		{"", "Above, the gas path with what the gauges say. Below, the pressure"},
		{"", "over time and the emission over pressure: filled marks are"},
		{"", "measured, open marks and curves are predicted."},
		{"", ""},
		{"Tab", "HOLD, at any time, without asking"},
		{"a", "arm; then s sets a pressure, t tunes, r runs a scan"},
		{"1–5", "pages: bench, spectrum, scan, drift, log"},
		{"?", "every key"},
		{"", ""},
		{"", "Any key closes this."},
	}
	b := box(a, "how to begin", 66, len(lines), frame.Rule)
	for y, l := range lines {
		if l.key == "" {
			b.Text(0, y, l.text, frame.Plain)
			continue
		}
		ink := frame.Keys
		if l.key == "Tab" {
			ink = frame.Hold
		}
		b.Text(2, y, " "+l.key+" ", ink)
		b.Text(9, y, l.text, frame.Plain)
	}
}
