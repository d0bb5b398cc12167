package tui

import (
	"fmt"
	"math"
	"strings"
	"time"

	"barline/model/live"
	"barline/model/procedure"
	"barline/model/unit"
	"barline/tui/frame"
)

func pressRun(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	if !armed(s) {
		v.message = "not armed: press a first"
		return v, nil
	}
	v = v.open(runOverlay)
	return v, nil
}

// pressProgram pauses the program that is under way or goes on with it (p),
// ends it (x), or tells it that what it asks for is done (y).
func pressProgram(v view, s *live.Snapshot, key string) (view, []live.Intent) {
	switch {
	case s.Program.Count == 0:
		v.message = "no program is under way"
	case key == "x":
		return v, []live.Intent{live.Stop{}}
	case key == "y" && s.Program.Asks == "":
		v.message = "the program asks for nothing"
	case key == "y":
		return v, []live.Intent{live.Confirm{}}
	case !s.Program.Paused:
		return v, []live.Intent{live.Pause{}}
	case !armed(s):
		v.message = "not armed: press a, then p"
	default:
		return v, []live.Intent{live.Resume{}}
	}
	return v, nil
}

// scanExample is how a scan is written: from, to, step, dwell; "back" comes
// down again the same way.
const scanExample = "7 bar : 12 bar : 0.5 bar : 20 s : back"

// parseScan reads a scan as a person types it and checks it against the limits
// of the bench.
func parseScan(s *live.Snapshot, text string) (*live.Program, error) {
	parts := strings.Split(text, ":")
	for i := range parts {
		parts[i] = strings.TrimSpace(parts[i])
	}
	back := len(parts) == 5 && parts[4] == "back"
	if len(parts) != 4 && !back {
		return nil, fmt.Errorf("expected from : to : step : dwell, such as %s", scanExample)
	}
	from, err := parseTarget(s, parts[0])
	if err != nil {
		return nil, err
	}
	to, err := parseTarget(s, parts[1])
	if err != nil {
		return nil, err
	}
	step, err := unit.ParsePressure(parts[2])
	if err != nil {
		return nil, err
	}
	dwell, err := unit.ParseSecond(parts[3])
	if err != nil {
		return nil, err
	}
	if !(step > 0) {
		return nil, fmt.Errorf("step %v: expected more than 0 bar", step)
	}
	if !(dwell >= 0) {
		return nil, fmt.Errorf("dwell %g s: expected 0 s or more", float64(dwell))
	}
	// A hair of tolerance: 7 bar to 12 bar by 0.1 bar is 50 steps and not 49.
	n := math.Floor(math.Abs(float64(to-from))/float64(step) + 1e-9)
	if n+1 > live.MaxPhases/2 {
		return nil, fmt.Errorf("%.0f steps: expected at most %d", n+1, live.MaxPhases/2)
	}
	if to < from {
		step = -step
	}
	p := &live.Program{Name: "scan"}
	add := func(target unit.Pascal) {
		p.Phases = append(p.Phases, live.Phase{
			Label: "step to " + pressureText(target), Action: live.Reach, Target: target, Dwell: dwell.Duration(), Row: true,
		})
	}
	for i := range int(n) + 1 {
		add(from + unit.Pascal(i)*step)
	}
	if back {
		for i := int(n) - 1; i >= 0; i-- {
			add(from + unit.Pascal(i)*step)
		}
	}
	if err := p.Check(s.Bench.Limits.Enforced()); err != nil {
		return nil, err
	}
	return p, nil
}

// runExample is how a procedure is written in one line.
const runExample = "purge cycles 3, low 50 mbar, high 3 bar; fill to 9 bar"

