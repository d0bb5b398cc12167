package tui

import (
	"fmt"
	"math"
	"strings"

	"barline/model/live"
	"barline/model/unit"
	"barline/tui/chart"
	"barline/tui/frame"
)

// drawScan shows how far a program is, the emission map, how far each point is
// from the prediction, and the rows that the record keeps.
func drawScan(a frame.Area, s *live.Snapshot, v view) {
	drawProgress(a.Sub(0, 0, a.W, 1), s)
	if v.plain {
		drawRows(a.Sub(0, 2, a.W, a.H-2), s)
		return
	}
	table := max(5, a.H*2/5)
	charts := a.Sub(0, 2, a.W, a.H-table-2)
	left := charts.W / 2
	drawMap(charts.Sub(0, 0, left, charts.H), s, v.near)
	drawApart(charts.Sub(left+2, 0, charts.W-left-2, charts.H), s)
	drawRows(a.Sub(0, a.H-table, a.W, table), s)
}

// drawProgress draws the program that is under way as words and a bar.
func drawProgress(a frame.Area, s *live.Snapshot) {
	p := s.Program
	if p.Count == 0 {
		x := a.Text(1, 0, "no program is under way", frame.Faint) + 2
		switch {
		case s.ReadOnly:
		case armed(s):
			a.Text(x, 0, "r runs a scan or a procedure", frame.Faint)
		default:
			a.Text(x, 0, "arm (a), then r runs a scan or a procedure", frame.Faint)
		}
		return
	}
	text := programText(s)
	if p.Label != "" && p.Label != p.Name {
		text += " · " + p.Label
	}
	if p.Left > 0 {
		text += " · at least " + spanText(p.Left) + " left"
	}
	x := a.Text(1, 0, text, frame.Target) + 2
	width := min(40, a.W-x-1)
	if width < 8 {
		return
	}
	done := width * p.Index / p.Count
	for i := range width {
		r, ink := '─', frame.Rule
		if i < done {
			r, ink = '━', frame.Target
		}
		a.Set(x+i, 0, r, ink)
	}
}

// apart is one measured emission against what was predicted for it.
type apart struct {
	bar, nm float64
	rising  bool
}

// aparts takes the rows of the runs where there are any, each with the
// prediction that stood when it was taken, and otherwise the points of the map
// against the present curve.
func aparts(s *live.Snapshot) (points []apart, against string) {
	for i, r := range s.Rows {
		if r.ResidualM == nil {
			continue
		}
		rising := i == 0 || r.SetPa >= s.Rows[i-1].SetPa
		points = append(points, apart{r.CorePa / 1e5, *r.ResidualM * 1e9, rising})
	}
	if len(points) > 0 {
		return points, "rows"
	}
	for _, p := range s.Points {
		if e, _, ok := onCurve(s.Curve, p.Pressure); ok {
			points = append(points, apart{p.Pressure.Bar(), (p.Emission - e).Nanometres(), p.Rising})
		}
	}
	return points, "points, present curve"
}

func drawApart(a frame.Area, s *live.Snapshot) {
	points, against := aparts(s)
	x := heading(a, "measured "+minus+" predicted", "nm over bar")
	if x+a.Width(against) <= a.W {
		a.Text(x, 0, against, frame.Faint)
	}
	body := a.Sub(0, 1, a.W, a.H-1)
	var rx, ry chart.Range
	for _, p := range points {
		rx.Include(p.bar)
		ry.Include(p.nm)
	}
	if rx.Empty() {
		blank(body, "nothing measured yet")
		return
	}
	ry.Include(0)
	rx, ry = rx.Padded(0.03, 0.1), ry.Padded(0.1, 2)
	p := chart.New(body, chart.Axes{
		X: rx, Y: ry, XTicks: chart.Ticks(rx, max(2, a.W/8)), YTicks: chart.Ticks(ry, rowTicks(body.H)), LabelWidth: yLabel,
	})
	p.Level(0, frame.Predicted)
	cells := make(map[[2]int]ways)
	for _, m := range points {
		markDirection(p, chart.Point{X: m.bar, Y: m.nm}, m.rising, cells)
	}
	p.Done()
}

// drawRows lists the newest rows; each carries its units in the heading.
func drawRows(a frame.Area, s *live.Snapshot) {
	const format = "%4s  %8s  %9s  %13s  %13s  %9s  %3s  %s"
	a.Text(1, 0, fmt.Sprintf(format, "step", "set, bar", "core, bar", "measured, nm", "predicted, nm", "apart, nm", "n", "status"), frame.Faint)
	if len(s.Rows) == 0 {
		blank(a, "no row yet: a scan writes one a step")
		return
	}
	rows := s.Rows[max(0, len(s.Rows)-(a.H-1)):]
	for i, r := range rows {
		text := fmt.Sprintf(format,
			fmt.Sprint(r.Step), fixed(r.SetPa/1e5, 3), fixed(r.CorePa/1e5, 3),
			plusMinus(r.MeasuredM, r.ScatterM), plusMinus(r.PredictedM, r.SigmaM),
			optional(r.ResidualM), fmt.Sprint(r.Samples), strings.Replace(r.Status, "function ", "", 1))
		ink := frame.Plain
		if r.Status != "good" {
			ink = frame.Caution
		}
		a.Text(1, 1+i, strings.TrimRight(text, " "), ink)
	}
}

func plusMinus(m *float64, sigma float64) string {
	if m == nil {
		return "none"
	}
	if !(sigma > 0) {
		return fixed(*m*1e9, 1)
	}
	return strings.TrimSuffix(emissionText(unit.Metre(*m), unit.Metre(sigma)), " nm")
}

func optional(m *float64) string {
	if m == nil || math.IsNaN(*m) {
		return "none"
	}
	return signed(*m*1e9, 1)
}
