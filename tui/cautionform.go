package tui

import (
	"slices"

	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/tui/frame"
)

// pending is what waits until somebody has read the cautions that come before
// it.
type pending struct {
	cautions []live.Caution
	intents  []live.Intent
}

// careful asks for in, which carries out p, or shows the cautions first that
// nobody has acknowledged since the bench was armed.
func (v view) careful(s *live.Snapshot, p *live.Program, in live.Intent) (view, []live.Intent) {
	var unread []live.Caution
	if s.Bench != nil {
		ambient, err := ambientPressure(s)
		if err != nil {
			ambient = 0
		}
		for _, c := range live.CautionsOf(p, highestCell(s), s.Bench.Limits.CautionAbove, ambient) {
			if !slices.Contains(s.Acknowledged, c) {
				unread = append(unread, c)
			}
		}
	}
	if len(unread) == 0 {
		return v, []live.Intent{in}
	}
	v = v.open(cautionOverlay)
	v.pending = &pending{unread, nil}
	for _, c := range unread {
		v.pending.intents = append(v.pending.intents, live.Understood{Caution: c})
	}
	v.pending.intents = append(v.pending.intents, in)
	return v, nil
}

// highestCell returns the higher of what the cell gauges read.
func highestCell(s *live.Snapshot) unit.Pascal {
	p := unit.Pascal(0)
	for _, role := range [...]reading.Role{reading.CellAPressure, reading.CellBPressure} {
		if r := s.Latest[role]; r.Channel != "" && r.Status.Usable() {
			p = max(p, unit.Pascal(r.Value))
		}
	}
	return p
}

// pressCaution answers a key while cautions are shown.
func pressCaution(v view, s *live.Snapshot, key string) (view, []live.Intent) {
	held := v.pending
	v.overlay, v.pending = noOverlay, nil
	switch {
	case key != "enter" || held == nil:
		v.message = "nothing was sent"
	case !armed(s): // it may have lapsed while reading
		v.message = "no longer armed: press a first"
	default:
		return v, held.intents
	}
	return v, nil
}

func drawCaution(a frame.Area, v view) {
	if v.pending == nil {
		return
	}
	b := box(a, "before gas moves", 66, 5*len(v.pending.cautions)+1, frame.Caution)
	y := 0
	for _, c := range v.pending.cautions {
		b.Text(0, y, c.String(), frame.Caution)
		y += wrap(b.Sub(0, y+1, b.W, 4), c.Text(), frame.Plain) + 2
	}
	b.Text(0, b.H-1, "Enter: this is so, go on. Any other key: nothing is sent.", frame.Strong)
}
