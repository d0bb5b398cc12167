package tui

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"time"

	"barline/model/live"
	"barline/model/reading"
	"barline/tui/frame"
)

// headHeight is the rows that stand at the top of every page: who and when,
// what the bench is doing, what is wrong.
const headHeight = 3

func drawHead(a frame.Area, s *live.Snapshot, v view) {
	drawTitle(a.Sub(0, 0, a.W, 1), s, v)
	drawMode(a.Sub(0, 1, a.W, 1), s)
	drawAlarm(a.Sub(0, 2, a.W, 1), s, v)
}

func drawTitle(a frame.Area, s *live.Snapshot, v view) {
	if s.Replay != "" {
		drawReplayTitle(a, s, v)
		return
	}
	name, gas := "bench", ""
	if s.Bench != nil {
		if s.Bench.Bench.Name != "" {
			name = s.Bench.Bench.Name
		}
		gas = s.Bench.Gas.Species
	}
	x := a.Text(1, 0, name, frame.Strong) + 1
	if gas != "" {
		x = a.Text(x, 0, "· "+gas, frame.Faint) + 1
	}
	if s.Simulated {
		x = a.Text(x+1, 0, "SIMULATED", frame.Caution) + 1
	}
	if s.ReadOnly {
		x = a.Text(x+1, 0, "FOLLOWING", frame.Caution) + 1
	}
	if v.frozen != nil {
		x = a.Text(x+1, 0, " CHARTS FROZEN "+spanText(s.Now.Mono-v.frozen.at)+" ", frame.Cursor) + 1
	}
	clock := "--:--:--"
	if !s.Now.UTC.IsZero() {
		format := "15:04:05 MST"
		if v.plain { // seconds alone would send the line again and again
			format = "15:04 MST"
		}
		clock = s.Now.UTC.In(a.Style().Location()).Format(format)
	}
	right := a.Right(a.W-1, 0, clock, frame.Plain)
	if s.ReadOnly {
		return // the record is another program's, and how it fares is known there
	}
	text, ink := recordText(s)
	if a.Width(text) > right-3-x {
		text = strings.Replace(text, " recording ·", "", 1)
	}
	if v.plain || a.Width(text) > right-3-x {
		text = shortRecord(s)
	}
	a.Sub(x, 0, right-2-x, 1).Right(right-2-x, 0, text, ink)
}

// drawReplayTitle fills the line, so that what is over is never taken for what
// is happening.
func drawReplayTitle(a frame.Area, s *live.Snapshot, v view) {
	a.Fill(' ', frame.Past)
	text := "REPLAY, not live: " + s.Replay
	if v.frozen != nil {
		text += ", charts frozen"
	}
	x := a.Text(1, 0, text, frame.Past) + 2
	when := "--:--:--"
	if !s.Now.UTC.IsZero() {
		when = s.Now.UTC.In(a.Style().Location()).Format("2006-01-02 15:04:05 MST")
	}
	right := a.Right(a.W-1, 0, when, frame.Past) - 2
	if s.Bench == nil {
		return
	}
	who := s.Bench.Bench.Name
	if s.Simulated {
		who += ", simulated"
	}
	if x+a.Width(who) <= right {
		a.Right(right, 0, who, frame.Past)
	}
}

// usualWait is how many records may wait for the disk without a word: they are
// synced in groups, and a number that comes and goes every second only stirs.
const usualWait = 2000

// recordText says how the logbook fares.
func recordText(s *live.Snapshot) (string, frame.Ink) {
	r := s.Record
	text := "● recording"
	ink := frame.Good
	if !r.Writing {
		text, ink = "✕ NOT RECORDED", frame.Alarm
	}
	text += " · " + countText(r.Written) + " written"
	if !r.Writing || r.Waiting > usualWait {
		text += fmt.Sprintf(", %d waiting", r.Waiting)
	}
	if r.Lost > 0 {
		text += ", " + countText(r.Lost) + " LOST"
		ink = frame.Alarm
	}
	if s.Dropped > 0 {
		text += ", " + countText(s.Dropped) + " readings dropped"
		if ink == frame.Good {
			ink = frame.Caution
		}
	}
	return text, ink
}

func shortRecord(s *live.Snapshot) string {
	switch {
	case s.Record.Lost > 0:
		return "✕ " + countText(s.Record.Lost) + " LOST"
	case !s.Record.Writing:
		return "✕ NOT RECORDED"
	}
	return "● recording"
}

// armed reports whether a command that moves gas would be taken now.
func armed(s *live.Snapshot) bool { return s.ArmedUntil > s.Now.Mono }

func modeInk(s *live.Snapshot) frame.Ink {
	switch s.Mode {
	case live.Held:
		return frame.Hold
	case live.Ramping, live.Settling:
		return frame.Target
	case live.Armed:
		return frame.Caution
	}
	return frame.Strong
}

