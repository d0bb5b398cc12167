package tui

import (
	"encoding/json"
	"maps"
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	tea "github.com/charmbracelet/bubbletea"
	"github.com/charmbracelet/x/ansi"

	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/tui/tuitest"
)

// Every key that the help names does something on some bench, and the help
// fits the smallest screen in full.
func TestHelpShowsEveryKeyInFull(t *testing.T) {
	for _, s := range []*live.Snapshot{tuitest.Calm(), tuitest.Replay()} {
		screen := ansi.Strip(draw(s, view{overlay: helpOverlay}, minWidth, minHeight, Style{}).String())
		for _, b := range bindings {
			if got := strings.Contains(screen, b.label+" "+b.says(s)+"  "); got != b.shown(s) {
				t.Errorf("help shows %q %q: %v, expected %v:\n%s", b.label, b.what, got, b.shown(s), screen)
			}
		}
	}
}

// A key works where it changes the view, asks for something or says why not.
func TestEveryKeyInHelpWorksAndNoOther(t *testing.T) {
	listed := map[string]bool{}
	for _, b := range bindings {
		for _, key := range append([]string{b.key}, b.also...) {
			listed[key] = true
			if !works(key) {
				t.Errorf("key %q is in the help and does nothing", key)
			}
		}
	}
	names := []string{"enter", "backspace", "up", "down", "pgup", "pgdown", "home", "end", "delete", "insert", "shift+tab", " "}
	for c := rune('!'); c <= '~'; c++ {
		names = append(names, string(c))
	}
	for c := 'a'; c <= 'z'; c++ {
		names = append(names, "ctrl+"+string(c))
	}
	for i := range 12 {
		names = append(names, tea.Key{Type: tea.KeyF1 - tea.KeyType(i)}.String())
	}
	for _, key := range names {
		if !listed[key] && works(key) {
			t.Errorf("key %q works and is not in the help", key)
		}
	}
}

// situations are made once: their histories are long.
var situations = sync.OnceValue(func() map[string]*live.Snapshot {
	made := map[string]*live.Snapshot{}
	for name, make := range tuitest.Situations() {
		made[name] = make()
	}
	return made
})

func works(key string) bool {
	for _, s := range situations() {
		for _, before := range []view{
			{}, {frozen: freeze(s), back: 1e9, zoom: 1, cursor: 60e9}, {page: Log, scroll: 1}, {overlay: alarmOverlay, pick: 1},
		} {
			after, intents := before.press(key, s)
			if after != before && before.overlay == noOverlay || len(intents) > 0 {
				return true
			}
		}
		if after, _ := (view{overlay: helpOverlay}).press(key, s); key == "esc" && after.overlay == noOverlay {
			return true
		}
	}
	return false
}

func TestHoldIsOneKeyEverywhere(t *testing.T) {
	for o := noOverlay; o < overlayCount; o++ {
		v, intents := view{overlay: o, text: "9"}.press("tab", tuitest.Filling())
		if len(intents) != 1 || intents[0] != live.Intent(live.Hold{}) {
			t.Errorf("Tab over overlay %d asks for %v, want HOLD alone", o, intents)
		}
		if v.overlay != noOverlay || v.text != "" {
			t.Errorf("Tab leaves overlay %d open", o)
		}
	}
}

func TestArmingNeedsTheWord(t *testing.T) {
	s := tuitest.Calm()
	for text, want := range map[string]int{"": 0, "a": 0, "armm": 0, "yes": 0, "arm": 1, " arm ": 1} {
		v, _ := view{}.press("a", s)
		for _, r := range text {
			v, _ = v.press(string(r), s)
		}
		if _, intents := v.press("enter", s); len(intents) != want {
			t.Errorf("%q and Enter gives %v, want %d intents", text, intents, want)
		}
	}
}

