package tui

import (
	"time"

	"barline/model/live"
)

// The keys of this file concern the screen or the alarm list and never the gas.

func pressPage(v view, _ *live.Snapshot, key string) (view, []live.Intent) {
	v.page = min(Page(key[0]-'1'), pageCount-1)
	return v, nil
}

func pressZoom(v view, _ *live.Snapshot, key string) (view, []live.Intent) {
	if key == "-" {
		v.zoom = min(v.zoom+1, len(spans)-1-usualSpan)
	} else {
		v.zoom = max(v.zoom-1, -usualSpan)
	}
	return v, nil
}

// pressMove moves the cursor where there is one. Otherwise it moves the charts
// in time, and freezes them: a chart that slides away under the eye cannot be
// read.
func pressMove(v view, s *live.Snapshot, key string) (view, []live.Intent) {
	step := v.span() / 4
	if v.cursor != 0 {
		step = v.span() / 60
	}
	if key == "left" {
		step = -step
	}
	if v.cursor != 0 {
		end := v.end(s)
		v.cursor = min(max(v.cursor+step, end-v.span(), 1), end)
		return v, nil
	}
	if v.frozen == nil {
		if step > 0 {
			return v, nil
		}
		v.frozen = freeze(s)
	}
	v.back = min(max(v.back-step, 0), max(0, v.frozen.at-v.span()/2))
	return v, nil
}

// pressCursor freezes too, for the same reason.
func pressCursor(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	if v.cursor != 0 {
		v.cursor = 0
		return v, nil
	}
	if v.frozen == nil {
		v.frozen = freeze(s)
	}
	v.cursor = max(v.end(s)-v.span()/2, 1)
	return v, nil
}

func pressFreeze(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	if v.frozen != nil {
		v.frozen, v.back, v.cursor = nil, 0, 0
		return v, nil
	}
	v.frozen = freeze(s)
	return v, nil
}

func pressPresent(v view, _ *live.Snapshot, _ string) (view, []live.Intent) {
	v.back, v.frozen, v.zoom, v.cursor, v.scroll, v.find = 0, nil, 0, 0, 0, ""
	return v, nil
}

func pressPlain(v view, _ *live.Snapshot, _ string) (view, []live.Intent) {
	v.plain = !v.plain
	if v.plain {
		v.message = "no charts; g brings them back"
	}
	return v, nil
}

func pressNear(v view, _ *live.Snapshot, key string) (view, []live.Intent) {
	switch {
	case key == "u" && v.page != Spectrum: // first let it be seen
		v.page = Spectrum
		return v, nil
	case key == "u":
		v.linear = !v.linear
		return v, nil
	case v.page == Spectrum:
		v.whole = !v.whole
		return v, nil
	}
	v.near = !v.near
	return v, nil
}

// aPage is how many lines a page key moves a list.
const aPage = 15

func pressLine(v view, s *live.Snapshot, key string) (view, []live.Intent) {
	step := map[string]int{"up": 1, "down": -1, "pgup": aPage, "pgdown": -aPage}[key]
	if v.overlay == alarmOverlay {
		v.pick = min(max(v.pick-step, 0), max(0, len(s.Alarms)-1))
		return v, nil
	}
	if v.page == Log {
		v.scroll = min(max(v.scroll+step, 0), max(0, len(found(s.Recent, v.find))-1))
	}
	return v, nil
}

func pressFind(v view, _ *live.Snapshot, _ string) (view, []live.Intent) {
	v.page, v.overlay, v.text = Log, findOverlay, v.find
	return v, nil
}

func pressAlarms(v view, _ *live.Snapshot, _ string) (view, []live.Intent) {
	v.pick = 0
	return v.toggle(alarmOverlay), nil
}

// chosen returns the alarm that the keys mean: with the list open the one
// picked there, otherwise the one on top.
func (v view) chosen(s *live.Snapshot) (live.Alarm, bool) {
	if v.overlay == alarmOverlay && len(s.Alarms) > 0 {
		return s.Alarms[min(v.pick, len(s.Alarms)-1)], true
	}
	al, n := worst(s)
	return al, n > 0
}

func pressSeen(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	al, some := v.chosen(s)
	switch {
	case !some || al.Acked:
		v.message = "no alarm to acknowledge"
	case s.ReadOnly:
		v.message = elsewhere(s)
	default:
		v.message = "seen: " + al.Name
		return v, []live.Intent{live.Acknowledge{Alarm: al.Name}}
	}
	return v, nil
}

// asideFor is how long an alarm is put aside: a shift is eight hours, and a
// person who puts one aside means to be back long before.
const asideFor = time.Hour

// pressListed puts the alarm chosen in the list aside (w), brings it back, or
// resets it (e).
func pressListed(v view, s *live.Snapshot, key string) (view, []live.Intent) {
	al, some := v.chosen(s)
	switch {
	case v.overlay != alarmOverlay || !some:
		v.message = "open the list of alarms (l) and choose one first"
	case s.ReadOnly:
		v.message = elsewhere(s)
	case key == "e" && al.Active:
		v.message = al.Name + " still holds: mend the cause first"
	case key == "e":
		v.message = "reset: " + al.Name
		return v, []live.Intent{live.Reset{Alarm: al.Name}}
	case al.Hidden:
		v.message = "brought back: " + al.Name
		return v, []live.Intent{live.Unshelve{Alarm: al.Name}}
	default:
		v.message = "put aside for an hour: " + al.Name
		return v, []live.Intent{live.Shelve{Alarm: al.Name, For: asideFor}}
	}
	return v, nil
}
