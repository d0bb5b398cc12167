package tui

import (
	"math"

	"barline/model/drift"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/trend"
	"barline/model/unit"
	"barline/tui/chart"
	"barline/tui/frame"
)

// strip is one chart of the drift page: a history, and where the observable is
// charted what was quiet and within which limits its average may move.
type strip struct {
	title, unit string
	view        *trend.View
	to          func(float64) float64 // from SI to the unit shown
	decimals    int
	least       float64 // smallest span of the axis, in the unit shown
	scale       float64 // of differences
	watched     int     // observable, -1 where none
}

func times(k float64) func(float64) float64 { return func(v float64) float64 { return v * k } }

// strips are what is charted first, what rings before the rest, and then what
// may move together with it, in the order in which one looks.
func strips(s *live.Snapshot) []strip {
	all := []strip{
		{"measured " + minus + " predicted", "nm", s.Residuals, times(1e9), 1, 0.5, 1e9, int(drift.Wavelength)},
		{"emission strength", "%", s.Trends[reading.EmissionStrength], times(100), 2, 0.5, 100, int(drift.Strength)},
		{"emission width", "nm", s.Trends[reading.EmissionWidth], times(1e9), 1, 1, 1e9, int(drift.Width)},
		{"cell A " + minus + " cell B", "mbar", nil, times(1e-2), 1, 2, 1e-2, int(drift.Disagreement)},
		{"fibre temperature", "°C", s.Trends[reading.FibreTemperature], func(k float64) float64 { return unit.Kelvin(k).Celsius() }, 2, 0.2, 1, int(drift.Warmth)},
		{"pulse energy", "µJ", s.Trends[reading.PulseEnergy], times(1e6), 3, 0.02, 1e6, int(drift.Metered)},
		{"pressure, cell A", "bar", s.Trends[reading.CellAPressure], times(1e-5), 3, 0.02, 1e-5, -1},
		{"pressure, cell B", "bar", s.Trends[reading.CellBPressure], times(1e-5), 3, 0.02, 1e-5, -1},
		{"room temperature", "°C", s.Trends[reading.RoomTemperature], func(k float64) float64 { return unit.Kelvin(k).Celsius() }, 2, 0.2, 1, -1},
	}
	kept := all[:1:1]
	for _, ringing := range []bool{true, false} {
		for _, st := range all[1:] {
			if rings := st.watched >= 0 && s.Drift.Tracks[st.watched].Ringing; rings != ringing {
				continue
			}
			if st.view != nil || st.watched >= 0 && len(s.DriftPoints[st.watched]) > 0 {
				kept = append(kept, st)
			}
		}
	}
	return kept
}

// drawDrift charts what is watched over one time axis, and says beside or
// below it what moved, what would explain it, what would tell, and on which
// calibration the prediction stands.
func drawDrift(a frame.Area, s *live.Snapshot, v view) {
	if a.W >= 110 {
		w := a.W * 11 / 20
		drawStrips(a.Sub(0, 0, w, a.H), s, v)
		drawVerdict(a.Sub(w+2, 0, a.W-w-2, a.H), s)
		return
	}
	text := min(a.H/2, verdictHeight(a.W, s))
	drawStrips(a.Sub(0, 0, a.W, a.H-text-1), s, v)
	drawVerdict(a.Sub(0, a.H-text, a.W, text), s)
}

// drawStrips stacks the charts, so that the eye sees what moves together.
func drawStrips(a frame.Area, s *live.Snapshot, v view) {
	const least = 5 // a heading and four rows of chart
	all := strips(s)
	n := min(len(all), max(1, (a.H-2)/least))
	rest := (a.H - 1) / n
	t := v.axis(s, a)
	y := 0
	for i, st := range all[:n] {
		h := rest
		if i == 0 {
			h = a.H - 1 - rest*(n-1)
		}
		last := i == n-1
		if last {
			h++ // the labels of the time axis
		}
		drawStrip(a.Sub(0, y, a.W, h), s, t, st, i == 0, last)
		y += h
	}
}

// track returns what is known of the strip's observable.
func (st strip) track(s *live.Snapshot) (t drift.Track, points []drift.Point, ok bool) {
	if st.watched < 0 {
		return t, nil, false
	}
	t = s.Drift.Tracks[st.watched]
	return t, s.DriftPoints[st.watched], t.Quiet.Values > 0
}

