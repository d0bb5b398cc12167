package tui

import (
	"math"

	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/tui/chart"
	"barline/tui/frame"
)

// mapRange is what the emission map shows: the predicted curve as far as the
// spectrometer can see it, and every measured point.
func mapRange(s *live.Snapshot) (x, y chart.Range) {
	low, high := spectrometerRange(s)
	for _, c := range s.Curve {
		if nm := c.Emission.Nanometres(); nm >= low && nm <= high {
			x.Include(c.Pressure.Bar())
			y.Include(max(nm-c.Sigma.Nanometres(), low))
			y.Include(min(nm+c.Sigma.Nanometres(), high))
		}
	}
	for _, p := range s.Points {
		x.Include(p.Pressure.Bar())
		y.Include(p.Emission.Nanometres())
	}
	return x, y
}

// spectrometerRange returns the range in nm that the emission's channel is
// specified for, without bounds where the bench file gives none.
func spectrometerRange(s *live.Snapshot) (low, high float64) {
	low, high = 0, math.Inf(1)
	if s.Bench == nil {
		return low, high
	}
	for i := range s.Bench.Instrument {
		for _, ch := range s.Bench.Instrument[i].Channel {
			if ch.Role != reading.Emission || len(ch.Range) != 2 {
				continue
			}
			a, errA := unit.ParseLength(ch.Range[0])
			b, errB := unit.ParseLength(ch.Range[1])
			if errA == nil && errB == nil && a < b {
				return a.Nanometres(), b.Nanometres()
			}
		}
	}
	return low, high
}

// nearRange is a window of four bar round the present pressure. It moves in
// whole bars, so that the map does not slide with every reading.
func nearRange(s *live.Snapshot) (x, y chart.Range) {
	middle := math.Round(s.Core.Bar())
	x = chart.Between(middle-2, middle+2)
	for _, c := range s.Curve {
		if bar := c.Pressure.Bar(); bar >= x.Lo && bar <= x.Hi && c.Emission > 0 {
			y.Include(c.Emission.Nanometres())
		}
	}
	for _, p := range s.Points {
		if bar := p.Pressure.Bar(); bar >= x.Lo && bar <= x.Hi {
			y.Include(p.Emission.Nanometres())
		}
	}
	return x, y
}

// drawMap draws the predicted emission over pressure with its band, the
// emissions measured on the way up and down, and where the bench is now.
func drawMap(a frame.Area, s *live.Snapshot, near bool) {
	curve := make([]chart.Point, len(s.Curve))
	low, high := make([]chart.Point, len(s.Curve)), make([]chart.Point, len(s.Curve))
	var others []chart.Point
	for i, c := range s.Curve {
		for _, o := range c.Others {
			if o > 0 {
				others = append(others, chart.Point{X: c.Pressure.Bar(), Y: o.Nanometres()})
			}
		}
		bar, nm, sigma := c.Pressure.Bar(), c.Emission.Nanometres(), c.Sigma.Nanometres()
		if !(c.Emission > 0) {
			nm = math.NaN()
		}
		curve[i], low[i], high[i] = chart.Point{X: bar, Y: nm}, chart.Point{X: bar, Y: nm - sigma}, chart.Point{X: bar, Y: nm + sigma}
	}
	x, y := mapRange(s)
	if near && s.CoreKnown {
		x, y = nearRange(s)
	}
	measured := show(s, reading.Emission)
	here := chart.Point{X: s.Core.Bar(), Y: math.NaN()}
	if measured.known {
		here.Y = s.Latest[reading.Emission].Value * 1e9
	}
	if s.CoreKnown && measured.known {
		x.Include(here.X)
		y.Include(here.Y)
	}

	at := heading(a, "emission", "nm over bar")
	at = a.Text(at, 0, "◇ ", frame.Predicted)
	answer := "predicted"
	if s.Prediction.Valid {
		answer = s.Prediction.Answer.String() + calibratedAt(s)
	}
	a.Text(at, 0, answer, frame.Predicted)

	body := a.Sub(0, 1, a.W, a.H-1)
	x, y = x.Padded(0.01, 0.1), y.Padded(0.04, 5)
	if x.Empty() || y.Empty() {
		blank(body, "no prediction yet")
		return
	}
	p := chart.New(body, chart.Axes{
		X: x, Y: y, XTicks: chart.Ticks(x, max(2, a.W/8)), YTicks: chart.Ticks(y, rowTicks(body.H)), LabelWidth: 4,
	})
	drawResonances(p, s, a.Style().ASCII)
	if a.Style().ASCII { // without Braille, shading hides the curve
		p.Dashes(low, frame.Band)
		p.Dashes(high, frame.Band)
	} else {
		p.Band(low, high, frame.Band)
	}
	p.Dots(others, frame.Predicted)
	p.Curve(curve, frame.Predicted)
	if s.CalibratedTo > s.CalibratedFrom {
		p.Reach(s.CalibratedFrom.Bar(), s.CalibratedTo.Bar(), frame.Good)
	}
	if s.CoreKnown {
		p.Upright(here.X, frame.Faint)
	}
	cells := make(map[[2]int]ways)
	for _, m := range s.Points {
		markDirection(p, chart.Point{X: m.Pressure.Bar(), Y: m.Emission.Nanometres()}, m.Rising, cells)
	}
	if s.CoreKnown && s.Prediction.Valid && s.Prediction.Emission != 0 {
		p.Mark(chart.Point{X: here.X, Y: s.Prediction.Emission.Nanometres()}, '◇', frame.Predicted)
	}
	for _, b := range otherBranches(s) {
		p.Mark(chart.Point{X: here.X, Y: b.Emission.Nanometres()}, '◇', frame.Band)
	}
	if s.CoreKnown {
		p.Mark(here, '●', frame.Measured)
	}
	p.Done()
	if pane := p.Pane(); s.CoreKnown && here.X < x.Lo {
		pane.Text(1, 0, "← now at "+pressureText(s.Core), frame.Predicted)
	} else if s.CoreKnown && here.X > x.Hi {
		pane.Right(pane.W-1, 0, "now at "+pressureText(s.Core)+" →", frame.Predicted)
	}
	drawMapKey(p.Pane(), s)
}

