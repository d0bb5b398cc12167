package tui

import (
	"fmt"
	"math"
	"sort"
	"strconv"
	"strings"
	"time"

	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/tui/frame"
)

// armWord is typed in full before the bench is armed.
const armWord = "arm"

func drawFoot(a frame.Area, s *live.Snapshot, v view) {
	x := 1
	if s.Replay != "" {
		x = a.Text(0, 0, " REPLAY ", frame.Past) + 2
	} else if s.ReadOnly {
		x = a.Text(x, 0, "second screen: HOLD at the first", frame.Caution) + 2
	} else {
		x = a.Text(0, 0, " Tab HOLD ", frame.Hold) + 2
	}
	if armed(s) {
		left := s.ArmedUntil - s.Now.Mono
		if v.plain { // the line is not sent again for each second
			left = (left + plainStep - 1) / plainStep * plainStep
		}
		at := a.Right(a.W-1, 0, "armed "+spanText(left), frame.Caution)
		a = a.Sub(0, 0, at-2, 1)
	}
	put := func(key, what string) {
		if x+a.Width(key)+1+a.Width(what) > a.W {
			return
		}
		x = a.Text(x, 0, key, frame.Keys)
		x = a.Text(x+1, 0, what, frame.Faint) + 2
	}
	if v.typing() || v.overlay == leaveOverlay || v.overlay == cautionOverlay {
		put("Enter", "do it")
		put("Esc", "close")
		return
	}
	put("?", "keys")
	al, alarms := worst(s)
	if alarms > 0 {
		if !al.Acked && !s.ReadOnly {
			put("k", "seen")
		}
		put("l", "alarms")
		put("1–"+strconv.Itoa(int(pageCount)), "pages") // their names stand where the alarm is
	}
	for _, b := range bindings[1:] {
		if b.short == "" || !b.shown(s) || (b.key == "s" || b.key == "t") && !armed(s) || b.key == "p" && s.Program.Count == 0 {
			continue
		}
		put(b.footLabel(), b.short)
	}
}

// box clears a framed rectangle in the middle of a and returns its inside.
func box(a frame.Area, title string, w, h int, ink frame.Ink) frame.Area {
	w, h = min(w+4, a.W), min(h+2, a.H)
	b := a.Sub((a.W-w)/2, (a.H-h)/2, w, h)
	b.Fill(' ', frame.Plain)
	for x := 1; x < b.W-1; x++ {
		b.Set(x, 0, '─', ink)
		b.Set(x, b.H-1, '─', ink)
	}
	for y := 1; y < b.H-1; y++ {
		b.Set(0, y, '│', ink)
		b.Set(b.W-1, y, '│', ink)
	}
	b.Set(0, 0, '┌', ink)
	b.Set(b.W-1, 0, '┐', ink)
	b.Set(0, b.H-1, '└', ink)
	b.Set(b.W-1, b.H-1, '┘', ink)
	b.Text(2, 0, " "+title+" ", frame.Strong)
	return b.Sub(2, 1, b.W-4, b.H-2)
}

func drawOverlay(a frame.Area, s *live.Snapshot, v view) {
	switch v.overlay {
	case helpOverlay:
		drawHelp(a, s)
	case armOverlay:
		drawArming(a, s, v)
	case setpointOverlay:
		drawSetpoint(a, s, v)
	case noteOverlay:
		b := box(a, "note for the record", 64, 3, frame.Rule)
		input(b.Sub(0, 1, b.W, 1), v.text)
	case alarmOverlay:
		drawAlarms(a, s, min(v.pick, len(s.Alarms)-1))
	case runOverlay:
		drawRunForm(a, s, v)
	case tuneOverlay:
		drawTune(a, s, v)
	case findOverlay:
		b := box(a, "find in the record", 64, 3, frame.Rule)
		b.Text(0, 0, "a word; with a minus before it, lines without the word", frame.Faint)
		input(b.Sub(0, 2, b.W, 1), v.text)
	case orderOverlay:
		b := box(a, "valve, pulse energy, zero of a gauge", 64, 4, frame.Caution)
		b.Text(0, 0, `"open inlet", "shut vent", "energy 1.2 uJ",`, frame.Faint)
		b.Text(0, 1, `"zero cell A at 1.013 bar": the pressure that it is at now`, frame.Faint)
		input(b.Sub(0, 3, b.W, 1), v.text)
	case greetOverlay:
		drawGreeting(a, s)
	case cautionOverlay:
		drawCaution(a, v)
	case calibrationOverlay:
		drawCalibrations(a, s, v.pick)
	case stepOverlay:
		drawStepBox(a, s, v)
	case leaveOverlay:
		b := box(a, "leave", 50, 3, frame.Caution)
		b.Text(0, 0, "The bench is put on HOLD and the record closed.", frame.Plain)
		b.Text(0, 2, "Enter leaves, any other key stays.", frame.Faint)
	}
}

