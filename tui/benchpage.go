package tui

import (
	"fmt"
	"math"

	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/tui/chart"
	"barline/tui/frame"
)

// drawBench lays the page out: the gas path, the emission in numbers, and
// three charts. The taller the screen, the more air and the more record.
func drawBench(a frame.Area, s *live.Snapshot, v view) {
	roomy := a.H >= 26
	y := 0
	if roomy {
		y++
	}
	path := 3
	if roomy {
		path = 5
	}
	drawPath(a.Sub(0, y, a.W, path), s)
	y += path
	if roomy {
		y++
	}
	drawEmission(a.Sub(0, y, a.W, 2), s)
	y += 2
	if roomy {
		y++
	}
	record := 0
	if a.H >= 40 && len(s.Recent) > 0 {
		record = min(len(s.Recent), a.H/8) + 1
	}
	charts := a.Sub(0, y, a.W, a.H-y-record)
	drawCharts(charts, s, v)
	if record > 0 {
		drawRecent(a.Sub(0, a.H-record, a.W, record), s)
	}
}

// drawEmission says in numbers what the charts below show.
func drawEmission(a frame.Area, s *live.Snapshot) {
	m := show(s, reading.Emission)
	x := 1
	if a.W >= 90 {
		x = a.Text(x, 0, "emission", frame.Strong) + 2
	}
	x = a.Text(x, 0, "measured ", frame.Faint)
	if m.known {
		x = a.Text(x, 0, "● "+m.value, m.ink)
	} else {
		x = a.Text(x, 0, m.mark, m.ink)
		if why := s.Latest[reading.Emission].Reason; why != "" && a.W >= 110 {
			x = a.Sub(0, 0, min(x+30, a.W), 1).Text(x, 0, ", "+why, frame.Plain)
		}
	}
	x = a.Text(x+3, 0, "predicted ", frame.Faint)
	p := &s.Prediction
	switch {
	case !p.Valid:
		why := p.Why
		if why == "" {
			why = "no pressure known yet"
		}
		a.Text(x, 0, "◇ none: "+why, frame.Predicted)
	case p.Emission == 0:
		a.Text(x, 0, "◇ no emission: "+p.Why, frame.Predicted)
	default:
		text := "◇ " + emissionText(p.Emission, p.Sigma)
		x = a.Text(x, 0, text, frame.Predicted)
		x = a.Text(x+1, 0, p.Answer.String(), frame.Faint)
		if p.Extrapolated {
			x = a.Text(x+1, 0, "extrapolated", frame.Caution)
		}
		if others := otherBranches(s); len(others) > 0 && a.W >= 100 {
			text := "or " + fixed(others[0].Emission.Nanometres(), 0) + " nm"
			if others[0].Conversion > 0 {
				text += ", " + fixed(float64(others[0].Conversion)*100, 1) + " %"
			}
			x = a.Text(x+2, 0, text, frame.Band)
		}
		if s.ResidualKnown {
			x = a.Text(x+3, 0, "residual ", frame.Faint)
			a.Text(x, 0, signed(s.Residual.Nanometres(), 1)+" nm", frame.Measured)
		}
	}
	drawVerdicts(a.Sub(0, 1, a.W, 1), s)
}

// drawVerdicts names the limits that are broken, or else what the pulse does.
func drawVerdicts(a frame.Area, s *live.Snapshot) {
	p := &s.Prediction
	x := 1
	if a.W >= 90 {
		x = 11
	}
	broken := 0
	for _, d := range p.Verdicts[:min(max(p.VerdictCount, 0), len(p.Verdicts))] {
		if d.OK {
			continue
		}
		text := fmt.Sprintf("△ %s %s, bound %s", d.Name, amount(d.Value, d.Unit), amount(d.Bound, d.Unit))
		if d.Consequence != "" {
			text += ": " + d.Consequence
		}
		if broken > 0 && x+a.Width(text) > a.W {
			a.Right(a.W-1, 0, "and more", frame.Caution)
			return
		}
		x = a.Text(x, 0, text, frame.Caution) + 3
		broken++
	}
	if broken > 0 || !p.Valid {
		return
	}
	if zero, ok := zeroDispersion(s); ok {
		x = a.Text(x, 0, "zero dispersion "+fixed(zero.Nanometres(), 1)+" nm", frame.Faint) + 3
	}
	if p.SolitonOrder > 0 {
		x = a.Text(x, 0, "soliton order "+fixed(p.SolitonOrder, 1), frame.Faint) + 3
	}
	if p.FissionLength > 0 {
		x = a.Text(x, 0, "fission length "+fixed(float64(p.FissionLength)*100, 1)+" cm", frame.Faint) + 3
	}
	if w := show(s, reading.EmissionWidth); w.known && x+16 < a.W {
		a.Text(x, 0, "width "+w.value, frame.Plain)
	}
}

func amount(v float64, in string) string {
	s := fixed(v, 2)
	if math.Abs(v) >= 100 {
		s = fixed(v, 0)
	}
	if in != "" {
		s += " " + in
	}
	return s
}

