package tui

import (
	"fmt"
	"strings"
	"time"

	"barline/model/calibration"
	"barline/model/drift"
	"barline/model/live"
	"barline/tui/frame"
)

// verdictText says what stands, in a few words.
func verdictText(s *live.Snapshot, zone *time.Location) (string, frame.Ink) {
	d := &s.Drift
	switch {
	case !d.Watched:
		return "drift is not watched: the bench file has no [drift] wavelength", frame.Faint
	case d.Standing:
		since := d.Changed.UTC.In(zone).Format("15:04")
		lead := "▲ " + shiftOf(d) + " since " + since
		if d.RunsAway {
			lead += ", never still since then"
		}
		return lead, frame.Alarm
	case d.Learnt:
		return "● quiet at " + pressureText(s.Core) + ": nothing has moved", frame.Good
	case d.Since.Mono == 0:
		return "○ nothing is at rest yet", frame.Faint
	}
	text := "○ learning what is quiet at " + pressureText(s.Core) + ", for " + spanText(s.Now.Mono-d.Since.Mono)
	if d.Why != "" {
		text += ": " + d.Why
	}
	return text, frame.Caution
}

// shiftOf writes what moved most, by how much.
func shiftOf(d *live.DriftView) string {
	t := drift.Track{}
	if int(d.By) < len(d.Tracks) {
		t = d.Tracks[d.By]
	}
	share := func() float64 {
		if t.Quiet.Mean == 0 {
			return 0
		}
		return 100 * t.Shift / t.Quiet.Mean
	}
	switch d.By {
	case drift.Wavelength:
		return signed(t.Shift*1e9, 2) + " nm"
	case drift.Strength:
		return "strength " + signed(share(), 0) + " %"
	case drift.Width:
		return "width " + signed(share(), 0) + " %"
	case drift.Metered:
		return "pulse energy " + signed(share(), 1) + " %"
	case drift.Disagreement:
		return "cell A " + minus + " cell B " + signed(t.Shift*1e-2, 0) + " mbar"
	case drift.Warmth:
		return "fibre temperature " + signed(t.Shift, 1) + " K"
	}
	return "pressure, all valves shut, " + signed(d.Decay.Slope*0.6, 2) + " mbar/min"
}

// paragraph is one line or more of the verdict.
type paragraph struct {
	indent int
	text   string
	ink    frame.Ink
}

// paragraphs is all that the verdict says, the most urgent first.
func paragraphs(s *live.Snapshot, zone *time.Location, causes int) (list []paragraph) {
	d := &s.Drift
	add := func(indent int, text string, ink frame.Ink) { list = append(list, paragraph{indent, text, ink}) }
	text, ink := verdictText(s, zone)
	add(1, text, ink)
	if d.Standing {
		if len(d.Findings) == 0 {
			add(1, "without a prediction no cause can be named", frame.Faint)
		}
		for i, f := range d.Findings {
			if i == causes || f.Probability < 0.01 && i > 0 {
				break
			}
			line := fmt.Sprintf("%3.0f %%  %s", 100*f.Probability, f.Cause.Name)
			if f.Cause.Text != nil {
				line += ", " + f.Cause.Text(f.Amount)
			}
			add(1, line, frame.Plain)
		}
		if len(d.Findings) > 0 {
			if same := d.Alike[d.Findings[0].Cause.Name]; len(same) > 0 {
				add(1, d.Findings[0].Cause.Name+" cannot be told from "+strings.Join(same, ", ")+" from here", frame.Faint)
			}
		}
		switch {
		case len(d.Steps) > 0:
			n := d.Steps[0]
			add(1, fmt.Sprintf("next: %s, about %s, then %.0f %% sure (j)", n.Step.Name, spanText(n.Step.Cost.Round(time.Minute)), 100*n.Certain), frame.Target)
		case len(d.Findings) > 0:
			add(1, "no step would tell more from here", frame.Faint)
		}
	}
	add(1, calibrationText(s), frame.Predicted)
	return list
}