func drawStrip(a frame.Area, s *live.Snapshot, t timeAxis, st strip, first, last bool) {
	heading(a, st.title, st.unit)
	track, points, known := st.track(s)
	a.Right(a.W, 0, st.caption(s, a, t, track, known), captionInk(track))
	body := a.Sub(0, 1, a.W, a.H-1)
	var y chart.Range
	t.include(&y, st.view, st.to)
	for _, p := range points {
		if p.At >= t.start() && p.At <= t.end {
			y.Include(st.to(p.Mean))
		}
	}
	if known && !y.Empty() {
		y.Include(st.to(track.Quiet.Mean))
		if track.Charted {
			y.Include(st.to(track.Lower))
			y.Include(st.to(track.Upper))
		}
	}
	axes := chart.Axes{X: t.x(), LabelWidth: yLabel + 1}
	if last {
		axes.XTicks = t.ticks
	}
	if y.Empty() {
		axes.Y = chart.Between(0, 1)
		chart.New(body, axes).Done()
		blank(body, "nothing measured in this time")
		return
	}
	axes.Y = y.Padded(0.1, st.least)
	axes.YTicks = chart.Ticks(axes.Y, rowTicks(body.H))
	p := chart.New(body, axes)
	t.drawCursor(p)
	if first {
		t.drawMarks(p, s, axes.Y.Hi)
	}
	if len(points) < 2 {
		p.HistoryOf(st.view.Since(t.start()), st.to, 2*staleAfter(s), frame.Measured)
	}
	if known {
		drawChart(p, t, st, track, points)
	}
	p.Done()
}

// drawChart draws what was quiet, the limits, the means of groups and their
// moving average.
func drawChart(p *chart.Plot, t timeAxis, st strip, track drift.Track, points []drift.Point) {
	p.Level(st.to(track.Quiet.Mean), frame.Rule)
	if track.Charted {
		across := func(v float64) []chart.Point {
			return []chart.Point{{X: t.start().Seconds(), Y: st.to(v)}, {X: t.end.Seconds(), Y: st.to(v)}}
		}
		p.Dashes(across(track.Lower), frame.Target)
		p.Dashes(across(track.Upper), frame.Target)
	}
	means, average := make([]chart.Point, 0, len(points)), make([]chart.Point, 0, len(points))
	for i, q := range points {
		x := q.At.Seconds()
		if i > 0 && q.At-points[i-1].At > 4*track.Quiet.Group {
			means, average = append(means, chart.Point{X: x, Y: math.NaN()}), append(average, chart.Point{X: x, Y: math.NaN()})
		}
		means = append(means, chart.Point{X: x, Y: st.to(q.Mean)})
		average = append(average, chart.Point{X: x, Y: st.to(q.Average)})
	}
	p.Curve(means, frame.Measured)
	p.Dashes(average, frame.Predicted)
}

// caption is what stands at the right of a strip's heading: what the cursor
// reads, how far the newest means are from where it was quiet, or how it moved.
func (st strip) caption(s *live.Snapshot, a frame.Area, t timeAxis, track drift.Track, known bool) string {
	if t.cursor != 0 {
		if v, ok := t.at(st.view); ok {
			return t.clock(s, a) + "  " + fixed(st.to(v), st.decimals) + " " + st.unit
		}
		return t.clock(s, a) + "  no value"
	}
	if known {
		text := signed(track.Shift*st.scale, st.decimals+1) + " ± " + fixed(track.Sigma*st.scale, st.decimals+1) + " " + st.unit
		switch {
		case track.Ringing:
			return "▲ " + text
		case track.Charted:
			return "● " + text
		}
		return "learning, " + text
	}
	if mean, change, ok := t.change(st.view); ok {
		return "mean " + fixed(st.to(mean), st.decimals) + " " + st.unit + ", change " + signed(change*st.scale, st.decimals) + " " + st.unit + " in " + spanText(t.span)
	}
	return ""
}

func captionInk(t drift.Track) frame.Ink {
	if t.Ringing {
		return frame.Alarm
	}
	return frame.Plain
}
