package tui

import (
	"barline/model/live"
	"barline/model/reading"
	"barline/model/trend"
	"barline/model/unit"
	"barline/tui/chart"
	"barline/tui/frame"
)

// strip is one chart of the drift page.
type strip struct {
	title, unit string
	view        *trend.View
	to          func(float64) float64 // from SI to the unit shown
	decimals    int
	least       float64 // smallest span of the axis, in the unit shown
	scale       float64 // of differences
}

func times(k float64) func(float64) float64 { return func(v float64) float64 { return v * k } }

// strips are what may move together with the residual, in the order in which
// one looks.
func strips(s *live.Snapshot) []strip {
	all := []strip{
		{"measured " + minus + " predicted", "nm", s.Residuals, times(1e9), 1, 1, 1e9},
		{"pressure, cell A", "bar", s.Trends[reading.CellAPressure], times(1e-5), 3, 0.02, 1e-5},
		{"fibre temperature", "°C", s.Trends[reading.FibreTemperature], func(k float64) float64 { return unit.Kelvin(k).Celsius() }, 2, 0.2, 1},
		{"pulse energy", "µJ", s.Trends[reading.PulseEnergy], times(1e6), 3, 0.02, 1e6},
		{"emission width", "nm", s.Trends[reading.EmissionWidth], times(1e9), 1, 1, 1e9},
		{"emission strength", "%", s.Trends[reading.EmissionStrength], times(100), 2, 0.5, 100},
		{"pressure, cell B", "bar", s.Trends[reading.CellBPressure], times(1e-5), 3, 0.02, 1e-5},
		{"room temperature", "°C", s.Trends[reading.RoomTemperature], func(k float64) float64 { return unit.Kelvin(k).Celsius() }, 2, 0.2, 1},
	}
	kept := all[:1]
	for _, st := range all[1:] {
		if st.view != nil {
			kept = append(kept, st)
		}
	}
	return kept
}

// drawDrift stacks the residual and what was measured beside it over one time
// axis, so that the eye sees what moves together.
func drawDrift(a frame.Area, s *live.Snapshot, v view) {
	const least = 4 // a heading and three rows of chart
	all := strips(s)
	n := min(len(all), max(1, (a.H-3)/least))
	first := (a.H-1)/n + (a.H-1)%n
	rest := (a.H - 1) / n
	if n > 1 && first < rest+2 && rest > least {
		first += n - 1
		rest--
	}
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

func drawStrip(a frame.Area, s *live.Snapshot, t timeAxis, st strip, first, last bool) {
	heading(a, st.title, st.unit)
	text := ""
	if mean, change, ok := t.change(st.view); ok {
		text = "mean " + fixed(st.to(mean), st.decimals) + " " + st.unit + ", change " + signed(change*st.scale, st.decimals) + " " + st.unit + " in " + spanText(t.span)
	}
	if t.cursor != 0 {
		text = t.clock(s, a) + "  no value"
		if v, ok := t.at(st.view); ok {
			text = t.clock(s, a) + "  " + fixed(st.to(v), st.decimals) + " " + st.unit
		}
	}
	a.Right(a.W, 0, text, frame.Plain)
	body := a.Sub(0, 1, a.W, a.H-1)
	var y chart.Range
	t.include(&y, st.view, st.to)
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
	gap := 2 * staleAfter(s)
	if first {
		t.drawMarks(p, s, axes.Y.Hi)
	}
	p.HistoryOf(st.view.Since(t.start()), st.to, gap, frame.Measured)
	p.Done()
}