// Filling above the pressure of the bench file and venting ask for their
// cautions first; Enter sends word of them before what was asked for, any
// other key sends nothing. What stands acknowledged is not asked for again.
func TestCautionsComeFirst(t *testing.T) {
	filling := *tuitest.Filling() // stands above the caution's 2 bar
	b := *filling.Bench
	b.Limits.CautionAbove = 2 * unit.Bar
	filling.Bench = &b
	low := filling
	low.Latest[reading.CellAPressure].Value, low.Latest[reading.CellBPressure].Value = 1.5e5, 1.5e5
	for _, c := range []struct {
		name string
		s    live.Snapshot
		form overlay
		text string
		want []live.Caution
	}{
		{"filling", low, setpointOverlay, "9 bar", []live.Caution{live.Filling}},
		{"below", low, setpointOverlay, "1.9 bar", nil},
		{"filled already", filling, setpointOverlay, "9 bar", nil},
		{"venting", filling, setpointOverlay, "1 bar", []live.Caution{live.Venting}},
		{"both", low, runOverlay, "fill to 3 bar; vent", []live.Caution{live.Filling, live.Venting}},
		{"tuning", low, tuneOverlay, "262 nm", []live.Caution{live.Filling}},
	} {
		v, intents := view{overlay: c.form, text: c.text}.press("enter", &c.s)
		if len(c.want) == 0 {
			if len(intents) != 1 || v.overlay != noOverlay {
				t.Errorf("%s: %v and overlay %d, want it sent", c.name, intents, v.overlay)
			}
			continue
		}
		if len(intents) != 0 || v.overlay != cautionOverlay || !slices.Equal(v.pending.cautions, c.want) {
			t.Errorf("%s: %v, overlay %d (%s), want the cautions %v", c.name, intents, v.overlay, v.message, c.want)
			continue
		}
		if _, sent := v.press("esc", &c.s); len(sent) != 0 {
			t.Errorf("%s: Esc sends %v", c.name, sent)
		}
		_, sent := v.press("enter", &c.s)
		if len(sent) != len(c.want)+1 {
			t.Errorf("%s: Enter sends %v", c.name, sent)
		}
		for i, x := range c.want {
			if sent[i] != live.Intent(live.Understood{Caution: x}) {
				t.Errorf("%s: %v, want %v understood", c.name, sent[i], x)
			}
		}
		lapsed := c.s
		lapsed.ArmedUntil = 0
		if _, sent := v.press("enter", &lapsed); len(sent) != 0 {
			t.Errorf("%s: no longer armed, Enter sends %v", c.name, sent)
		}
		c.s.Acknowledged = c.want
		if _, intents := (view{overlay: c.form, text: c.text}).press("enter", &c.s); len(intents) != 1 {
			t.Errorf("%s: acknowledged, it still sends %v", c.name, intents)
		}
	}
}

// What an earlier session left is gone on with by Enter on the empty form, and
// by nothing else.
func TestUnfinishedIsOfferedInTheForm(t *testing.T) {
	s := *tuitest.Filling()
	if _, intents := (view{overlay: runOverlay}).press("enter", &s); len(intents) != 0 {
		t.Errorf("nothing is unfinished and Enter sends %v", intents)
	}
	var u live.Unfinished
	text := `{"intent":"run","plan":{"name":"scan","phases":[{"label":"one","action":"reach","target_Pa":8e5},{"label":"two","action":"reach","target_Pa":9e5}]}}`
	var run live.IntentData
	if err := json.Unmarshal([]byte(text), &run); err != nil {
		t.Fatal(err)
	}
	u.See(s.Now, run)
	u.See(s.Now, live.IntentData{Intent: "begin", Program: "scan", Phase: 2})
	s.Unfinished = &u
	screen := draw(&s, view{overlay: runOverlay}, 120, 40, Style{}).String()
	if !strings.Contains(screen, "ended after step 1 of 2") || !strings.Contains(screen, "goes on with step 2") {
		t.Errorf("the form does not offer it:\n%s", screen)
	}
	_, intents := view{overlay: runOverlay}.press("enter", &s)
	if len(intents) != 1 {
		t.Fatalf("Enter sends %v", intents)
	}
	if p := intents[0].(live.Run).Program; p.First != 1 || len(p.Phases) != 1 || p.Phases[0].Label != "two" {
		t.Errorf("Enter runs %+v", p)
	}
}

