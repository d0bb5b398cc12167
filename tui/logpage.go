package tui

import (
	"fmt"
	"strings"

	"barline/model/live"
	"barline/tui/frame"
)

// lineText writes a record as one line, its time as every other on the screen.
func lineText(l live.Line, style frame.Style) string {
	text := l.At.UTC.In(style.Location()).Format("15:04:05.0") + "  " + string(l.Kind)
	if l.Text != "" {
		text += "  " + l.Text
	}
	return text
}

// found returns the lines whose kind or text hold what is looked for, whatever
// its case, or with a minus before it those that do not.
func found(lines []live.Line, text string) []live.Line {
	if text == "" {
		return lines
	}
	text, without := strings.CutPrefix(strings.ToLower(text), "-")
	var kept []live.Line
	for _, l := range lines {
		if strings.Contains(strings.ToLower(string(l.Kind)+"  "+l.Text), text) != without {
			kept = append(kept, l)
		}
	}
	return kept
}

// drawLog shows the lines to the instruments and the record as it grows, its
// newest line at the bottom.
func drawLog(a frame.Area, s *live.Snapshot, v view) {
	x := 1
	for _, l := range s.Links {
		text, ink := "● "+l.Instrument, frame.Good
		if !l.Up {
			text, ink = "✕ "+l.Instrument+": "+l.Reason, frame.Alarm
		}
		x = a.Text(x, 0, text, ink) + 3
	}
	x = heading(a.Sub(0, 1, a.W, 1), "record", "")
	if s.Folder != "" {
		x = a.Text(x, 1, s.Folder, frame.Faint) + 2
	}
	lines := found(s.Recent, v.find)
	if v.find != "" {
		a.Text(x, 1, fmt.Sprintf("find %q: %d of %d lines, 0 shows all", v.find, len(lines), len(s.Recent)), frame.Caution)
	}
	rows := a.H - 2
	if n := len(s.Fares); n > 0 && a.H >= roomForFares {
		rows -= n + 1
		drawFares(a.Sub(0, a.H-n-1, a.W, n+1), s.Fares)
	}
	newest := len(lines) - min(v.scroll, max(0, len(lines)-1))
	if v.scroll > 0 && newest < len(lines) {
		a.Right(a.W-1, 1, fmt.Sprintf("%d newer below, 0 goes there", len(lines)-newest), frame.Caution)
	}
	shown := lines[max(0, newest-rows):newest]
	if len(shown) == 0 {
		blank(a.Sub(0, 2, a.W, rows), "no such line yet")
	}
	for i, l := range shown {
		a.Text(1, 2+i, lineText(l, a.Style()), lineInk(l.Kind))
	}
}

// roomForFares is how high the page must be to say how the instruments fare.
const roomForFares = 16

// drawFares says in a line each how the instruments have fared since the start.
func drawFares(a frame.Area, fares []live.Fare) {
	heading(a.Sub(0, 0, a.W, 1), "instruments since the start", "")
	for i, f := range fares {
		text, ink := fareText(f), frame.Faint
		if f.Bad > 0 || f.Silent > 0 || f.Refused > 0 {
			ink = frame.Caution
		}
		a.Text(1, 1+i, text, ink)
	}
}

// fareText leaves out what did not happen.
func fareText(f live.Fare) string {
	text := fmt.Sprintf("%s: %d readings good", f.Instrument, f.Good)
	for _, c := range []struct {
		count uint64
		what  string
	}{{f.Bad, "bad"}, {f.Silent, "without an answer"}, {f.Refused, "refused"}, {f.Resynced, "asked again"}, {f.Stray, "stray bytes"}} {
		if c.count > 0 {
			text += fmt.Sprintf(", %d %s", c.count, c.what)
		}
	}
	if f.RoundTrip > 0 {
		text += fmt.Sprintf(", answers in %.1f ms, slowest %.1f ms", 1e3*f.RoundTrip.Seconds(), 1e3*f.Slowest.Seconds())
	}
	if f.Worst != "" {
		text += "; last: " + f.Worst
	}
	return text
}

// lineInk tells the kinds of record apart; the kind itself stands in the line.
func lineInk(kind live.Kind) frame.Ink {
	switch kind {
	case live.KindAlarm:
		return frame.Alarm
	case live.KindNote:
		return frame.Strong
	case live.KindIntent, live.KindCommand, live.KindReadback:
		return frame.Target
	case live.KindPrediction, live.KindNode, live.KindCalibration:
		return frame.Predicted
	}
	return frame.Plain
}
