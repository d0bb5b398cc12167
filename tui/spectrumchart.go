package tui

import (
	"math"
	"sort"
	"time"

	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/tui/chart"
	"barline/tui/frame"
)

// faintestShown is the lowest intensity on a logarithmic axis, of the highest,
// as a power of ten.
const faintestShown = -3.3

// noiseShown is how many standard deviations of the noise a pixel must have to
// be drawn on a logarithmic axis, which would blow noise up.
const noiseShown = 2

// spectrumStale is the age beyond which a measured spectrum is not that of now.
// Out of a record it is drawn at any age, which the words beside it tell.
const spectrumStale = 10 * time.Second

// window is the range of wavelength in nm that the spectra are drawn over: what
// the spectrometer sees, or all that is known.
func (v view) window(s *live.Snapshot) chart.Range {
	low, high := spectrometerRange(s)
	if low <= 0 || math.IsInf(high, 1) {
		low, high = 150, 450
		if sp := s.Spectrum; sp != nil && len(sp.Wavelength) > 1 {
			low, high = sp.Wavelength[0].Nanometres(), sp.Wavelength[len(sp.Wavelength)-1].Nanometres()
		}
	}
	if p := s.Propagated; p != nil && p.Emission > 0 {
		low = min(low, (p.Emission - 2*p.Width).Nanometres())
	}
	if !v.whole {
		return chart.Between(low, high)
	}
	if p := s.Propagated; p != nil && len(p.Wavelength) > 1 {
		low, high = min(low, p.Wavelength[0].Nanometres()), max(high, min(p.Wavelength[len(p.Wavelength)-1].Nanometres(), 2000))
	}
	return chart.Between(low, high)
}

// scaled are the two spectra on one scale: the predicted to its highest in the
// window, the measured, whose counts have no other, to the predicted's highest
// where the spectrometer sees it. Points of X in nm and Y of 0 to 1.
func scaled(s *live.Snapshot, window chart.Range) (measured, predicted []chart.Point) {
	highest := func(points []chart.Point, from, to float64) float64 {
		most := 0.0
		for _, p := range points {
			if p.X >= from && p.X <= to && p.Y > most {
				most = p.Y
			}
		}
		return most
	}
	scale := func(points []chart.Point, by float64) {
		for i := range points {
			points[i].Y *= by
		}
	}
	if p := s.Propagated; p != nil && p.Err == "" {
		for i, w := range p.Wavelength {
			predicted = append(predicted, chart.Point{X: w.Nanometres(), Y: p.Spectrum[i]})
		}
		from, to := window.Lo, window.Hi
		if p.Emission == 0 { // beside the pump nothing: to its scale
			from, to = 0, math.Inf(1)
		}
		if most := highest(predicted, from, to); most > 0 {
			scale(predicted, 1/most)
		} else {
			predicted = nil
		}
	}
	sp := s.Spectrum
	if sp == nil || len(sp.Wavelength) < 2 || !s.ReadOnly && s.Now.Mono-sp.Taken.Mono > spectrumStale {
		return nil, predicted
	}
	for i, w := range sp.Wavelength {
		measured = append(measured, chart.Point{X: w.Nanometres(), Y: (sp.Counts[i] - sp.Dark) / pitch(sp.Wavelength, i)})
	}
	from, to := measured[0].X, measured[len(measured)-1].X
	most, as := highest(measured, from, to), highest(predicted, from, to)
	if as == 0 || s.Propagated.Emission == 0 {
		as = 1
	}
	if !(most > 0) {
		return nil, predicted
	}
	if sp.Status == reading.FunctionCheck { // noise alone must not fill the chart
		as = min(as, 0.03)
	}
	scale(measured, as/most)
	return measured, predicted
}

// noise returns the standard deviation of the noise on a spectrum that is
// smooth from pixel to pixel: 1.048 times the median distance between
// neighbours, as normal noise has it.
func noise(points []chart.Point) float64 {
	if len(points) < 8 {
		return 0
	}
	steps := make([]float64, len(points)-1)
	for i := range steps {
		steps[i] = math.Abs(points[i+1].Y - points[i].Y)
	}
	sort.Float64s(steps)
	return 1.048 * steps[len(steps)/2]
}

// pitch is the width of pixel i in nm.
func pitch(w []unit.Metre, i int) float64 {
	a, b := max(i-1, 0), min(i+1, len(w)-1)
	return (w[b] - w[a]).Nanometres() / float64(b-a)
}

// onAxis brings intensities and wavelengths onto the axes of the view.
func (v view) onAxis(points []chart.Point) []chart.Point {
	out := make([]chart.Point, len(points))
	for i, p := range points {
		if !v.linear {
			p.Y = math.Max(math.Log10(math.Max(p.Y, 0)), faintestShown-1) // NaN stays
		}
		out[i] = chart.Point{X: v.across(p.X), Y: p.Y}
	}
	return out
}