// input draws what has been typed, its end always in sight.
func input(a frame.Area, text string) {
	a.Text(0, 0, ">", frame.Faint)
	r := []rune(text)
	for a.Width(string(r)) > a.W-4 {
		r = r[1:]
	}
	x := a.Text(2, 0, string(r), frame.Measured)
	a.Set(x, 0, ' ', frame.Cursor)
}

// drawHelp lists every key, those of the bench on the left and those of the
// screen on the right, and what the marks mean.
func drawHelp(a frame.Area, s *live.Snapshot) {
	legend := []struct {
		mark, text string
		ink        frame.Ink
	}{
		{"HOLD", "shuts inlet, pump and vent, and freezes the setpoint", frame.Hold},
		{"● ▲ ▼", "measured: now, pressure rising, falling; n ! c: note, alarm, command", frame.Measured},
		{"◇ ╌", "predicted, by the answer beside it; band: one standard uncertainty", frame.Predicted},
		{"✕ ○ △ ◆", "failure, function check, out of specification, maintenance", frame.Alarm},
	}
	rows := [2]int{}
	for _, k := range bindings {
		if !k.shown(s) {
			continue
		}
		rows[column(k)]++
	}
	most := max(rows[0], rows[1])
	b := box(a, "keys", 76, most+len(legend), frame.Rule)
	y := [2]int{}
	for _, k := range bindings {
		if !k.shown(s) {
			continue
		}
		side := column(k)
		half := b.Sub(side*37, 0, 39, b.H)
		ink := frame.Keys
		if k.key == "tab" {
			ink = frame.Hold
		}
		half.Right(7, y[side], k.label, ink)
		half.Text(8, y[side], k.says(s), frame.Plain)
		y[side]++
	}
	for i, m := range legend {
		b.Right(7, most+i, m.mark, m.ink)
		b.Text(8, most+i, m.text, frame.Faint)
	}
}

func column(k binding) int {
	if k.screen {
		return 1
	}
	return 0
}

func drawArming(a frame.Area, s *live.Snapshot, v view) {
	b := box(a, "arm the bench", 66, 9, frame.Caution)
	b.Text(0, 0, "Compressed gas, pressure windows, class-4 laser light.", frame.Caution)
	b.Text(0, 1, "Ratings, relief valve and hardware interlocks come first;", frame.Plain)
	b.Text(0, 2, "this program replaces none of them. Is the room aired, are eyes", frame.Plain)
	b.Text(0, 3, "and hands protected, does everybody here know?", frame.Plain)
	arming := 2 * time.Minute
	if s.Bench != nil && s.Bench.Limits.Arming > 0 {
		arming = s.Bench.Limits.Arming.Duration()
	}
	b.Text(0, 5, fmt.Sprintf("Type %s and press Enter. It lapses after %s without a command.", armWord, spanText(arming)), frame.Plain)
	input(b.Sub(0, 7, b.W, 1), v.text)
	b.Text(0, 8, v.message, frame.Caution)
}

// parseTarget reads a pressure as a person types it and checks it against the
// limits of the bench.
func parseTarget(s *live.Snapshot, text string) (unit.Pascal, error) {
	var target unit.Pascal
	if unit.IsGauge(text) {
		g, err := unit.ParseGauge(text)
		if err != nil {
			return 0, err
		}
		ambient, err := ambientPressure(s)
		if err != nil {
			return 0, err
		}
		target = g.Absolute(ambient)
	} else {
		p, err := unit.ParsePressure(text)
		if err != nil {
			return 0, err
		}
		target = p
	}
	if s.Bench == nil {
		return 0, fmt.Errorf("no bench file: its limits are not known")
	}
	if err := s.Bench.Limits.Enforced().Admissible(target); err != nil {
		return 0, err
	}
	return target, nil
}

func ambientPressure(s *live.Snapshot) (unit.Pascal, error) {
	if r := show(s, reading.Ambient); r.known {
		return unit.Pascal(s.Latest[reading.Ambient].Value), nil
	}
	if s.Bench != nil && s.Bench.Panel.Ambient > 0 {
		return s.Bench.Panel.Ambient, nil
	}
	return 0, fmt.Errorf("a gauge pressure needs the ambient pressure, and none is known")
}

func drawSetpoint(a frame.Area, s *live.Snapshot, v view) {
	b, below, planned := formBox(a, "go to pressure", v)
	if planned {
		at, err := parseTarget(s, v.text)
		if err != nil {
			at = s.Setpoint
		}
		wanted, _, _ := onCurve(s.Curve, at)
		drawPlan(below, v.planned, s, wanted, at)
	}
	from := s.Setpoint
	now, _, _ := mainPressure(s)
	b.Text(0, 0, "now "+now+". Absolute, with its unit: 9.2 bar, 920 kPa, 3 bar(g)", frame.Faint)
	input(b.Sub(0, 2, b.W, 1), v.text)
	if v.text == "" {
		return
	}
	target, err := parseTarget(s, v.text)
	if err != nil {
		wrap(b.Sub(0, 4, b.W, 3), err.Error(), frame.Caution)
		return
	}
	b.Text(0, 4, outlook(s, from, target), frame.Plain)
	if text := emissionAt(s, target); text != "" {
		b.Text(0, 5, text, frame.Predicted)
	}
}