// parseRun reads what a person wants to run, a scan in its short form or a
// procedure in one line, and checks it against the limits of the bench.
func parseRun(s *live.Snapshot, text string) (*live.Program, error) {
	text = strings.TrimSpace(text)
	if text == "" || text[0] >= '0' && text[0] <= '9' {
		return parseScan(s, text)
	}
	if s.Bench == nil {
		return nil, fmt.Errorf("no bench file: its limits are not known")
	}
	ambient, err := ambientPressure(s)
	if err != nil {
		ambient = 0 // procedures that need it say so
	}
	p, err := procedure.ParseLine(text, ambient)
	if err != nil {
		return nil, err
	}
	return p.Compile(procedure.Bench{
		Limits: s.Bench.Limits.Enforced(), Ambient: ambient,
		PressureFor: func(wanted unit.Metre) (unit.Pascal, error) {
			at, ok := pressureOf(s.Curve, wanted)
			if !ok {
				return 0, fmt.Errorf("%s nm is not on the predicted curve", fixed(wanted.Nanometres(), 1))
			}
			return at, nil
		},
	})
}

// chosenRun returns what Enter runs: what was typed, or where nothing was, the
// rest of what an earlier session left unfinished.
func chosenRun(s *live.Snapshot, text string) (*live.Program, error) {
	if rest := s.Unfinished.Program(); strings.TrimSpace(text) == "" && rest != nil && s.Bench != nil {
		return rest, rest.Check(s.Bench.Limits.Enforced())
	}
	return parseRun(s, text)
}

// shortest returns how long a program takes if every step settles at once.
func shortest(s *live.Snapshot, p *live.Program) time.Duration {
	l := s.Bench.Limits.Enforced()
	at, total := s.Setpoint, time.Duration(0)
	for _, ph := range p.Phases {
		total += ph.Dwell
		if ph.Action != live.Reach {
			continue
		}
		rate := l.RiseRate
		if ph.Target < at {
			rate = l.FallRate
		}
		if ph.Rate > 0 {
			rate = min(rate, ph.Rate)
		}
		if rate > 0 {
			total += time.Duration(math.Abs(float64(ph.Target-at)) / float64(rate) * 1e9)
		}
		at = ph.Target
	}
	return total
}

func drawRunForm(a frame.Area, s *live.Snapshot, v view) {
	b := box(a, "run a scan or a procedure", 74, 10, frame.Target)
	b.Text(0, 0, "scan: from : to : step : dwell   "+scanExample, frame.Faint)
	b.Text(0, 1, "else  "+runExample, frame.Faint)
	b.Text(0, 2, "verbs: evacuate, purge, fill, step, scan, hold, leak test, vent, energy", frame.Faint)
	input(b.Sub(0, 4, b.W, 1), v.text)
	if v.text == "" {
		if s.Unfinished.Program() != nil {
			done, _ := s.Unfinished.Steps()
			y := wrap(b.Sub(0, 6, b.W, 3), s.Unfinished.String()+".", frame.Caution)
			b.Text(0, 6+y, fmt.Sprintf("Enter, with nothing typed, goes on with step %d.", done+1), frame.Strong)
		}
		return
	}
	p, err := parseRun(s, v.text)
	if err != nil {
		wrap(b.Sub(0, 6, b.W, 4), err.Error(), frame.Caution)
		return
	}
	lowest, highest, some := reach(p)
	b.Text(0, 6, fmt.Sprintf("%s: %d steps, at least %s", p.Name, len(p.Phases), spanText(shortest(s, p))), frame.Plain)
	if !some {
		return
	}
	b.Text(0, 7, "highest "+outlook(s, highest, highest), frame.Plain)
	if from := emissionAt(s, lowest); from != "" {
		b.Text(0, 8, from+" at "+pressureText(lowest), frame.Predicted)
	}
	if to := emissionAt(s, highest); to != "" && highest != lowest {
		b.Text(0, 9, to+" at "+pressureText(highest), frame.Predicted)
	}
}

// reach returns the lowest and highest pressure that a program goes to.
func reach(p *live.Program) (lowest, highest unit.Pascal, some bool) {
	for _, ph := range p.Phases {
		if ph.Action != live.Reach {
			continue
		}
		if !some {
			lowest, highest, some = ph.Target, ph.Target, true
		}
		lowest, highest = min(lowest, ph.Target), max(highest, ph.Target)
	}
	return lowest, highest, some
}
