package tui

import (
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"barline/tui/frame"
	"barline/tui/tuitest"
)

var update = flag.Bool("update", false, "rewrite the golden screens; read the difference")

// Golden screens say that nothing moved unseen. They vouch for no number.
func TestGoldenScreens(t *testing.T) {
	type sized struct {
		situation string
		w, h      int
		style     Style
		tag       string
	}
	var cases []sized
	for name := range tuitest.Situations() {
		cases = append(cases, sized{name, 80, 24, Style{}, "plain"}, sized{name, 120, 40, Style{}, "plain"})
	}
	for _, size := range [][2]int{{100, 30}, {200, 60}, {40, 12}, {7, 2}} {
		cases = append(cases, sized{"filling", size[0], size[1], Style{}, "plain"})
	}
	for tag, style := range map[string]Style{
		"palette": {Colours: frame.Palette}, "light": {Colours: frame.Palette, Light: true},
		"sixteen": {Colours: frame.Sixteen}, "ascii": {ASCII: true},
	} {
		cases = append(cases, sized{"filling", 120, 40, style, tag}, sized{"stale", 80, 24, style, tag})
	}
	for _, name := range []string{"calm", "no-emission", "lost-link", "branches", "fresh"} {
		for _, size := range [][2]int{{80, 24}, {120, 40}} {
			name, situation := fmt.Sprintf("spectrum-%s-%dx%d", name, size[0], size[1]), name
			t.Run(name, func(t *testing.T) {
				golden(t, name, Render(situations()[situation], Spectrum, size[0], size[1], Style{}))
			})
		}
	}
	for name, c := range map[string]struct {
		v     view
		w, h  int
		style Style
	}{
		"spectrum-linear": {view{page: Spectrum, linear: true}, 80, 24, Style{}}, "spectrum-whole": {view{page: Spectrum, whole: true}, 120, 40, Style{}},
		"spectrum-ascii": {view{page: Spectrum}, 80, 24, Style{ASCII: true}}, "spectrum-plain": {view{page: Spectrum, plain: true}, 80, 24, Style{}},
		"spectrum-200x60": {view{page: Spectrum}, 200, 60, Style{}}, "spectrum-palette": {view{page: Spectrum}, 120, 40, Style{Colours: frame.Palette}},
	} {
		t.Run(name, func(t *testing.T) {
			golden(t, name, draw(situations()["filling"], c.v, c.w, c.h, c.style).String())
		})
	}
	for page := Spectrum; page < pageCount; page++ {
		for _, size := range [][2]int{{80, 24}, {120, 40}} {
			name := fmt.Sprintf("%v-%dx%d", page, size[0], size[1])
			t.Run(name, func(t *testing.T) {
				golden(t, name, Render(situations()["filling"], page, size[0], size[1], Style{}))
			})
		}
	}
	for page := Scan; page < pageCount; page++ {
		t.Run("no-charts-"+page.String(), func(t *testing.T) {
			golden(t, "no-charts-"+page.String(), draw(situations()["scanning"], view{page: page, plain: true}, 80, 24, Style{}).String())
		})
	}
	for name, v := range map[string]view{
		"help": {overlay: helpOverlay}, "arm": {overlay: armOverlay, text: "ar"}, "greeting": {overlay: greetOverlay},
		"setpoint": {overlay: setpointOverlay, text: "9.2 bar"}, "setpoint-refused": {overlay: setpointOverlay, text: "17 bar"},
		"tune-form": {overlay: tuneOverlay, text: "265 nm hold"}, "scan-form": {overlay: runOverlay, text: scanExample}, "run-form": {overlay: runOverlay, text: runExample}, "run-refused": {overlay: runOverlay, text: "fill to 9 bar, dwell 3 s"}, "alarm-list": {overlay: alarmOverlay, pick: 3},
		"plain": {plain: true}, "frozen": {frozen: freeze(situations()["filling"]), back: 20e9, cursor: tuitest.Elapsed - 60e9},
		"found": {page: Log, find: "NOTE"},
	} {
		s := situations()["filling"]
		if name == "alarm-list" {
			s = situations()["alarms"]
		}
		t.Run(name, func(t *testing.T) { golden(t, name, draw(s, v, 80, 24, Style{}).String()) })
	}
	for _, c := range cases {
		name := fmt.Sprintf("%s-%dx%d-%s", c.situation, c.w, c.h, c.tag)
		t.Run(name, func(t *testing.T) {
			golden(t, name, Render(situations()[c.situation], Bench, c.w, c.h, c.style))
		})
	}
}

func golden(t *testing.T, name, got string) {
	t.Helper()
	path := filepath.Join("testdata", name+".screen")
	if *update {
		if err := os.MkdirAll("testdata", 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, []byte(got+"\n"), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	is, was := strings.Split(got+"\n", "\n"), strings.Split(string(want), "\n")
	for i := range max(len(is), len(was)) {
		if i >= len(is) || i >= len(was) || is[i] != was[i] {
			t.Errorf("screen differs from %s from line %d on; with -update the difference can be read", path, i+1)
			return
		}
	}
}
