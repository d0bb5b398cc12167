package tui

import (
	"math"
	"sort"

	"barline/model/live"
	"barline/tui/chart"
	"barline/tui/frame"
)

// drawFibre shows the light along the fibre: its spectrum as a map, and beside
// it the power of the pulse, the energy in the ultraviolet and the ionised
// share.
func drawFibre(a frame.Area, s *live.Snapshot) {
	p := s.Propagated
	if p == nil || p.Err != "" || len(p.Along) < 2 {
		heading(a, "along the fibre", "")
		blank(a, "nothing computed yet")
		return
	}
	left := a.W / 2
	drawEvolution(a.Sub(0, 0, left, a.H), p)
	drawAlong(a.Sub(left+1, 0, a.W-left-1, a.H), p)
}

// shadeDecades is how far below the brightest the map still has a dot.
const shadeDecades = 3.5

// drawEvolution shades the energy per frequency over the fibre. Up is the long
// wave; equal heights are equal steps of frequency, so that the ultraviolet has
// its room.
func drawEvolution(a frame.Area, p *live.Propagated) {
	heading(a, "spectrum along the fibre", "nm over cm")
	body := a.Sub(0, 1, a.W, a.H-1)
	most := 0.0
	for _, place := range p.Along {
		for i, e := range place.Spectrum {
			most = max(most, e*perFrequency(p, i))
		}
	}
	end := float64(p.Along[len(p.Along)-1].Position)
	if !(most > 0) || !(end > 0) || len(p.Bins) < 2 {
		blank(body, "no energy")
		return
	}
	shortest, longest := max(p.Bins[0].Nanometres(), 160), min(p.Bins[len(p.Bins)-1].Nanometres(), 2000)
	axes := chart.Axes{X: chart.Between(0, 100*end), Y: chart.Between(-1/shortest, -1/longest), LabelWidth: 4}
	axes.XTicks = chart.Ticks(axes.X, max(2, a.W/8))
	row := (axes.Y.Hi - axes.Y.Lo) / float64(max(body.H-1, 1))
	free := math.Inf(1) // labels want a row of their own
	for i := len(wholeTicks) - 1; i >= 0; i-- {
		nm := wholeTicks[i]
		if nm >= shortest && nm <= longest && -1/nm < free {
			axes.YTicks = append(axes.YTicks, chart.Tick{At: -1 / nm, Label: fixed(nm, 0)})
			free = -1/nm - 1.5*row
		}
	}
	c := chart.New(body, axes)
	c.Shade(func(cm, y float64) float64 {
		place := sort.Search(len(p.Along), func(i int) bool { return 100*float64(p.Along[i].Position) >= cm })
		bin := sort.Search(len(p.Bins), func(i int) bool { return -1/p.Bins[i].Nanometres() >= y })
		if place == len(p.Along) || bin == len(p.Bins) {
			return 0
		}
		e := p.Along[place].Spectrum[bin] * perFrequency(p, bin) / most
		return 1 + math.Log10(max(e, 1e-30))/shadeDecades
	}, frame.Predicted)
	if p.Compression > 0 {
		c.Upright(100*float64(p.Compression), frame.Strong)
	}
	c.Done()
}

// perFrequency turns energy per wavelength of a bin into one in proportion to
// energy per frequency.
func perFrequency(p *live.Propagated, bin int) float64 {
	w := float64(p.Bins[bin])
	return w * w
}

// drawAlong stacks as many charts over the fibre as there is height for.
func drawAlong(a frame.Area, p *live.Propagated) {
	charts := []struct {
		title, unit string
		of          func(live.Place) float64
		text        string
	}{
		{"peak power", "MW", func(x live.Place) float64 { return float64(x.Peak) / 1e6 },
			fixed(float64(p.CompressedPower)/1e6, 0) + " MW at " + fixed(100*float64(p.Compression), 1) + " cm"},
		{"ionised", "ppm", func(x live.Place) float64 { return 1e6 * float64(x.Ionised) },
			"at most " + ionisedText(float64(p.Ionised))},
		{"below 400 nm", "nJ", func(x live.Place) float64 { return 1e3 * x.Ultraviolet.Microjoules() },
			fixed(1e3*p.Ultraviolet.Microjoules(), 1) + " nJ of " + fixed(p.EnergyIn.Microjoules(), 2) + " µJ in"},
		{"energy", "µJ", func(x live.Place) float64 { return x.Energy.Microjoules() },
			fixed(p.EnergyOut.Microjoules(), 3) + " µJ out"},
	}
	const least = 4 // a heading, two rows of chart and the axis
	n := max(1, min(len(charts), a.H/least))
	length := 100 * float64(p.Along[len(p.Along)-1].Position)
	y := 0
	for i, c := range charts[:n] {
		h := (a.H - y) / (n - i)
		pane := a.Sub(0, y, a.W, h)
		y += h
		heading(pane, c.title, c.unit)
		pane.Right(pane.W-1, 0, c.text, frame.Plain)
		points := make([]chart.Point, len(p.Along))
		r := chart.Range{}
		r.Include(0)
		for j, place := range p.Along {
			points[j] = chart.Point{X: 100 * float64(place.Position), Y: c.of(place)}
			r.Include(points[j].Y)
		}
		axes := chart.Axes{X: chart.Between(0, length), Y: r.Padded(0.02, 1e-3), LabelWidth: 5}
		if i == n-1 {
			axes.XTicks = chart.Ticks(axes.X, max(2, a.W/8))
		}
		body := pane.Sub(0, 1, pane.W, pane.H-1)
		axes.YTicks = chart.Ticks(axes.Y, rowTicks(body.H))
		plot := chart.New(body, axes)
		plot.Dashes(points, frame.Predicted)
		if p.Compression > 0 {
			plot.Upright(100*float64(p.Compression), frame.Faint)
		}
		plot.Done()
	}
	if n == 1 { // what there is no room to draw
		a.Right(a.W-1, 1, " ionised at most "+ionisedText(float64(p.Ionised)), frame.Plain)
	}
}

// ionisedText writes a share with two digits.
func ionisedText(share float64) string {
	switch {
	case !(share > 0):
		return "0 ppm"
	case share < 1e-6:
		return "below 1 ppm"
	case share < 1e-3:
		return fixed(1e6*share, 0) + " ppm"
	}
	return fixed(100*share, 2) + " %"
}
