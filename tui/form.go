package tui

import (
	"strings"
	"unicode"

	"barline/model/live"
	"barline/model/unit"
)

const maxNote = 200

// typed answers a key while a form is open.
func (v view) typed(key string, s *live.Snapshot) (view, []live.Intent) {
	switch key {
	case "esc":
		return pressClose(v, s, key)
	case "backspace", "ctrl+h":
		if r := []rune(v.text); len(r) > 0 {
			v.text = string(r[:len(r)-1])
		}
		return v, nil
	case "ctrl+u":
		v.text = ""
		return v, nil
	case "enter":
		return v.enter(s)
	case "up", "down":
		return v.recalled(key), nil
	}
	if r := []rune(key); len(r) == 1 && unicode.IsPrint(r[0]) && len([]rune(v.text)) < maxNote {
		v.text += key
	}
	return v, nil
}

// recalled puts an earlier entry of the same form into it.
func (v view) recalled(key string) view {
	n := v.recall + 1
	if key == "down" {
		n = v.recall - 1
	}
	if n <= 0 {
		v.recall, v.text = 0, ""
		return v
	}
	if text, ok := v.past.of(v.overlay, n); ok {
		v.recall, v.text = n, text
	}
	return v
}

// enter finishes a form.
func (v view) enter(s *live.Snapshot) (view, []live.Intent) {
	text := strings.TrimSpace(v.text)
	switch v.overlay {
	case armOverlay:
		if text != armWord {
			v.message = "type " + armWord + ", or Esc"
			return v, nil
		}
		v = v.open(noOverlay)
		return v, []live.Intent{live.Arm{}}
	case setpointOverlay:
		target, err := parseTarget(s, text)
		if err != nil {
			v.message = err.Error()
			return v, nil
		}
		if !armed(s) { // it may have lapsed while typing
			v = v.open(noOverlay)
			v.message = "no longer armed: press a, then s"
			return v, nil
		}
		v.past = v.past.with(entry{setpointOverlay, text})
		v = v.open(noOverlay)
		return v.careful(s, towards(target), live.GoTo{Target: target})
	case runOverlay:
		program, err := chosenRun(s, text)
		if err != nil {
			v.message = err.Error()
			return v, nil
		}
		v = v.open(noOverlay)
		if !armed(s) {
			v.message = "no longer armed: press a, then r"
			return v, nil
		}
		v.past = v.past.with(entry{runOverlay, text})
		v.page = Scan
		return v.careful(s, program, live.Run{Program: program})
	case tuneOverlay:
		in, _, err := parseTune(s, text)
		if err != nil {
			v.message = err.Error()
			return v, nil
		}
		v = v.open(noOverlay)
		if !armed(s) {
			v.message = "no longer armed: press a, then t"
			return v, nil
		}
		v.past = v.past.with(entry{tuneOverlay, text})
		// Where tuning leads is found step by step: any pressure may come.
		return v.careful(s, towards(s.Bench.Limits.Enforced().Lowest().Max), in)
	case orderOverlay:
		in, err := live.ParseOrder(text)
		if err != nil {
			v.message = err.Error()
			return v, nil
		}
		v.past = v.past.with(entry{orderOverlay, text})
		v = v.open(noOverlay)
		if valve, ok := in.(live.MoveValve); ok && s.Bench != nil {
			return v.careful(s, valve.Towards(s.Bench.Limits.Enforced().Lowest().Max), in)
		}
		return v, []live.Intent{in}
	case findOverlay:
		v.overlay, v.text, v.find, v.scroll = noOverlay, "", text, 0
		return v, nil
	}
	v = v.open(noOverlay)
	if text == "" {
		return v, nil
	}
	v.message = "noted"
	return v, []live.Intent{live.Note{Text: text}}
}

// towards is the program of one step to a pressure.
func towards(target unit.Pascal) *live.Program {
	return &live.Program{Phases: []live.Phase{{Target: target}}}
}

// circumstances are what a mark keeps beside its time.
func circumstances(s *live.Snapshot) string {
	p, _, _ := mainPressure(s)
	text := "pressure " + p
	if s.ResidualKnown {
		text += ", measured minus predicted " + signed(s.Residual.Nanometres(), 1) + " nm"
	}
	return text
}