func drawMode(a frame.Area, s *live.Snapshot) {
	word := strings.ToUpper(modeText(s.Mode))
	x := a.Text(1, 0, word, modeInk(s))
	if s.Mode == live.Held {
		a.Sub(0, 0, x+1, 1).Tint(frame.Hold)
	}
	right := a.W - 1
	if set := setpointText(s); set != "" {
		right = a.Right(right, 0, set, frame.Target) - 2
	}
	why := s.Why
	if s.Mode == live.Ramping {
		if why == modeText(s.Mode) {
			why = ""
		}
		why = join(why, rampLeft(s))
	}
	if why == "" || why == modeText(s.Mode) {
		why = ""
		switch {
		case s.Mode == live.Watching && s.Replay != "":
			why = "nothing moved the gas"
		case s.Mode == live.Watching && s.ReadOnly:
			why = "a second screen: nothing can be commanded from here"
		case s.Mode == live.Watching:
			why = "nothing moves gas until it is armed"
		case s.Mode == live.Armed:
			why = "a setpoint would be taken"
		case s.Mode == live.Steady:
			why = "the controller keeps the setpoint"
		}
	}
	if s.SettleIn > 0 && s.Mode != live.Ramping && lagText(s) != "" {
		why = join(why, "core even in "+spanText(s.SettleIn))
	}
	if s.Program.Count > 1 || s.Program.Paused { // a single phase is told by why
		if s.Mode == live.Held { // why it is held matters more than how far it came
			why = join(why, programText(s))
		} else {
			why = join(programText(s), why)
		}
	}
	a.Sub(0, 0, right, 1).Text(max(x+2, 12), 0, why, frame.Plain)
}

func join(a, b string) string {
	if a == "" || b == "" {
		return a + b
	}
	return a + " · " + b
}

func modeText(m live.Mode) string {
	if m > live.Held {
		return "unknown"
	}
	return m.String()
}

// programText says how far a program has come.
func programText(s *live.Snapshot) string {
	p := s.Program
	text := p.Name
	if p.Count > 1 {
		text += fmt.Sprintf(" %d of %d", p.Index+1, p.Count)
	}
	switch {
	case p.Paused:
		text += " PAUSED"
	case p.Dwelling:
		text += ", " + spanText(p.DwellLeft) + " more"
	}
	return text
}

// rampLeft says how long until the gas is at the target, or, where that is not
// known, how long the setpoint still travels at the allowed rate.
func rampLeft(s *live.Snapshot) string {
	if s.ArriveIn > 0 {
		return "there in " + spanText(s.ArriveIn)
	}
	if s.Bench == nil {
		return ""
	}
	rate := s.Bench.Limits.RiseRate
	if s.Target < s.Setpoint {
		rate = s.Bench.Limits.FallRate
	}
	if !(rate > 0) {
		return ""
	}
	left := time.Duration(math.Abs(float64(s.Target-s.Setpoint)) / float64(rate) * 1e9)
	return spanText(left) + " to the target"
}

// setpointText is where the pressure is sent.
func setpointText(s *live.Snapshot) string {
	if s.Setpoint == 0 && s.Target == 0 {
		if !fitted(s, reading.Setpoint) {
			return ""
		}
		if r := show(s, reading.Setpoint); r.known {
			return "setpoint " + r.value
		}
		return "no setpoint yet"
	}
	text := "setpoint " + pressureText(s.Setpoint)
	if s.Target != 0 && s.Target != s.Setpoint {
		text = "setpoint " + strings.TrimSuffix(pressureText(s.Setpoint), " bar") + " → " + pressureText(s.Target)
	}
	return text
}

// worst returns the alarm that the banner shows: the most urgent that nobody
// has seen, else the most urgent.
func worst(s *live.Snapshot) (al live.Alarm, count int) {
	found := false
	for _, next := range s.Alarms {
		if next.Hidden {
			continue
		}
		count++
		if !found || al.Acked && !next.Acked {
			al, found = next, true
		}
	}
	return al, count
}