// calibrationText says on which calibration the prediction stands.
func calibrationText(s *live.Snapshot) string {
	k := &s.Calibrations
	switch {
	case k.Fitting:
		return "◇ fitting a calibration"
	case k.InUse == nil:
		return "◇ no calibration in use (i)"
	case k.Why != "":
		return "◇ calibration " + k.InUse.Name + " not yet: " + k.Why
	}
	text := "◇ calibration " + k.InUse.Name + ", " + rangeText(k.InUse)
	if s.Prediction.Beyond {
		text += ", BEYOND its data here"
	}
	return text + " (i)"
}

func rangeText(c *calibration.Calibration) string {
	return fixed(c.PressurePa[0]*1e-5, 2) + " to " + fixed(c.PressurePa[1]*1e-5, 2) + " bar"
}

// verdictHeight is how many lines the verdict takes at a width, with three
// causes.
func verdictHeight(w int, s *live.Snapshot) int {
	h := 0
	for _, p := range paragraphs(s, time.UTC, 3) {
		h += 1 + (len([]rune(p.text))+p.indent)/max(w-2, 1)
	}
	return h
}

func drawVerdict(a frame.Area, s *live.Snapshot) {
	y, causes := 0, 3
	roomy := a.H > 14
	if roomy {
		heading(a, "what moved, and why", "")
		y, causes = 1, 8
	}
	for _, p := range paragraphs(s, a.Style().Location(), causes) {
		if y >= a.H {
			return
		}
		y += wrap(a.Sub(p.indent, y, a.W-p.indent, a.H-y), p.text, p.ink)
	}
	if !roomy {
		return
	}
	y = drawSteps(a, s, y+1)
	drawPlaces(a, s, y+1)
}

// drawSteps lists what would tell the causes apart.
func drawSteps(a frame.Area, s *live.Snapshot, y int) int {
	if len(s.Drift.Steps) < 2 || y+3 > a.H {
		return y
	}
	heading(a.Sub(0, y, a.W, 1), "what would tell them apart", "")
	y++
	for _, n := range s.Drift.Steps {
		if y >= a.H {
			return y
		}
		who := ""
		if n.Program == nil {
			who = ", by hand"
		}
		y += wrap(a.Sub(1, y, a.W-1, a.H-y), fmt.Sprintf("%s: %.2f bit in %s%s", n.Step.Name, n.Bits, spanText(n.Step.Cost.Round(time.Minute)), who), frame.Plain)
	}
	return y
}

// drawPlaces says what was learnt, and how it is judged.
func drawPlaces(a frame.Area, s *live.Snapshot, y int) {
	if y+2 > a.H {
		return
	}
	heading(a.Sub(0, y, a.W, 1), "what was quiet here", "")
	y++
	for o, t := range s.Drift.Tracks {
		if !t.Charted || y >= a.H {
			continue
		}
		scale, in, decimals := 1e9, "nm", 3
		switch drift.Observable(o) {
		case drift.Strength:
			scale, in = 100, "%"
		case drift.Disagreement:
			scale, in, decimals = 1e-2, "mbar", 2
		case drift.Metered:
			scale, in = 1e6, "µJ"
		case drift.Warmth:
			scale, in, decimals = 1, "K", 3
		}
		a.Text(1, y, drift.Observable(o).String(), frame.Plain)
		a.Right(a.W, y, fmt.Sprintf("± %s %s, groups of %s", fixed(t.Quiet.Sigma*scale, decimals), in, spanText(t.Quiet.Group)), frame.Faint)
		y++
	}
	if y < a.H && !s.Drift.Learnt {
		a.Text(1, y, "nothing yet", frame.Faint)
		y++
	}
	if y < a.H && s.Folder != "" {
		wrap(a.Sub(1, y, a.W-1, a.H-y), "with the last good day: barline drift "+s.Folder, frame.Faint)
	}
}

