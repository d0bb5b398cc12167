package tui

import (
	"barline/model/live"
)

// binding is one key of the dashboard. The same table moves the keys and
// fills the help, so neither can know a key that the other does not.
type binding struct {
	key   string   // as bubbletea names it; a letter is itself
	also  []string // other keys that do the same
	label string   // as the keyboard writes it
	foot  string   // the same for the footer, where it shows fewer keys
	short string   // in the footer; empty keeps it out of there
	what  string   // in the help
	gas   bool     // may lead to gas being moved, so not for a second screen
	press func(v view, s *live.Snapshot, key string) (view, []live.Intent)

	screen bool // concerns the screen alone
	writes bool // asks for something that is no gas, so not for a second screen either
	replay bool // steers a replay, and is there for nothing else
}

func (b binding) footLabel() string {
	if b.foot != "" {
		return b.foot
	}
	return b.label
}

// quit is the intent of leaving, which Run takes for itself.
type quit struct{ live.Intent }

// Steer is what a replay is asked for: ' ' to pause or go on, '.' for one
// second, '>' and '<' to go a minute on and back, ']' and '[' for twice and
// half the speed. Only a source whose snapshots say Replay is given it.
type Steer struct {
	live.Intent
	Key rune
}

var bindings = []binding{
	{key: "tab", writes: true, label: "Tab", short: "HOLD", what: "HOLD: always, without asking", press: pressHold},
	{key: "a", also: []string{"d"}, label: "a d", foot: "a", short: "arm", what: "arm: cautions first; disarm", gas: true, press: pressArm},
	{key: "s", label: "s", short: "setpoint", what: "go to a pressure", gas: true, press: pressSetpoint},
	{key: "r", label: "r", what: "run a scan or a procedure", gas: true, press: pressRun},
	{key: "t", label: "t", short: "tune", what: "tune to a wavelength", gas: true, press: pressTune},
	{key: "p", also: []string{"x"}, label: "p x", short: "pause, end", what: "program: pause or go on, end", gas: true, press: pressProgram},
	{key: "y", label: "y", what: "program: done what it asks for", gas: true, press: pressProgram},
	{key: "v", label: "v", what: "valve, pulse energy, zero", gas: true, press: pressOrder},
	{key: "m", writes: true, label: "m", short: "mark", what: "mark: something happened", press: pressMark},
	{key: "n", writes: true, label: "n", short: "note", what: "note for the record", press: pressNote},
	{key: "i", also: []string{"j"}, label: "i j", what: "calibrations; drift, its step", press: pressDrift},
	{key: "k", also: []string{"l"}, label: "k l", what: "alarm on top is seen; list", press: pressTop},
	{key: "w", writes: true, also: []string{"e"}, label: "w e", what: "listed alarm: aside, reset", press: pressListed},
	{key: " ", also: []string{"."}, label: "Space .", short: "pause, a second on", what: "replay: pause, one second on", replay: true, press: pressSteer},
	{key: "<", also: []string{">"}, label: "< >", short: "a minute", what: "replay: a minute back, on", replay: true, press: pressSteer},
	{key: "[", also: []string{"]"}, label: "[ ]", short: "speed", what: "replay: half, twice the speed", replay: true, press: pressSteer},
	{key: "q", also: []string{"ctrl+c"}, label: "q", short: "leave", what: "HOLD, leave; Ctrl-C: at once", press: pressLeave},
	{key: "1", also: []string{"2", "3", "4", "5"}, label: "1–5", what: "the pages named above", screen: true, press: pressPage},
	{key: "+", also: []string{"=", "-"}, label: "+ -", what: "less, more time on the charts", screen: true, press: pressZoom},
	{key: "left", also: []string{"right"}, label: "← →", what: "back, forward in time", screen: true, press: pressMove},
	{key: "c", label: "c", what: "read values at a time", screen: true, press: pressCursor},
	{key: "f", label: "f", what: "freeze charts, let them go", screen: true, press: pressFreeze},
	{key: "0", label: "0", what: "charts as at the start", screen: true, press: pressPresent},
	{key: "z", also: []string{"u"}, label: "z u", what: "near, whole; spectrum linear", screen: true, press: pressNear},
	{key: "g", label: "g", what: "no charts, for a slow line", screen: true, press: pressPlain},
	{key: "up", also: []string{"down"}, label: "↑ ↓", what: "a line up, down; earlier input", screen: true, press: pressLine},
	{key: "pgup", also: []string{"pgdown"}, label: "PgUp/Dn", what: "a page up, down in a list", screen: true, press: pressLine},
	{key: "/", label: "/", what: "find in the record", screen: true, press: pressFind},
	{key: "o", label: "o", what: "mouse on, off", screen: true, press: pressMouse},
	{key: "?", also: []string{"h"}, label: "? h", what: "this list, how to begin", screen: true, press: pressHelp},
	{key: "esc", label: "Esc", what: "close what is open", screen: true, press: pressClose},
}

