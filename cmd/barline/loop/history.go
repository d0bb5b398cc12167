package loop

import (
	"fmt"
	"slices"
	"time"

	"barline/model/drift"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/trend"
	"barline/model/unit"
)

const (
	maxPoints = 512 // of the emission map
	maxLines  = 200 // of the record on screen
	maxRows   = 512 // of runs of steps
	maxMarks  = 512
	maxDrift  = 1024 // groups of one chart

	trendsEvery = time.Second

	// A measured emission becomes a point of the map when the gas or the
	// clock has moved on this far since the last one.
	pointEvery    = time.Second
	pointPressure = 10 * unit.Millibar
)

// history is what the screen shows of the past. The record on disk is the
// logbook; this is a picture of fixed size.
type history struct {
	pressure, expected, residual *trend.Ring

	roles  [reading.RoleCount]*trend.Ring // nil until something was measured
	views  [reading.RoleCount]*trend.View
	viewed time.Duration
	rows   []live.StepData
	marks  []live.Mark

	points []live.Point
	lines  []live.Line
	drift  [drift.ObservableCount][]drift.Point
}

func newHistory() history {
	return history{pressure: trend.NewRing(), expected: trend.NewRing(), residual: trend.NewRing()}
}

func (h *history) reading(s *live.State, r reading.Reading) {
	if !r.Status.Usable() {
		return
	}
	if h.roles[r.Role] == nil {
		h.roles[r.Role] = trend.NewRing()
	}
	h.roles[r.Role].Add(r.Taken.Mono, r.Value)
	switch r.Role {
	case reading.CellAPressure:
		h.pressure.Add(r.Taken.Mono, r.Value)
	case reading.Emission:
		if s.ResidualAt == r.Taken.Mono {
			h.residual.Add(r.Taken.Mono, float64(s.Residual))
		}
		if s.CoreKnown {
			h.point(live.Point{At: r.Taken, Pressure: s.Core, Emission: unit.Metre(r.Value), Rising: s.Target >= s.Core})
		}
	}
}

func (h *history) point(p live.Point) {
	if n := len(h.points); n > 0 {
		last := h.points[n-1]
		moved := p.Pressure - last.Pressure
		if p.At.Mono-last.At.Mono < pointEvery && max(moved, -moved) < pointPressure {
			return
		}
	}
	if len(h.points) == maxPoints {
		// A snapshot may still be drawing the old slice.
		h.points = append(make([]live.Point, 0, 2*maxPoints), h.points[maxPoints/4:]...)
	}
	h.points = append(h.points, p)
}

// trends returns the history of every role, made anew once a second: it is
// for charts of minutes and more, and a copy of them all is not free.
func (h *history) trends(now time.Duration) [reading.RoleCount]*trend.View {
	if h.viewed == 0 || now-h.viewed >= trendsEvery {
		for i, r := range h.roles {
			if r != nil {
				h.views[i] = r.View()
			}
		}
		h.viewed = now
	}
	return h.views
}

// mark keeps when something happened that a chart shows a sign for.
func (h *history) mark(at reading.Stamp, kind live.Kind) {
	switch kind {
	case live.KindNote, live.KindAlarm, live.KindIntent, live.KindStep:
	default:
		return
	}
	if len(h.marks) == maxMarks {
		h.marks = append(make([]live.Mark, 0, 2*maxMarks), h.marks[maxMarks/4:]...)
	}
	h.marks = append(h.marks, live.Mark{At: at.Mono, Kind: kind})
}

func (h *history) row(r live.StepData) {
	if len(h.rows) == maxRows {
		h.rows = append(make([]live.StepData, 0, 2*maxRows), h.rows[maxRows/4:]...)
	}
	h.rows = append(h.rows, r)
}

func (h *history) tick(s *live.State) {
	if s.Setpoint != 0 {
		h.expected.Add(s.Now.Mono, float64(s.Setpoint))
	}
}

// groups keeps the newest group mean of every chart.
func (h *history) groups(v *live.DriftView) {
	for o := range v.Tracks {
		p := v.Tracks[o].Last
		n := len(h.drift[o])
		if p.At == 0 || n > 0 && h.drift[o][n-1].At == p.At {
			continue
		}
		if n == maxDrift {
			h.drift[o] = append(make([]drift.Point, 0, 2*maxDrift), h.drift[o][maxDrift/4:]...)
		}
		h.drift[o] = append(h.drift[o], p)
	}
}

// charted returns the group means of every chart.
func (h *history) charted() (all [drift.ObservableCount][]drift.Point) {
	for o := range all {
		all[o] = slices.Clip(h.drift[o])
	}
	return all
}

func (h *history) line(at reading.Stamp, kind live.Kind, data any) {
	text := ""
	if t, ok := data.(fmt.Stringer); ok {
		text = t.String()
	}
	h.text(at, kind, text)
}

func (h *history) text(at reading.Stamp, kind live.Kind, text string) {
	h.mark(at, kind)
	if len(h.lines) == maxLines {
		h.lines = append(make([]live.Line, 0, 2*maxLines), h.lines[maxLines/4:]...)
	}
	h.lines = append(h.lines, live.Line{At: at, Kind: kind, Text: text})
}