func TestSetpointPrompt(t *testing.T) {
	s := tuitest.Filling()
	for _, c := range []struct {
		text    string
		bar     float64 // 0: refused
		message string
	}{
		{"9.2 bar", 9.2, ""},
		{"920kPa", 9.2, ""},
		{"3 bar(g)", 4.013, ""}, // the bench file's ambient of 1.013 bar
		{"9.2", 0, "no unit"},
		{"", 0, "expected a pressure"},
		{"16.01 bar", 0, "fibre seal allows 0 bar to 16 bar"},
		{"-1 bar", 0, "fibre seal allows"},
		{"9 nm", 0, "is not one of a pressure"},
	} {
		v := view{overlay: setpointOverlay, text: c.text}
		after, intents := v.press("enter", s)
		if c.bar == 0 {
			if len(intents) != 0 || !strings.Contains(after.message, c.message) || after.overlay != setpointOverlay {
				t.Errorf("%q gives %v and %q, want a refusal with %q", c.text, intents, after.message, c.message)
			}
			continue
		}
		if len(intents) != 1 {
			t.Errorf("%q gives %v and %q, want a setpoint", c.text, intents, after.message)
			continue
		}
		if got := intents[0].(live.GoTo).Target.Bar(); got < c.bar-1e-9 || got > c.bar+1e-9 {
			t.Errorf("%q goes to %v bar, want %v bar", c.text, got, c.bar)
		}
	}
}

func TestFormsRecallWhatWasTyped(t *testing.T) {
	s := tuitest.Filling()
	v := view{}
	for _, text := range []string{"9 bar", "10 bar", "9 bar"} {
		v, _ = v.press("s", s)
		for _, r := range text {
			v, _ = v.press(string(r), s)
		}
		v, _ = v.press("enter", s)
	}
	v, _ = v.press("s", s)
	for _, c := range []struct{ key, want string }{
		{"up", "9 bar"}, {"up", "10 bar"}, {"up", "10 bar"}, {"down", "9 bar"}, {"down", ""}, {"down", ""},
	} {
		if v, _ = v.press(c.key, s); v.text != c.want {
			t.Errorf("after %s the form holds %q, want %q", c.key, v.text, c.want)
		}
	}
	if v, _ = (view{past: v.past}).press("r", s); v.text != "" {
		t.Errorf("the form of scans begins with %q", v.text)
	}
	if v, _ = v.press("up", s); v.text != "" {
		t.Errorf("the form of scans recalls %q, which was typed into another", v.text)
	}
}

func TestScanForm(t *testing.T) {
	s := tuitest.Filling()
	for _, c := range []struct {
		text     string
		steps    int
		last     float64 // bar
		duration time.Duration
		refusal  string
	}{
		// From the setpoint of 9.8 bar down to 7 bar: 14 s at 0.2 bar/s; each
		// step up 2.5 s; eleven dwells of 20 s.
		{"7 bar : 12 bar : 0.5 bar : 20 s", 11, 12, 14*time.Second + 10*2500*time.Millisecond + 11*20*time.Second, ""},
		{"7bar:7.3bar:0.1bar:1s:back", 7, 7, 14*time.Second + 6*500*time.Millisecond + 7*time.Second, ""},
		{"9 bar : 7 bar : 1 bar : 0 s", 3, 7, 4*time.Second + 2*5*time.Second, ""},
		{"7 bar : 12 bar : 0.5 bar", 0, 0, 0, "expected from : to : step : dwell"},
		{"7 bar : 17 bar : 0.5 bar : 20 s", 0, 0, 0, "fibre seal allows"},
		{"7 bar : 12 bar : 0 bar : 20 s", 0, 0, 0, "expected more than 0 bar"},
		{"7 bar : 12 bar : 1 Pa : 20 s", 0, 0, 0, "expected at most"},
		{"7 bar : 12 bar : 0.5 bar : 20", 0, 0, 0, "no unit"},
		{"7 bar : 12 bar : 0.5 bar : 20 s : down", 0, 0, 0, "expected from : to : step : dwell"},
	} {
		p, err := parseScan(s, c.text)
		if c.refusal != "" {
			if err == nil || !strings.Contains(err.Error(), c.refusal) {
				t.Errorf("%q: error %v, want one with %q", c.text, err, c.refusal)
			}
			continue
		}
		if err != nil {
			t.Errorf("%q: %v", c.text, err)
			continue
		}
		last := p.Phases[len(p.Phases)-1].Target.Bar()
		if len(p.Phases) != c.steps || math.Abs(last-c.last) > 1e-9 {
			t.Errorf("%q: %d steps to %g bar, want %d to %g bar", c.text, len(p.Phases), last, c.steps, c.last)
		}
		if got := shortest(s, p); (got - c.duration).Abs() > time.Millisecond {
			t.Errorf("%q: takes %v, want %v", c.text, got, c.duration)
		}
	}
}

