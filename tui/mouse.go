package tui

import (
	"strconv"
	"strings"
	"time"

	tea "github.com/charmbracelet/bubbletea"

	"barline/model/live"
	"barline/tui/frame"
)

// The mouse is off until asked for: while a program takes it, most terminals
// no longer let text be marked and copied. It turns pages, scrolls, and moves
// the cursor. It asks for nothing: no click can move gas.

// Names of the places that take the mouse.
const (
	timePlace  = "time"  // a pane whose width is the time axis
	pagePlace  = "page " // followed by the number of the page
	alarmPlace = "alarm "
)

// wheelLines is how far one notch of the wheel scrolls a list.
const wheelLines = 3

// mouse answers one movement of the mouse over the frame that is shown.
func (v view) mouse(msg tea.MouseMsg, f *frame.Frame, s *live.Snapshot) view {
	if v.typing() || msg.Action == tea.MouseActionRelease {
		return v
	}
	switch msg.Button {
	case tea.MouseButtonWheelUp:
		return v.wheel("up", "+", s)
	case tea.MouseButtonWheelDown:
		return v.wheel("down", "-", s)
	case tea.MouseButtonLeft:
	default:
		return v
	}
	name, share := f.PlaceAt(msg.X, msg.Y)
	switch {
	case v.overlay == alarmOverlay && strings.HasPrefix(name, alarmPlace):
		v.pick, _ = strconv.Atoi(name[len(alarmPlace):])
	case v.overlay != noOverlay:
		v.overlay = noOverlay
	case strings.HasPrefix(name, pagePlace):
		n, _ := strconv.Atoi(name[len(pagePlace):])
		v.page = min(Page(n), pageCount-1)
	case name == timePlace:
		if v.frozen == nil {
			v.frozen = freeze(s)
		}
		start := v.end(s) - v.span()
		v.cursor = max(start+time.Duration(share*float64(v.span())), 1)
	}
	return v
}

// wheel moves a list where there is one and zooms the time axes elsewhere.
func (v view) wheel(line, zoom string, s *live.Snapshot) view {
	if v.page != Log && v.overlay != alarmOverlay {
		v, _ = pressZoom(v, s, zoom)
		return v
	}
	n := wheelLines
	if v.overlay == alarmOverlay {
		n = 1
	}
	for range n {
		v, _ = pressLine(v, s, line)
	}
	return v
}

func pressMouse(v view, _ *live.Snapshot, _ string) (view, []live.Intent) {
	v.mousing = !v.mousing
	v.message = "mouse off: text can be marked and copied again"
	if v.mousing {
		v.message = "mouse on: pages, charts, wheel; o gives it back to the terminal"
	}
	return v, nil
}