// drawCharts puts pressure and residual over one time axis on the left, and
// the emission map on the right.
func drawCharts(a frame.Area, s *live.Snapshot, v view) {
	left := a.W * 11 / 20
	upper := (a.H + 3) * 3 / 5
	drawPressure(a.Sub(0, 0, left, upper), s, v)
	drawResidual(a.Sub(0, upper, left, a.H-upper), s, v)
	drawMap(a.Sub(left+2, 0, a.W-left-2, a.H), s, v.near)
}

// heading draws the title of a chart with a rule behind it and returns the
// column for what follows on the right.
func heading(a frame.Area, title, in string) int {
	x := a.Text(1, 0, title, frame.Strong)
	if in != "" {
		x = a.Text(x, 0, ", "+in, frame.Faint)
	}
	return x + 2
}

// yLabel is the width of the numbers of both time charts, so that they align.
const yLabel = 6

func drawPressure(a frame.Area, s *live.Snapshot, v view) {
	x := heading(a, "pressure", "bar")
	x = a.Text(x, 0, "⠤ cell A", frame.Measured) + 2
	a.Text(x, 0, "╌ setpoint", frame.Target)
	t := v.axis(s, a)
	var y chart.Range
	t.include(&y, s.PressureA, times(1e-5))
	t.include(&y, s.Expected, times(1e-5))
	if s.Target != 0 && !y.Empty() {
		y.Include(s.Target.Bar())
	}
	corner, cornerInk := spanText(v.span()), frame.Faint
	if t.cursor != 0 {
		corner, cornerInk = t.clock(s, a)+"  no value", frame.Plain
		if at, ok := t.at(s.PressureA); ok {
			corner = t.clock(s, a) + "  " + pressureText(unit.Pascal(at))
		}
		a.Sub(0, 0, a.W, 1).Fill(' ', frame.Plain)
		heading(a, "pressure", "bar")
	}
	a.Right(a.W, 0, corner, cornerInk)
	body := a.Sub(0, 1, a.W, a.H-1)
	if y.Empty() {
		blank(body, "no pressure measured yet")
		return
	}
	y = y.Padded(0.08, 0.05).Rounded()
	p := chart.New(body, chart.Axes{X: t.x(), Y: y, YTicks: chart.Ticks(y, rowTicks(body.H)), LabelWidth: yLabel})
	if s.Target != 0 {
		p.Level(s.Target.Bar(), frame.Target)
		p.Label(s.Target.Bar(), "target "+pressureText(s.Target), frame.Target)
	}
	if s.Bench != nil {
		if low := s.Bench.Limits.Enforced().Lowest(); low.Max > 0 && low.Max.Bar() <= y.Hi {
			p.Level(low.Max.Bar(), frame.Alarm)
			p.Label(low.Max.Bar(), "rating of "+low.Part, frame.Alarm)
		}
	}
	t.drawCursor(p)
	gap := staleAfter(s)
	t.drawMarks(p, s, y.Hi)
	p.Dotted(s.Expected.Since(t.start()), times(1e-5), gap, frame.Target)
	p.HistoryOf(s.PressureA.Since(t.start()), times(1e-5), gap, frame.Measured)
	p.Done()
}

func drawResidual(a frame.Area, s *live.Snapshot, v view) {
	x := heading(a, "measured "+minus+" predicted", "nm")
	if s.Prediction.Valid && s.Prediction.Emission != 0 {
		a.Text(x, 0, s.Prediction.Answer.String(), frame.Predicted)
	}
	t := v.axis(s, a)
	if t.cursor != 0 {
		text := "no value"
		if at, ok := t.at(s.Residuals); ok {
			text = signed(at*1e9, 1) + " nm"
		}
		a.Right(a.W, 0, text, frame.Plain)
	}
	var y chart.Range
	t.include(&y, s.Residuals, times(1e9))
	body := a.Sub(0, 1, a.W, a.H-1)
	if y.Empty() {
		axes := chart.Axes{X: t.x(), Y: chart.Between(-1, 1), XTicks: t.ticks, LabelWidth: yLabel}
		chart.New(body, axes).Done()
		blank(body, "no emission to compare")
		return
	}
	y.Include(0)
	y = y.Padded(0.1, 2).Rounded()
	p := chart.New(body, chart.Axes{X: t.x(), Y: y, XTicks: t.ticks, YTicks: chart.Ticks(y, rowTicks(body.H)), LabelWidth: yLabel})
	p.Level(0, frame.Predicted)
	t.drawCursor(p)
	p.HistoryOf(s.Residuals.Since(t.start()), times(1e9), 2*staleAfter(s), frame.Measured)
	p.Done()
}

func blank(a frame.Area, why string) {
	a.Text(max(yLabel+2, (a.W-a.Width(why))/2), a.H/2, why, frame.Faint)
}

// zeroDispersion returns the zero-dispersion wavelength that the pulse meets:
// of several, the nearest one on the short-wave side of the pump.
func zeroDispersion(s *live.Snapshot) (nearest unit.Metre, ok bool) {
	p := &s.Prediction
	pump := unit.Metre(math.Inf(1))
	if s.Bench != nil && s.Bench.Pulse.Wavelength > 0 {
		pump = s.Bench.Pulse.Wavelength
	}
	for i := range min(p.ZeroDispersionCount, len(p.ZeroDispersion)) { // ascending
		if z := p.ZeroDispersion[i]; z < pump {
			nearest, ok = z, true
		}
	}
	return nearest, ok
}