// outlook says what a setpoint would mean: distance to the limit and time.
func outlook(s *live.Snapshot, from, target unit.Pascal) string {
	l := s.Bench.Limits.Enforced()
	low := l.Lowest()
	text := fmt.Sprintf("%s: %s below the rating of %s", pressureText(target), pressureText(low.Max-target), low.Part)
	if target == low.Max {
		text = fmt.Sprintf("%s: at the rating of %s", pressureText(target), low.Part)
	}
	rate := l.RiseRate
	if target < from {
		rate = l.FallRate
	}
	if rate > 0 && target != from {
		seconds := math.Abs(float64(target-from)) / float64(rate)
		text += ", " + spanText(time.Duration(seconds*1e9))
	}
	return text
}

// onCurve returns the emission of the curve at a pressure, straight between
// its points; ok is false beyond its ends and where it has none.
func onCurve(curve []emission.CurvePoint, p unit.Pascal) (at, sigma unit.Metre, ok bool) {
	i := sort.Search(len(curve), func(i int) bool { return curve[i].Pressure >= p })
	if i == 0 && len(curve) > 0 && curve[0].Pressure == p {
		return curve[0].Emission, curve[0].Sigma, curve[0].Emission > 0
	}
	if i == 0 || i == len(curve) {
		return 0, 0, false
	}
	a, b := curve[i-1], curve[i]
	if !(a.Emission > 0) || !(b.Emission > 0) || !(b.Pressure > a.Pressure) {
		return 0, 0, false
	}
	f := unit.Metre((p - a.Pressure) / (b.Pressure - a.Pressure))
	return a.Emission + f*(b.Emission-a.Emission), a.Sigma + f*(b.Sigma-a.Sigma), true
}

// emissionAt reads the predicted emission off the snapshot's curve.
func emissionAt(s *live.Snapshot, p unit.Pascal) string {
	if emission, sigma, ok := onCurve(s.Curve, p); ok {
		answer := ""
		if s.Prediction.Valid {
			answer = " " + s.Prediction.Answer.String()
		}
		return "◇ emission " + emissionText(emission, sigma) + answer
	}
	if len(s.Curve) > 0 {
		return "◇ no emission predicted there"
	}
	return ""
}

// wrap draws text over several lines, broken at blanks.
func wrap(a frame.Area, text string, ink frame.Ink) int {
	y, line := 0, ""
	flush := func() {
		a.Text(0, y, line, ink)
		y, line = y+1, ""
	}
	for _, word := range strings.Fields(text) {
		if line != "" && a.Width(line)+1+a.Width(word) > a.W {
			flush()
		}
		if line != "" {
			line += " "
		}
		line += word
	}
	if line != "" {
		flush()
	}
	return y
}

// drawAlarms lists the alarms, the chosen one in sight.
func drawAlarms(a frame.Area, s *live.Snapshot, pick int) {
	if len(s.Alarms) == 0 {
		b := box(a, "alarms", 40, 1, frame.Rule)
		b.Text(0, 0, "none", frame.Faint)
		return
	}
	b := box(a, "alarms", a.W-8, min(a.H-2, 4*len(s.Alarms)), frame.Alarm)
	y := 0
	first := min(max(pick, 0), len(s.Alarms)-1)
	for first > 0 && (first+1)*4 > b.H && pick-first < b.H/4-1 {
		first--
	}
	for i, al := range s.Alarms[first:] {
		if y+3 > b.H {
			b.Right(b.W, b.H-1, fmt.Sprintf(" and %d more", len(s.Alarms)-first-i), frame.Caution)
			return
		}
		b.Sub(0, y, b.W, 3).Name(alarmPlace + strconv.Itoa(first+i))
		if first+i == pick {
			b.Set(0, y, '▶', frame.Keys)
		}
		state, ink := "▲ active, not seen", frame.Alarm
		switch {
		case al.Active && al.Acked:
			state, ink = "▲ active, seen", frame.Caution
		case !al.Active && !al.Acked:
			state, ink = "△ over, not seen", frame.Caution
		case !al.Active:
			state, ink = "△ over, seen", frame.Faint
		}
		if al.Hidden {
			state, ink = "○ "+al.State, frame.Faint
		}
		x := b.Text(2, y, al.Since.UTC.In(a.Style().Location()).Format("15:04:05")+" ", frame.Faint)
		b.Text(x, y, al.Name, frame.Strong)
		b.Right(b.W, y, state, ink)
		y++
		y += wrap(b.Sub(11, y, b.W-11, 3), sentences(al.Cause, al.Consequence, al.Action), frame.Plain) + 1
	}
}