func TestTuneForm(t *testing.T) {
	s := tuitest.Filling()
	for _, c := range []struct {
		text    string
		bar     float64 // where the stand-in curve has it, within its steps
		hold    bool
		refusal string
	}{
		{"262 nm", 9, false, ""},
		{"0.262 um hold", 9, true, ""},
		{"262", 0, false, "no unit"},
		{"170 nm", 0, false, "the spectrometer sees 190 to 400 nm"},
		{"390 nm", 0, false, "not on the predicted curve"},
		{"262 bar", 0, false, "not one of a length"},
	} {
		in, at, err := parseTune(s, c.text)
		switch {
		case c.refusal != "":
			if err == nil || !strings.Contains(err.Error(), c.refusal) {
				t.Errorf("%q: error %v, want one with %q", c.text, err, c.refusal)
			}
		case err != nil:
			t.Errorf("%q: %v", c.text, err)
		case math.Abs(at.Bar()-c.bar) > 0.005 || in.Hold != c.hold || math.Abs(in.Emission.Nanometres()-262) > 1e-9:
			t.Errorf("%q: %v at %v, want 262 nm at %g bar, hold %v", c.text, in, at, c.bar, c.hold)
		}
	}
}

func TestSecondScreenCommandsNothing(t *testing.T) {
	s := tuitest.Filling()
	s.ReadOnly = true
	for _, b := range bindings {
		_, intents := view{}.press(b.key, s)
		for _, in := range intents {
			if _, leave := in.(quit); !leave {
				t.Errorf("key %q on a second screen asks for %T", b.key, in)
			}
		}
	}
}

// A hundred thousand keys and sizes: no panic, no line too wide, and no
// setpoint asked for while the bench is not armed.
func TestStormOfKeysAndSizes(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	keys := []string{
		"enter", "esc", "backspace", "tab", "left", "right", "arm", "9.2 bar", "7 bar:9 bar:1 bar:2 s:back",
		"ctrl+u", "ctrl+c", "up", "down", "pgup", "pgdown", "\x00", "é", "界",
	}
	likely := []string{"a", "arm", "s", "9.2 bar", "t", "265nm", "r", "7 bar:9 bar:1 bar:2 s:back", "p", "x", "enter", "enter", "ctrl+u", "esc"}
	for c := rune(' '); c <= '~'; c++ {
		keys = append(keys, string(c))
	}
	var benches []*live.Snapshot
	for _, name := range slices.Sorted(maps.Keys(situations())) {
		benches = append(benches, situations()[name])
	}
	v, s, w, h := view{}, benches[0], 80, 24
	frames, asked := 0, 0
	for i := range 100_000 {
		switch n := r.IntN(1000); {
		case n < 20:
			mouse := tea.MouseMsg{X: r.IntN(max(w, 1)), Y: r.IntN(max(h, 1)), Action: tea.MouseActionPress, Button: tea.MouseButton(r.IntN(12))}
			v = v.mouse(mouse, draw(s, v, w, h, Style{}), s)
		case n < 50:
			w, h = r.IntN(140), r.IntN(45)
		case n < 53:
			s = benches[r.IntN(len(benches))]
		default:
			key := keys[r.IntN(len(keys))]
			if r.IntN(5) > 0 { // the keys that gas hangs on, in any order
				key = likely[r.IntN(len(likely))]
			}
			typed := []string{key}
			if strings.Contains(key, " bar") || key == "265nm" || key == "arm" {
				typed = strings.Split(key, "")
			}
			for _, k := range typed {
				var intents []live.Intent
				v, intents = v.press(k, s)
				for _, in := range intents {
					switch in.(type) {
					case live.Arm:
						now := *s
						now.ArmedUntil = now.Now.Mono + time.Minute
						s = &now
					case live.Hold:
						now := *s
						now.ArmedUntil = 0
						s = &now
					case live.GoTo, live.Run, live.Resume, live.Tune:
						asked++
						if !armed(s) {
							t.Fatalf("event %d: %T asked for while not armed", i, in)
						}
					}
				}
			}
		}
		if i%50 == 0 {
			frames++
			checkWidth(t, draw(s, v, w, h, Style{}).String(), w, h)
		}
	}
	t.Logf("gas was asked to move %d times", asked)
	if frames != 2000 || asked == 0 {
		t.Fatalf("%d frames drawn, want 2000; gas moved %d times, want some", frames, asked)
	}
}