// press answers one key, named as bubbletea names it. It decides nothing about
// gas: an intent is checked again by package live.
func (v view) press(key string, s *live.Snapshot) (view, []live.Intent) {
	v.message = ""
	switch key { // whatever is open
	case "tab":
		return pressHold(v, s, key)
	case "ctrl+c":
		return pressLeaveNow(v, s, key)
	}
	if v.typing() {
		return v.typed(key, s)
	}
	switch v.overlay {
	case cautionOverlay:
		return pressCaution(v, s, key)
	case calibrationOverlay:
		return v.pressCalibration(s, key)
	case stepOverlay:
		return v.pressStep(s, key)
	case leaveOverlay:
		v.overlay = noOverlay
		if key == "enter" {
			return v, []live.Intent{live.Hold{}, quit{}}
		}
		v.message = "staying"
		return v, nil
	case greetOverlay, helpOverlay:
		was := v.overlay
		v.overlay = noOverlay
		if key == "?" && was == helpOverlay || key == "esc" || was == greetOverlay {
			return v, nil
		}
	case alarmOverlay:
		switch key {
		case "k", "w", "e", "up", "down", "pgup", "pgdown", "esc", "l":
		default:
			v.overlay = noOverlay
		}
	}
	for _, b := range bindings {
		if b.key != key && !contains(b.also, key) {
			continue
		}
		if b.replay && s.Replay == "" {
			continue
		}
		if b.gas && s.ReadOnly {
			v.message = elsewhere(s)
			return v, nil
		}
		return b.press(v, s, key)
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

func pressHold(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	v = v.open(noOverlay)
	if s.ReadOnly {
		v.message = elsewhere(s)
		return v, nil
	}
	return v, []live.Intent{live.Hold{}}
}

func pressLeaveNow(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	v, intents := pressHold(v, s, "")
	return v, append(intents, quit{})
}

func pressArm(v view, s *live.Snapshot, key string) (view, []live.Intent) {
	if key == "d" {
		return pressDisarm(v, s, key)
	}
	if armed(s) {
		v.message = "armed already; d disarms"
		return v, nil
	}
	v = v.open(armOverlay)
	return v, nil
}

func pressDisarm(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	if !armed(s) {
		v.message = "not armed"
		return v, nil
	}
	return v, []live.Intent{live.Disarm{}}
}

func pressSetpoint(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	if !armed(s) {
		v.message = "not armed: press a first"
		return v, nil
	}
	v = v.open(setpointOverlay)
	return v, nil
}

func pressOrder(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	return v.open(orderOverlay), nil // shutting a valve wants no arming
}

// pressTop says that the alarm on top is seen (k), or lists alarms (l).
func pressTop(v view, s *live.Snapshot, key string) (view, []live.Intent) {
	if key == "l" {
		return pressAlarms(v, s, key)
	}
	return pressSeen(v, s, key)
}

func pressMark(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	if s.ReadOnly {
		v.message = elsewhere(s)
		return v, nil
	}
	v.message = "marked"
	return v, []live.Intent{live.Note{Text: "something happened: " + circumstances(s)}}
}

func pressNote(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	if s.ReadOnly {
		v.message = elsewhere(s)
		return v, nil
	}
	v = v.open(noteOverlay)
	return v, nil
}

// elsewhere says why a screen that only reads does not do what was asked.
func elsewhere(s *live.Snapshot) string {
	if s.Replay != "" {
		return "a replay: what it shows is over"
	}
	return "second screen: do that at the first"
}

// shown reports whether the help and the footer name a key.
func (b *binding) shown(s *live.Snapshot) bool {
	return !((b.gas || b.writes) && s.ReadOnly) && (!b.replay || s.Replay != "")
}

// says returns what the help says of a key.
func (b *binding) says(s *live.Snapshot) string {
	if s.ReadOnly && (b.key == "q" || b.key == "ctrl+c") {
		return "leave" // what somebody else holds or runs stays as it is
	}
	return b.what
}

func pressSteer(v view, _ *live.Snapshot, key string) (view, []live.Intent) {
	return v, []live.Intent{Steer{Key: rune(key[0])}}
}

func pressHelp(v view, _ *live.Snapshot, key string) (view, []live.Intent) {
	if key == "h" {
		return v.open(greetOverlay), nil
	}
	return v.toggle(helpOverlay), nil
}

func (v view) toggle(o overlay) view {
	if v.overlay == o {
		o = noOverlay
	}
	v.overlay = o
	return v
}

func pressClose(v view, _ *live.Snapshot, _ string) (view, []live.Intent) {
	v = v.open(noOverlay)
	return v, nil
}

func pressLeave(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	if s.ReadOnly {
		return v, []live.Intent{quit{}}
	}
	v.overlay = leaveOverlay
	return v, nil
}
