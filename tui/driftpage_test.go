package tui

import (
	"fmt"
	"reflect"
	"strings"
	"testing"

	"github.com/charmbracelet/x/ansi"

	"barline/model/calibration"
	"barline/model/live"
	"barline/tui/frame"
	"barline/tui/tuitest"
)

func TestGoldenDrift(t *testing.T) {
	for _, situation := range []string{"drifting", "quiet", "learning", "fresh"} {
		for _, size := range [][2]int{{80, 24}, {120, 40}, {200, 60}} {
			name := fmt.Sprintf("drift-%s-%dx%d", situation, size[0], size[1])
			t.Run(name, func(t *testing.T) {
				golden(t, name, Render(situations()[situation], Drift, size[0], size[1], Style{}))
			})
		}
	}
	s := situations()["drifting"]
	for name, c := range map[string]struct {
		v     view
		style Style
	}{
		"drift-ascii":            {view{page: Drift}, Style{ASCII: true}},
		"drift-palette":          {view{page: Drift}, Style{Colours: frame.Palette}},
		"drift-step":             {view{page: Drift, overlay: stepOverlay}, Style{}},
		"drift-step-by-hand":     {view{page: Drift, overlay: stepOverlay, pick: 1}, Style{}},
		"drift-calibrations":     {view{page: Drift, overlay: calibrationOverlay}, Style{}},
		"drift-calibration-used": {view{page: Drift, overlay: calibrationOverlay, pick: 1}, Style{}},
	} {
		t.Run(name, func(t *testing.T) { golden(t, name, draw(s, c.v, 80, 24, c.style).String()) })
	}
}

// The page says in words what moved, why, what would tell, and on which
// calibration it stands, at every size.
func TestDriftPageSaysWhy(t *testing.T) {
	for _, size := range [][2]int{{80, 24}, {100, 30}, {120, 40}, {200, 60}} {
		screen := strings.Join(strings.Fields(ansi.Strip(Render(tuitest.Drifting(), Drift, size[0], size[1], Style{}))), " ")
		for _, want := range []string{"since 11:22", "72 % cell A gauge zero, moved by -0.130 bar", "21 % cell A gauge span", "cannot be told from", "compare at 1 bar", "calibration scan of 2026-11-30"} {
			if !strings.Contains(screen, want) {
				t.Errorf("%dx%d: %q is not on the page:\n%s", size[0], size[1], want, screen)
			}
		}
	}
}

func TestKeysOfDrift(t *testing.T) {
	s := tuitest.Drifting()
	press := func(v view, keys ...string) (view, []live.Intent) {
		var all []live.Intent
		for _, k := range keys {
			var in []live.Intent
			v, in = v.press(k, s)
			all = append(all, in...)
		}
		return v, all
	}
	for _, c := range []struct {
		keys []string
		want []live.Intent
		says string
	}{
		{[]string{"i", "u"}, []live.Intent{live.Adopt{Name: "scan of 2026-12-01 09:10"}}, ""},
		{[]string{"i", "down", "u"}, []live.Intent{live.Adopt{Name: "scan of 2026-11-30 11:00"}}, ""},
		{[]string{"i", "b"}, []live.Intent{live.Revert{}}, ""},
		{[]string{"i", "n"}, []live.Intent{live.Calibrate{}}, ""},
		{[]string{"i", "esc", "u"}, nil, ""},
		{[]string{"j", "u"}, []live.Intent{live.LearnAnew{}}, "learning anew"},
		{[]string{"j", "enter"}, nil, "not armed"},
		{[]string{"j", "down", "enter"}, nil, "a person has to do it"},
	} {
		v, got := press(view{page: Drift}, c.keys...)
		if !reflect.DeepEqual(got, c.want) || !strings.Contains(v.message, c.says) {
			t.Errorf("%q: %+v, %q; want %+v, %q", c.keys, got, v.message, c.want, c.says)
		}
	}
	// Nothing begins by itself: it takes arming, the cautions and Enter.
	s.ArmedUntil = s.Now.Mono + 60e9
	v, got := press(view{page: Drift}, "j", "enter")
	if v.overlay == cautionOverlay {
		v, got = press(v, "enter")
	}
	run := false
	for _, in := range got {
		if r, ok := in.(live.Run); ok {
			run = r.Program == s.Drift.Steps[0].Program
		}
	}
	if !run {
		t.Errorf("armed, Enter asks for %+v; %q", got, v.message)
	}
	s.ReadOnly = true
	for _, keys := range [][]string{{"i", "u"}, {"i", "b"}, {"i", "n"}, {"j", "u"}, {"j", "enter"}} {
		if v, got := press(view{page: Drift}, keys...); got != nil || v.message == "" {
			t.Errorf("a second screen: %q gives %+v, %q", keys, got, v.message)
		}
	}
	empty := &live.Snapshot{}
	for _, keys := range [][]string{{"i", "u"}, {"i", "down", "up", "pgdown"}, {"j", "down", "enter"}} {
		v := view{page: Drift}
		for _, k := range keys {
			v, _ = v.press(k, empty)
		}
		draw(empty, v, 80, 24, Style{})
	}
}

func TestBeyondTheDataIsOnTheScreen(t *testing.T) {
	s := tuitest.Drifting()
	s.Prediction.Beyond = true
	for _, page := range []Page{Drift, Bench} {
		if screen := ansi.Strip(Render(s, page, 200, 60, Style{})); !strings.Contains(strings.ToLower(screen), "beyond its") {
			t.Errorf("%v does not say that the prediction is beyond its data", page)
		}
	}
	s.Calibrations = live.Calibrations{InUse: &calibration.Calibration{Name: "x"}, Why: "no runs yet"}
	if screen := ansi.Strip(Render(s, Drift, 200, 60, Style{})); !strings.Contains(screen, "calibration x not yet: no runs yet") {
		t.Error("a calibration that waits is not said to")
	}
}