// The mouse turns pages, reads charts out and scrolls.
func TestMouse(t *testing.T) {
	s := tuitest.Filling()
	find := func(v view, name string) (x, y int) {
		f := draw(s, v, 120, 40, Style{})
		for y := range 40 {
			for x := range 120 {
				if got, _ := f.PlaceAt(x, y); got == name {
					return x, y
				}
			}
		}
		t.Fatalf("no place %q on the screen", name)
		return 0, 0
	}
	click := func(v view, x, y int, button tea.MouseButton) view {
		return v.mouse(tea.MouseMsg{X: x, Y: y, Action: tea.MouseActionPress, Button: button}, draw(s, v, 120, 40, Style{}), s)
	}
	for page := range pageCount {
		x, y := find(view{}, pagePlace+strconv.Itoa(int(page)))
		if got := click(view{}, x, y, tea.MouseButtonLeft); got.page != page {
			t.Errorf("a click on the name of page %v shows %v", page, got.page)
		}
	}
	x, y := find(view{}, timePlace)
	v := click(view{}, x, y, tea.MouseButtonLeft)
	if want := s.Now.Mono - v.span(); v.frozen == nil || v.cursor != want {
		t.Errorf("a click on the left end of a time chart reads %v out, want %v, and freezes: %v", v.cursor, want, v.frozen != nil)
	}
	if v := click(view{}, 60, 20, tea.MouseButtonWheelUp); v.span() >= (view{}).span() {
		t.Errorf("the wheel zooms from %v to %v", (view{}).span(), v.span())
	}
	if v := click(view{page: Log}, 60, 20, tea.MouseButtonWheelUp); v.scroll == 0 {
		t.Error("the wheel does not scroll the record")
	}
	many := tuitest.Alarms()
	v = view{overlay: alarmOverlay}
	f := draw(many, v, 120, 40, Style{})
	for y := range 40 {
		if name, _ := f.PlaceAt(60, y); name == alarmPlace+"2" {
			v = v.mouse(tea.MouseMsg{X: 60, Y: y, Action: tea.MouseActionPress, Button: tea.MouseButtonLeft}, f, many)
			break
		}
	}
	if v.pick != 2 {
		t.Errorf("a click on the third alarm picks alarm %d", v.pick)
	}
}

func checkWidth(t *testing.T, screen string, w, h int) {
	t.Helper()
	lines := strings.Split(screen, "\n")
	if h > 0 && len(lines) != h {
		t.Fatalf("%d lines on a screen of %d", len(lines), h)
	}
	for _, l := range lines {
		if got := ansi.StringWidth(l); got > w {
			t.Fatalf("line of %d columns on a screen of %d: %q", got, w, l)
		}
	}
	if strings.Contains(screen, "NaN") || strings.Contains(screen, "Inf") {
		t.Fatalf("the screen shows what is not a number:\n%s", screen)
	}
}