func drawAlarm(a frame.Area, s *live.Snapshot, v view) {
	if v.late > 0 {
		a.Fill(' ', frame.Banner)
		a.Text(1, 0, "✕ THE PROGRAM HAS SAID NOTHING FOR "+spanText(v.late)+": what you see is old. Look at the gauges", frame.Banner)
		return
	}
	al, count := worst(s)
	if count == 0 {
		drawTabs(a, v.page)
		a = a.Sub(0, 0, a.W-tabsWidth(a), 1)
		x := a.Text(1, 0, "no alarms", frame.Faint)
		if hidden := len(s.Alarms); hidden > 0 {
			x = a.Text(1, 0, fmt.Sprintf("no alarms, %d put aside", hidden), frame.Caution)
		}
		if v.message != "" {
			a.Text(max(x+2, 12), 0, v.message, frame.Caution)
		} else if s.Notice != "" {
			a.Text(max(x+2, 12), 0, s.Notice, frame.Caution)
		}
		return
	}
	text := "▲ ALARM"
	if count > 1 {
		text += fmt.Sprintf(" 1 of %d", count)
	}
	text += "  " + al.Name
	// What happened, what the bench does, what to do. Where that is too long,
	// the name has to stand for the cause; the list has it all.
	rest := sentences(al.Consequence, al.Action)
	if full := sentences(al.Cause, al.Consequence, al.Action); a.Width(text)+2+a.Width(full) < a.W-1 {
		rest = full
	}
	if rest != "" {
		text += ": " + rest
	}
	ink := frame.Banner
	switch {
	case al.Acked && !al.Active:
		ink = frame.Faint
	case al.Acked:
		text = strings.Replace(text, "ALARM", "seen", 1)
		ink = frame.Alarm
	case !al.Active:
		// What is over no longer asks to act at once, only to be seen.
		text = strings.Replace(text, "▲ ALARM", "△ alarm over", 1)
		ink = frame.Caution
	}
	if ink == frame.Banner {
		a.Fill(' ', ink)
	}
	// A message about the key just pressed matters more than the alarm's tail.
	if v.message != "" {
		a.Sub(0, 0, a.W, 1).Text(1, 0, text[:len("▲")]+" "+al.Name+" · "+v.message, ink)
		return
	}
	a.Text(1, 0, text, ink)
}

// sentences joins what is not empty.
func sentences(parts ...string) string {
	text := ""
	for _, p := range parts {
		if p == "" {
			continue
		}
		if text != "" {
			text += "; "
		}
		text += strings.TrimSuffix(p, ".")
	}
	return text
}

// drawTabs names the pages and the keys that turn to them.
func drawTabs(a frame.Area, page Page) {
	x := a.W - tabsWidth(a)
	for p := range pageCount {
		ink := frame.Faint
		if p == page {
			ink = frame.Strong
		}
		from := x
		x = a.Text(x, 0, strconv.Itoa(int(p)+1), frame.Keys)
		x = a.Text(x+1, 0, p.String(), ink) + 2
		a.Sub(from, 0, x-from-1, 1).Name(pagePlace + strconv.Itoa(int(p)))
	}
}

func tabsWidth(a frame.Area) int {
	w := 0
	for p := range pageCount {
		w += a.Width(p.String()) + 4
	}
	return w
}

// drawSmall keeps the essentials where no page fits.
func drawSmall(a frame.Area, s *live.Snapshot, v view) {
	y := 0
	line := func(text string, ink frame.Ink) {
		if y < a.H {
			a.Text(0, y, text, ink)
			y++
		}
	}
	if s.Replay != "" {
		line("REPLAY, not live", frame.Past)
	}
	p, mark, ink := mainPressure(s)
	line(p+" "+mark, ink)
	key := " · Tab: HOLD"
	if s.Replay != "" {
		key = " then"
	} else if s.ReadOnly {
		key = " · HOLD at the first screen"
	}
	line(strings.ToUpper(modeText(s.Mode))+key, modeInk(s))
	if v.late > 0 {
		line("✕ OLD: silent "+spanText(v.late), frame.Banner)
	}
	if al, count := worst(s); count > 0 {
		line("▲ "+al.Name, frame.Banner)
	}
	if !s.Record.Writing && !s.ReadOnly {
		line("✕ NOT RECORDED", frame.Alarm)
	}
	if e := show(s, reading.Emission); fitted(s, reading.Emission) {
		line(e.value+" "+e.mark, e.ink)
	}
	line(fmt.Sprintf("%d×%d is too small,", a.W, a.H), frame.Faint)
	line(fmt.Sprintf("%d×%d shows the page", minWidth, minHeight), frame.Faint)
}

// mainPressure is the one pressure to show where there is room for one: cell
// A's gauge, else the next that is fitted.
func mainPressure(s *live.Snapshot) (text, mark string, ink frame.Ink) {
	for _, role := range []reading.Role{reading.CellAPressure, reading.CellBPressure, reading.ControllerSensor, reading.ManifoldPressure} {
		if r := show(s, role); r.known {
			return r.value, r.mark, r.ink
		}
	}
	r := show(s, reading.CellAPressure)
	return r.value, r.mark, r.ink
}

// frozen is a snapshot kept for reading while the bench goes on.
type frozen struct {
	snapshot *live.Snapshot
	at       time.Duration
}

// over returns now with the charts of then: values, mode, alarms and the state
// of the record are never frozen.
func (f *frozen) over(now *live.Snapshot) *live.Snapshot {
	mixed := *now
	mixed.PressureA, mixed.Expected, mixed.Residuals = f.snapshot.PressureA, f.snapshot.Expected, f.snapshot.Residuals
	mixed.Trends = f.snapshot.Trends
	mixed.Spectrum, mixed.Propagated = f.snapshot.Spectrum, f.snapshot.Propagated
	return &mixed
}