// across is where a wavelength in nm stands on the axis: the whole spectrum is
// drawn over equal ratios.
func (v view) across(nm float64) float64 {
	if v.whole {
		return math.Log(nm)
	}
	return nm
}

// drawSpectra draws the measured spectrum as a line and the predicted one as
// dashes, and marks the emission of both.
func drawSpectra(a frame.Area, s *live.Snapshot, v view) {
	kind := "log"
	if v.linear {
		kind = "linear"
	}
	x := heading(a, "spectrum", kind+" over nm")
	x = a.Text(x, 0, "⠤● measured", frame.Measured) + 2
	x = a.Text(x, 0, "╌◇ predicted, full field", frame.Predicted) + 2
	if rest := "u log, linear · z near, whole"; x+a.Width(rest)+1 <= a.W {
		a.Right(a.W-1, 0, rest, frame.Faint)
	}
	body := a.Sub(0, 1, a.W, a.H-1)
	window := v.window(s)
	measured, predicted := scaled(s, window)
	if len(measured) == 0 && len(predicted) == 0 {
		blank(body, noSpectrum(s))
		return
	}
	axes := chart.Axes{X: chart.Between(v.across(window.Lo), v.across(window.Hi)), LabelWidth: yLabel}
	axes.XTicks = v.wavelengthTicks(window, a.W)
	if v.linear {
		axes.Y, axes.YTicks = chart.Between(-0.02, 1.08), []chart.Tick{{At: 0, Label: "0"}, {At: 0.5, Label: "0.5"}, {At: 1, Label: "1"}}
	} else {
		axes.Y = chart.Between(faintestShown, 0.35)
		for i, label := range []string{"1", "0.1", "0.01", "0.001"} {
			axes.YTicks = append(axes.YTicks, chart.Tick{At: -float64(i), Label: label})
		}
	}
	p := chart.New(body, axes)
	p.Dashes(v.onAxis(predicted), frame.Predicted)
	if floor := noiseShown * noise(measured); !v.linear && floor > 0 {
		for i := range measured {
			if measured[i].Y < floor {
				measured[i].Y = math.NaN()
			}
		}
		if at := math.Log10(floor); at > faintestShown && at < 0 {
			ends := []chart.Point{{X: v.across(measured[0].X), Y: at}, {X: v.across(measured[len(measured)-1].X), Y: at}}
			p.Dashes(ends, frame.Rule)
			p.Label(at, "noise of the measured", frame.Faint)
		}
	}
	p.Curve(v.onAxis(measured), frame.Measured)
	drawEmissions(p, s, v, axes.Y)
	p.Done()
}

// drawEmissions marks what both say the emission is: the measured one on top,
// the predicted a row lower, so that neither hides the other.
func drawEmissions(p *chart.Plot, s *live.Snapshot, v view, y chart.Range) {
	row := (y.Hi - y.Lo) / float64(max(p.Pane().H, 1))
	mark := func(m unit.Metre, rows float64, r rune, ink frame.Ink) {
		x := v.across(m.Nanometres())
		p.Upright(x, ink)
		p.Mark(chart.Point{X: x, Y: y.Hi - rows*row}, r, ink)
	}
	if q := s.Propagated; q != nil && q.Err == "" && q.Emission > 0 {
		mark(q.Emission, 1.5, '◇', frame.Predicted)
		for _, o := range q.Others {
			p.Mark(chart.Point{X: v.across(o.Emission.Nanometres()), Y: y.Hi - 1.5*row}, '◇', frame.Band)
		}
	}
	if show(s, reading.Emission).known {
		mark(unit.Metre(s.Latest[reading.Emission].Value), 0.5, '●', frame.Measured)
	}
}

// wavelengthTicks returns round wavelengths on the axis of the view.
func (v view) wavelengthTicks(window chart.Range, width int) []chart.Tick {
	if !v.whole {
		return chart.Ticks(window, max(2, width/10))
	}
	var ticks []chart.Tick
	for _, nm := range wholeTicks {
		if nm >= window.Lo && nm <= window.Hi {
			ticks = append(ticks, chart.Tick{At: v.across(nm), Label: fixed(nm, 0)})
		}
	}
	return ticks
}

// wholeTicks are the labelled wavelengths of axes that are not linear, in nm.
var wholeTicks = []float64{150, 200, 250, 300, 400, 500, 600, 800, 1000, 1200, 1500, 2000, 3000}

// noSpectrum says why there is none to draw.
func noSpectrum(s *live.Snapshot) string {
	if s.ReadOnly {
		return "no spectrum is in the record here: it holds those of scan steps"
	}
	return "no spectrum yet"
}