// drawStepBox shows the step that would tell best, as the procedure that it is.
func drawStepBox(a frame.Area, s *live.Snapshot, v view) {
	d := &s.Drift
	b := box(a, "drift", a.W-10, a.H-2, frame.Target)
	y := 0
	put := func(text string, ink frame.Ink) {
		if y < b.H-1 {
			y += wrap(b.Sub(0, y, b.W, b.H-1-y), text, ink)
		}
	}
	if d.Standing {
		put(d.Text, frame.Plain)
	} else {
		text, ink := verdictText(s, a.Style().Location())
		put(text, ink)
	}
	y++
	foot := "u: now is good, learn anew. Esc closes."
	if len(d.Steps) == 0 {
		put("There is no step to offer: it takes two causes or more that something could tell apart.", frame.Faint)
	} else {
		n := d.Steps[min(v.pick, len(d.Steps)-1)]
		put(fmt.Sprintf("%d of %d: %s. %.2f bit expected; about %s.", min(v.pick, len(d.Steps)-1)+1, len(d.Steps), n.Step.Name, n.Bits, spanText(n.Step.Cost.Round(time.Minute))), frame.Target)
		if n.Program == nil {
			put("By hand: "+n.ByHand+".", frame.Plain)
		} else {
			for _, line := range strings.Split(strings.TrimSpace(n.Procedure()), "\n") {
				if y < b.H-1 && !strings.HasPrefix(line, "#") && line != "" {
					b.Text(2, y, line, frame.Faint)
					y++
				}
			}
			foot = "Enter, armed: run it. " + foot
		}
	}
	b.Text(0, b.H-1, foot, frame.Strong)
}

// pressStep answers a key while the step is shown.
func (v view) pressStep(s *live.Snapshot, key string) (view, []live.Intent) {
	steps := s.Drift.Steps
	switch key {
	case "up":
		v.pick = max(v.pick-1, 0)
	case "down":
		v.pick = min(v.pick+1, max(len(steps)-1, 0))
	case "u":
		v = v.open(noOverlay)
		if s.ReadOnly {
			v.message = elsewhere(s)
			return v, nil
		}
		v.message = "learning anew: what is now counts as good"
		return v, []live.Intent{live.LearnAnew{}}
	case "enter":
		switch {
		case len(steps) == 0 || steps[min(v.pick, len(steps)-1)].Program == nil:
			v.message = "there is nothing to run: a person has to do it"
		case s.ReadOnly:
			v.message = elsewhere(s)
		case !armed(s):
			v.message = "not armed: close this, press a, then j"
		default:
			p := steps[min(v.pick, len(steps)-1)].Program
			v = v.open(noOverlay)
			return v.careful(s, p, live.Run{Program: p})
		}
	default:
		v = v.open(noOverlay)
	}
	return v, nil
}

// drawCalibrations lists calibrations, the chosen one beside the one in use.
func drawCalibrations(a frame.Area, s *live.Snapshot, pick int) {
	k := &s.Calibrations
	b := box(a, "calibrations", a.W-4, a.H-1, frame.Predicted)
	foot := "u: use it. b: back to the one before. n: fit the last scan. Esc closes."
	b.Text(0, b.H-1, foot, frame.Strong)
	if len(k.Known) == 0 {
		wrap(b.Sub(0, 0, b.W, b.H-2), "None yet. A scan of pressures (r) and then n makes one; so does barline fit.", frame.Plain)
		return
	}
	pick = min(max(pick, 0), len(k.Known)-1)
	shown := min(len(k.Known), max(1, b.H/3))
	first := min(max(pick-shown/2, 0), len(k.Known)-shown)
	y := 0
	for i := first; i < first+shown; i++ {
		// The newest stands first.
		c := k.Known[len(k.Known)-1-i]
		mark, ink := ' ', frame.Plain
		if i == pick {
			mark, ink = '▶', frame.Strong
		}
		b.Set(0, y, mark, frame.Keys)
		name := c.Name
		if c == k.InUse {
			name = "● " + name
		}
		b.Text(2, y, name, ink)
		b.Right(b.W, y, rangeText(c)+fmt.Sprintf(", %d points, %s nm rms", c.Points, fixed(c.After*1e9, 2)), frame.Faint)
		y++
	}
	y++
	drawCompared(b.Sub(0, y, b.W, b.H-1-y), k.Known[len(k.Known)-1-pick], k.InUse)
}

