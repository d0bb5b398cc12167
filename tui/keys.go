package tui

import (
	"strings"
	"unicode"

	"barline/model/live"
)

// binding is one key of the dashboard. The same table moves the keys and
// fills the help, so neither can know a key that the other does not.
type binding struct {
	key   string   // as bubbletea names it; a letter is itself
	also  []string // other keys that do the same
	label string   // as the keyboard writes it
	short string   // in the footer; empty keeps it out of there
	what  string   // in the help
	gas   bool     // may lead to gas being moved, so not for a second screen
	press func(v view, s *live.Snapshot) (view, []live.Intent)

	screen bool // concerns the screen alone
}

// quit is the intent of leaving, which Run takes for itself.
type quit struct{ live.Intent }

var bindings = []binding{
	{key: "tab", label: "Tab", short: "HOLD", what: "HOLD: always, without asking", press: pressHold},
	{key: "a", label: "a", short: "arm", what: "arm: cautions, then setpoints", gas: true, press: pressArm},
	{key: "d", label: "d", what: "disarm", gas: true, press: pressDisarm},
	{key: "s", label: "s", short: "setpoint", what: "go to a pressure", gas: true, press: pressSetpoint},
	{key: "m", label: "m", short: "mark", what: "mark: something happened", press: pressMark},
	{key: "n", label: "n", short: "note", what: "note for the record", press: pressNote},
	{key: "k", label: "k", short: "seen", what: "the alarm on top is seen", press: pressSeen},
	{key: "l", label: "l", short: "alarms", what: "list of alarms", press: pressAlarms},
	{key: "q", label: "q", short: "leave", what: "HOLD and leave, asks once", press: pressLeave},
	{key: "ctrl+c", label: "Ctrl-C", what: "HOLD and leave at once", press: pressLeaveNow},
	{key: "+", also: []string{"="}, label: "+", what: "less time on the charts", screen: true, press: pressCloser},
	{key: "-", label: "-", what: "more time on the charts", screen: true, press: pressFurther},
	{key: "left", label: "←", what: "back in time", screen: true, press: pressBack},
	{key: "right", label: "→", what: "forward in time", screen: true, press: pressForward},
	{key: "f", label: "f", what: "freeze charts, let them go", screen: true, press: pressFreeze},
	{key: "0", label: "0", what: "charts as at the start", screen: true, press: pressPresent},
	{key: "?", label: "?", short: "keys", what: "this list", screen: true, press: pressHelp},
	{key: "esc", label: "Esc", what: "close what is open", screen: true, press: pressClose},
}

// press answers one key, named as bubbletea names it. It decides nothing about
// gas: an intent is checked again by package live.
func (v view) press(key string, s *live.Snapshot) (view, []live.Intent) {
	v.message = ""
	switch key { // whatever is open
	case "tab":
		return pressHold(v, s)
	case "ctrl+c":
		return pressLeaveNow(v, s)
	}
	if v.typing() {
		return v.typed(key, s)
	}
	switch v.overlay {
	case leaveOverlay:
		v.overlay = noOverlay
		if key == "enter" {
			return v, []live.Intent{live.Hold{}, quit{}}
		}
		v.message = "staying"
		return v, nil
	case helpOverlay, alarmOverlay:
		if key != "k" && key != "esc" && key != "l" && key != "?" {
			v.overlay = noOverlay
		}
	}
	for _, b := range bindings {
		if b.key != key && !contains(b.also, key) {
			continue
		}
		if b.gas && s.ReadOnly {
			v.message = "this is a second screen: nothing can be commanded from here"
			return v, nil
		}
		return b.press(v, s)
	}
	return v, nil
}

func contains(list []string, s string) bool {
	for _, x := range list {
		if x == s {
			return true
		}
	}
	return false
}

func pressHold(v view, s *live.Snapshot) (view, []live.Intent) {
	v.overlay, v.text = noOverlay, ""
	if s.ReadOnly {
		v.message = "this is a second screen: HOLD must be pressed at the first"
		return v, nil
	}
	return v, []live.Intent{live.Hold{}}
}

func pressLeaveNow(v view, s *live.Snapshot) (view, []live.Intent) {
	v, intents := pressHold(v, s)
	return v, append(intents, quit{})
}

func pressArm(v view, s *live.Snapshot) (view, []live.Intent) {
	if armed(s) {
		v.message = "armed already; d disarms"
		return v, nil
	}
	v.overlay, v.text = armOverlay, ""
	return v, nil
}

func pressDisarm(v view, s *live.Snapshot) (view, []live.Intent) {
	if !armed(s) {
		v.message = "not armed"
		return v, nil
	}
	return v, []live.Intent{live.Disarm{}}
}