// markDirection marks a measured point by the way the pressure went; where
// points of both ways share a character cell, a cross. cells remembers them by
// cell.
func markDirection(p *chart.Plot, at chart.Point, rising bool, cells map[[2]int]ways) {
	x, y := p.Cell(at)
	w := cells[[2]int{x, y}]
	if rising {
		w |= up
	} else {
		w |= down
	}
	cells[[2]int{x, y}] = w
	switch w {
	case up:
		p.Mark(at, '▲', frame.Rising)
	case down:
		p.Mark(at, '▼', frame.Falling)
	default:
		p.Mark(at, '×', frame.Plain)
	}
}

// ways are the directions in which the pressure went towards points.
type ways uint8

const (
	up ways = 1 << iota
	down
)

// drawResonances shades the wavelengths at which the wall of the fibre
// resonates: what is predicted near them is not guided.
func drawResonances(p *chart.Plot, s *live.Snapshot, ascii bool) {
	for _, r := range s.Resonances {
		lo, hi := r.From.Nanometres(), r.To.Nanometres()
		if ascii {
			p.Level(lo, frame.Rule)
			p.Level(hi, frame.Rule)
		} else {
			p.Stripe(lo, hi, frame.Rule)
		}
		name := "wall resonance"
		if p.Pane().W < 44 { // the key stands beside it
			name = "resonance"
		}
		p.Label((lo+hi)/2, name, frame.Faint)
	}
}

// otherBranches are the lobes beside the strongest that the source may emit.
func otherBranches(s *live.Snapshot) []emission.Branch {
	p := &s.Prediction
	if !p.Valid || !s.CoreKnown || p.BranchCount < 2 {
		return nil
	}
	return p.Branches[1:min(p.BranchCount, len(p.Branches))]
}

// drawMapKey explains the marks where the chart is empty by nature: emission
// rises with pressure, so the lower right corner is free.
func drawMapKey(a frame.Area, s *live.Snapshot) {
	if a.W < 26 || a.H < 10 { // a lower pane has no free corner
		return
	}
	type entry struct {
		mark rune
		ink  frame.Ink
		text string
	}
	lines := []entry{{'●', frame.Measured, "measured now"}, {'◇', frame.Predicted, "predicted now"}}
	rising, falling := false, false
	for _, p := range s.Points {
		rising, falling = rising || p.Rising, falling || !p.Rising
	}
	if rising {
		lines = append(lines, entry{'▲', frame.Rising, "rising"})
	}
	if falling {
		lines = append(lines, entry{'▼', frame.Falling, "falling"})
	}
	if rising && falling {
		lines = append(lines, entry{'×', frame.Plain, "both"})
	}
	if branched(s) {
		lines = append(lines, entry{'⠒', frame.Predicted, "weaker branch"})
	}
	if s.CalibratedTo > s.CalibratedFrom {
		lines = append(lines, entry{'⣀', frame.Good, "calibrated"})
	}
	y := a.H - len(lines) - 1 // the lowest row holds the reach of the calibration
	a.Sub(a.W-17, y, 17, len(lines)).Fill(' ', frame.Plain)
	for i, l := range lines {
		a.Set(a.W-16, y+i, l.mark, l.ink)
		a.Text(a.W-14, y+i, l.text, frame.Faint)
	}
}

// branched reports whether a second branch is predicted anywhere.
func branched(s *live.Snapshot) bool {
	for _, c := range s.Curve {
		if c.Others[0] > 0 {
			return true
		}
	}
	return false
}

// drawRecent shows the last lines of the record, newest at the bottom.
func drawRecent(a frame.Area, s *live.Snapshot) {
	x := heading(a, "record", "")
	if s.Folder != "" {
		a.Text(x, 0, s.Folder, frame.Faint)
	}
	n := min(len(s.Recent), a.H-1)
	for i, line := range s.Recent[len(s.Recent)-n:] {
		a.Text(2, 1+i, lineText(line, a.Style()), frame.Plain)
	}
}