// drawCompared lays a calibration beside the one in use, or the bench file.
func drawCompared(a frame.Area, c, use *calibration.Calibration) {
	beside := "the bench file"
	if c == use {
		use = nil
	}
	if use != nil {
		beside = "in use"
	}
	a.Text(1, 0, "correction", frame.Faint)
	a.Right(44, 0, "chosen", frame.Faint)
	a.Right(66, 0, beside, frame.Faint)
	a.Right(min(a.W, 74), 0, "apart", frame.Faint)
	y := 1
	for _, d := range calibration.Compare(use, c) {
		if y >= a.H {
			return
		}
		a.Text(1, y, d.Parameter.String(), frame.Plain)
		a.Right(44, y, valueOf(d.Parameter, d.Other, d.OtherSigma), frame.Predicted)
		a.Right(66, y, valueOf(d.Parameter, d.One, d.OneSigma), frame.Plain)
		a.Right(min(a.W, 74), y, fixed(max(d.Sigmas, -d.Sigmas), 1)+" σ", frame.Faint)
		y++
	}
	if y < a.H {
		wrap(a.Sub(1, y, a.W-1, a.H-y), fmt.Sprintf("measured %s predicted: %s nm rms before, %s nm after, chi² %s; made %s from %s",
			minus, fixed(c.Before*1e9, 2), fixed(c.After*1e9, 2), fixed(c.Reduced, 2), c.Made.In(a.Style().Location()).Format("2006-01-02 15:04"), c.Data), frame.Faint)
	}
}

func valueOf(p calibration.Parameter, v, sigma float64) string {
	if v == 0 && sigma == 0 {
		return "as stated"
	}
	text := p.Format(v)
	if sigma > 0 {
		text += " ± " + strings.TrimPrefix(p.Format(sigma), "+")
	}
	return strings.ReplaceAll(text, "-", minus)
}

// pressCalibration answers a key while calibrations are listed.
func (v view) pressCalibration(s *live.Snapshot, key string) (view, []live.Intent) {
	n := len(s.Calibrations.Known)
	step := map[string]int{"up": -1, "down": 1, "pgup": -aPage, "pgdown": aPage}[key]
	var in live.Intent
	switch key {
	case "up", "down", "pgup", "pgdown":
		v.pick = min(max(v.pick+step, 0), max(n-1, 0))
		return v, nil
	case "u":
		if n == 0 {
			v.message = "there is no calibration yet"
			return v, nil
		}
		in = live.Adopt{Name: s.Calibrations.Known[n-1-min(v.pick, n-1)].Name}
	case "b":
		in = live.Revert{}
	case "n":
		in = live.Calibrate{}
	default:
		v = v.open(noOverlay)
		return v, nil
	}
	if s.ReadOnly {
		v.message = elsewhere(s)
		return v, nil
	}
	return v, []live.Intent{in}
}

// pressDrift opens the list of calibrations (i) or the step that would tell
// (j).
func pressDrift(v view, _ *live.Snapshot, key string) (view, []live.Intent) {
	v.pick = 0
	if key == "i" {
		return v.toggle(calibrationOverlay), nil
	}
	return v.toggle(stepOverlay), nil
}

// calibratedAt is what the emission map says of the calibration in use.
func calibratedAt(s *live.Snapshot) string {
	if c := s.Calibrations.InUse; c != nil && s.Calibrations.Why == "" {
		text := ", " + c.Name
		if s.Prediction.Beyond {
			text += ", beyond its " + rangeText(c)
		}
		return text
	}
	return ""
}