func pressSetpoint(v view, s *live.Snapshot) (view, []live.Intent) {
	if !armed(s) {
		v.message = "not armed: press a first"
		return v, nil
	}
	v.overlay, v.text = setpointOverlay, ""
	return v, nil
}

func pressMark(v view, s *live.Snapshot) (view, []live.Intent) {
	if s.ReadOnly {
		v.message = "this is a second screen: marks are made at the first"
		return v, nil
	}
	v.message = "marked"
	return v, []live.Intent{live.Note{Text: "something happened: " + circumstances(s)}}
}

func pressNote(v view, s *live.Snapshot) (view, []live.Intent) {
	if s.ReadOnly {
		v.message = "this is a second screen: notes are written at the first"
		return v, nil
	}
	v.overlay, v.text = noteOverlay, ""
	return v, nil
}

func pressSeen(v view, s *live.Snapshot) (view, []live.Intent) {
	for _, al := range s.Alarms {
		if !al.Acked {
			if s.ReadOnly {
				v.message = "this is a second screen: alarms are acknowledged at the first"
				return v, nil
			}
			v.message = "seen: " + al.Name
			return v, []live.Intent{live.Acknowledge{Alarm: al.Name}}
		}
	}
	v.message = "no alarm to acknowledge"
	return v, nil
}

func pressAlarms(v view, _ *live.Snapshot) (view, []live.Intent) {
	return v.toggle(alarmOverlay), nil
}

func pressHelp(v view, _ *live.Snapshot) (view, []live.Intent) {
	return v.toggle(helpOverlay), nil
}

func (v view) toggle(o overlay) view {
	if v.overlay == o {
		o = noOverlay
	}
	v.overlay = o
	return v
}

func pressCloser(v view, _ *live.Snapshot) (view, []live.Intent) {
	if usualSpan+v.zoom > 0 {
		v.zoom--
	}
	return v, nil
}

func pressFurther(v view, _ *live.Snapshot) (view, []live.Intent) {
	if usualSpan+v.zoom < len(spans)-1 {
		v.zoom++
	}
	return v, nil
}

// pressBack leaves the present, and with it freezes: a chart that slides away
// under the eye cannot be read.
func pressBack(v view, s *live.Snapshot) (view, []live.Intent) {
	if v.frozen == nil {
		v.frozen = freeze(s)
	}
	v.back = min(v.back+v.span()/4, max(0, v.frozen.at-v.span()/2))
	return v, nil
}

func pressForward(v view, _ *live.Snapshot) (view, []live.Intent) {
	v.back = max(0, v.back-v.span()/4)
	return v, nil
}

func pressFreeze(v view, s *live.Snapshot) (view, []live.Intent) {
	if v.frozen != nil {
		v.frozen, v.back = nil, 0
		return v, nil
	}
	v.frozen = freeze(s)
	return v, nil
}

func pressPresent(v view, _ *live.Snapshot) (view, []live.Intent) {
	v.back, v.frozen, v.zoom = 0, nil, 0
	return v, nil
}

func pressClose(v view, _ *live.Snapshot) (view, []live.Intent) {
	v.overlay, v.text = noOverlay, ""
	return v, nil
}

func pressLeave(v view, s *live.Snapshot) (view, []live.Intent) {
	if s.ReadOnly {
		return v, []live.Intent{quit{}}
	}
	v.overlay = leaveOverlay
	return v, nil
}

const maxNote = 200

// typed answers a key while a form is open.
func (v view) typed(key string, s *live.Snapshot) (view, []live.Intent) {
	switch key {
	case "esc":
		return pressClose(v, s)
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
	}
	if r := []rune(key); len(r) == 1 && unicode.IsPrint(r[0]) && len([]rune(v.text)) < maxNote {
		v.text += key
	}
	return v, nil
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
		v.overlay, v.text = noOverlay, ""
		return v, []live.Intent{live.Arm{}}
	case setpointOverlay:
		target, err := parseTarget(s, text)
		if err != nil {
			v.message = err.Error()
			return v, nil
		}
		if !armed(s) { // it may have lapsed while typing
			v.overlay, v.text = noOverlay, ""
			v.message = "no longer armed: press a, then s"
			return v, nil
		}
		v.overlay, v.text = noOverlay, ""
		return v, []live.Intent{live.GoTo{Target: target}}
	}
	v.overlay, v.text = noOverlay, ""
	if text == "" {
		return v, nil
	}
	v.message = "noted"
	return v, []live.Intent{live.Note{Text: text}}
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
