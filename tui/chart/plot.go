package chart

import (
	"math"
	"time"

	"barline/model/trend"
	"barline/tui/frame"
)

// Axes is how a plot is laid out.
type Axes struct {
	X, Y           Range
	XTicks, YTicks []Tick
	LabelWidth     int // of the numbers on the left; 0 takes what they need

	Bare bool // no axis at all: the pane is the whole area
}

// Point is a place in the units of the axes.
type Point struct{ X, Y float64 }

// Plot is a chart being drawn. Call Done last.
type Plot struct {
	axes  Axes
	pane  frame.Area // the curves
	dots  *dots
	marks []mark

	labels []caption
}

type caption struct {
	row  int
	text string
	ink  frame.Ink
}

type mark struct {
	at  Point
	r   rune
	ink frame.Ink
}

// New draws the axes in a and returns the plot. An area too small, or empty
// ranges, give a plot that draws nothing.
func New(a frame.Area, axes Axes) *Plot {
	p := &Plot{axes: axes}
	label := axes.LabelWidth
	if label == 0 {
		label = LabelWidth(axes.YTicks)
	}
	bottom := 0
	if len(axes.XTicks) > 0 {
		bottom = 1
	}
	if a.W-label-1 < 2 || a.H-bottom < 1 || axes.X.Empty() || axes.Y.Empty() ||
		!(axes.X.Hi > axes.X.Lo) || !(axes.Y.Hi > axes.Y.Lo) {
		return p
	}
	if axes.Bare {
		p.pane = a
		p.dots = newDots(a)
		return p
	}
	p.pane = a.Sub(label+1, 0, a.W-label-1, a.H-bottom)
	p.dots = newDots(p.pane)
	for y := range p.pane.H {
		a.Set(label, y, '│', frame.Rule)
	}
	for _, t := range axes.YTicks {
		y := p.row(t.At)
		if y < 0 || y >= p.pane.H {
			continue
		}
		a.Right(label, y, t.Label, frame.Faint)
		a.Set(label, y, '┤', frame.Rule)
		for x := 0; x < p.dots.w; x += 4 {
			p.dots.set(x, clampInt(math.Round(p.y(t.At))), frame.Rule)
		}
	}
	free := 0 // labels do not run into each other
	for _, t := range axes.XTicks {
		x := label + 1 + clampInt(math.Round(p.x(t.At)))/2
		from := x - a.Width(t.Label)/2
		from = min(from, a.W-a.Width(t.Label))
		if from < free || from < label || x < label+1 || x >= a.W {
			continue
		}
		free = a.Text(from, p.pane.H, t.Label, frame.Faint) + 1
	}
	return p
}

// LabelWidth returns the columns that the labels need.
func LabelWidth(ticks []Tick) int {
	w := 0
	for _, t := range ticks {
		w = max(w, len([]rune(t.Label)))
	}
	return w
}

// x and y return the dot of a value; far outside the pane they stay finite for
// finite values.
func (p *Plot) x(v float64) float64 {
	return (v - p.axes.X.Lo) / (p.axes.X.Hi - p.axes.X.Lo) * float64(p.dots.w-1)
}

func (p *Plot) y(v float64) float64 {
	return (p.axes.Y.Hi - v) / (p.axes.Y.Hi - p.axes.Y.Lo) * float64(p.dots.h-1)
}

// row returns the cell row of a value, -1 where it is not on the chart.
func (p *Plot) row(v float64) int {
	y := math.Round(p.y(v))
	if !(y >= 0 && y < float64(p.dots.h)) {
		return -1
	}
	return int(y) / 4
}

func (p *Plot) col(v float64) int {
	x := math.Round(p.x(v))
	if !(x >= 0 && x < float64(p.dots.w)) {
		return -1
	}
	return int(x) / 2
}

// Band shades between lo and hi, which have equal length and ascend in X. A
// NaN in either parts the band.
func (p *Plot) Band(lo, hi []Point, ink frame.Ink) {
	if p.dots == nil {
		return
	}
	for i := 1; i < min(len(lo), len(hi)); i++ {
		x0, x1 := p.x(lo[i-1].X), p.x(lo[i].X)
		a0, a1, b0, b1 := p.y(hi[i-1].Y), p.y(hi[i].Y), p.y(lo[i-1].Y), p.y(lo[i].Y)
		if math.IsNaN(x0+x1+a0+a1+b0+b1) || !(x1 > x0) {
			continue
		}
		for x := clampInt(max(math.Ceil(x0), 0)); float64(x) <= min(x1, float64(p.dots.w-1)); x++ {
			if x%2 != 0 {
				continue
			}
			f := (float64(x) - x0) / (x1 - x0)
			top, low := a0+f*(a1-a0), b0+f*(b1-b0)
			if !(top <= low) {
				continue
			}
			for y := clampInt(max(math.Ceil(top), 0)); float64(y) <= min(low, float64(p.dots.h-1)); y++ {
				if (y+x)%4 == 0 {
					p.dots.set(x, y, ink)
				}
			}
		}
	}
}

// Curve joins the points in their order. A NaN parts the curve.
func (p *Plot) Curve(points []Point, ink frame.Ink) {
	if p.dots == nil {
		return
	}
	for i := 1; i < len(points); i++ {
		a, b := points[i-1], points[i]
		p.dots.line(p.x(a.X), p.y(a.Y), p.x(b.X), p.y(b.Y), ink)
	}
}

// Dashes is Curve with gaps at even distances along the curve's X.
func (p *Plot) Dashes(points []Point, ink frame.Ink) {
	if p.dots == nil {
		return
	}
	for i := 1; i < len(points); i++ {
		a, b := points[i-1], points[i]
		x0, x1 := p.x(a.X), p.x(b.X)
		y0, y1 := p.y(a.Y), p.y(b.Y)
		if math.IsNaN(x0+x1+y0+y1) || !(x1 > x0) {
			continue
		}
		for x := clampInt(max(math.Ceil(x0), 0)); float64(x) <= min(x1, float64(p.dots.w-1)); x++ {
			if x%6 < 4 {
				f := (float64(x) - x0) / (x1 - x0)
				p.dots.set(x, clampInt(math.Round(y0+f*(y1-y0))), ink)
			}
		}
	}
}

// Dots draws each point by itself.
func (p *Plot) Dots(points []Point, ink frame.Ink) {
	if p.dots == nil {
		return
	}
	for _, at := range points {
		if p.On(at) {
			p.dots.set(int(math.Round(p.x(at.X))), int(math.Round(p.y(at.Y))), ink)
		}
	}
}

// Stripe shades from lo to hi on Y over the whole width, more openly than Band.
func (p *Plot) Stripe(lo, hi float64, ink frame.Ink) {
	if p.dots == nil || math.IsNaN(lo+hi) {
		return
	}
	for y := clampInt(max(math.Ceil(p.y(hi)), 0)); float64(y) <= min(p.y(lo), float64(p.dots.h-1)); y++ {
		for x := y % 4; x < p.dots.w; x += 4 {
			p.dots.set(x, y, ink)
		}
	}
}

// Reach draws a line along the bottom from lo to hi on X, its ends turned up.
func (p *Plot) Reach(lo, hi float64, ink frame.Ink) {
	if p.dots == nil || math.IsNaN(lo+hi) || !(lo < hi) {
		return
	}
	from, to := p.x(lo), p.x(hi)
	bottom := p.dots.h - 1
	for x := clampInt(max(math.Round(from), 0)); float64(x) <= min(to, float64(p.dots.w-1)); x++ {
		p.dots.set(x, bottom, ink)
	}
	for _, end := range []float64{from, to} {
		p.dots.column(clampInt(math.Round(end)), bottom-3, bottom, ink)
	}
}

// clampInt keeps what is far outside any screen an int.
func clampInt(v float64) int {
	if math.IsNaN(v) {
		return -1
	}
	return int(max(-1, min(v, 1e6)))
}

// Level draws a line across at y.
func (p *Plot) Level(y float64, ink frame.Ink) {
	p.Dashes([]Point{{p.axes.X.Lo, y}, {p.axes.X.Hi, y}}, ink)
}

// Upright draws a line down at x.
func (p *Plot) Upright(x float64, ink frame.Ink) {
	if p.dots == nil || p.col(x) < 0 {
		return
	}
	for y := 0; y < p.dots.h; y += 2 {
		p.dots.set(int(math.Round(p.x(x))), y, ink)
	}
}

// HistoryOf draws a level of history, its times in seconds on X and its values
// turned by to, which must rise, on Y. Buckets that lie further apart than gap
// are not joined.
func (p *Plot) HistoryOf(l trend.Level, to func(float64) float64, gap time.Duration, ink frame.Ink) {
	if p.dots == nil || l.Width <= 0 {
		return
	}
	from := time.Duration(max(p.axes.X.Lo, -1e9) * 1e9)
	until := time.Duration(min(p.axes.X.Hi, 9e9) * 1e9)
	var c struct { // the dot column being gathered
		x              int
		low, high, sum float64
		n              int
		end            time.Duration
		joined         bool
	}
	var lastX, lastY float64
	var lastEnd time.Duration
	drawn := false
	draw := func() {
		if c.n == 0 {
			return
		}
		y := p.y(c.sum / float64(c.n))
		p.dots.column(c.x, clampInt(math.Round(p.y(c.high))), clampInt(math.Round(p.y(c.low))), ink)
		if c.joined && drawn {
			p.dots.line(lastX, lastY, float64(c.x), y, ink)
		}
		lastX, lastY, lastEnd, drawn = float64(c.x), y, c.end, true
		c.n = 0
	}
	for _, b := range l.Buckets {
		mid := b.Start + l.Width/2
		if b.Count == 0 || mid < from-gap-l.Width || mid > until+gap+l.Width {
			continue
		}
		x := clampInt(math.Round(p.x(mid.Seconds())))
		if c.n > 0 && x != c.x {
			draw()
		}
		if c.n == 0 {
			c.x, c.low, c.high, c.sum = x, math.Inf(1), math.Inf(-1), 0
			c.joined = drawn && b.Start-lastEnd <= gap
		}
		c.low, c.high = min(c.low, to(b.Min)), max(c.high, to(b.Max))
		c.sum += to(b.Mean)
		c.n++
		c.end = b.Start + l.Width
	}
	draw()
}

// Dotted is HistoryOf as a broken line.
func (p *Plot) Dotted(l trend.Level, to func(float64) float64, gap time.Duration, ink frame.Ink) {
	if p.dots == nil {
		return
	}
	p.dots.broken = true
	p.HistoryOf(l, to, gap, ink)
	p.dots.broken = false
}

// Label writes text at the left of the pane, on the line at y or beside it.
func (p *Plot) Label(y float64, text string, ink frame.Ink) {
	if p.dots == nil || p.row(y) < 0 {
		return
	}
	p.labels = append(p.labels, caption{p.row(y), text, ink})
}

// Mark puts one character at a place, over everything drawn with dots.
func (p *Plot) Mark(at Point, r rune, ink frame.Ink) { p.marks = append(p.marks, mark{at, r, ink}) }

// On reports whether a place lies on the chart.
func (p *Plot) On(at Point) bool { return p.dots != nil && p.col(at.X) >= 0 && p.row(at.Y) >= 0 }

// Cell returns the column and row of the character that a place lies in, each
// -1 where it is not on the chart.
func (p *Plot) Cell(at Point) (x, y int) {
	if p.dots == nil {
		return -1, -1
	}
	return p.col(at.X), p.row(at.Y)
}

// Pane returns the area of the curves, for notes within it.
func (p *Plot) Pane() frame.Area { return p.pane }

// Done puts the dots and marks on the screen.
func (p *Plot) Done() {
	if p.dots == nil {
		return
	}
	p.dots.flush()
	for _, m := range p.marks {
		if p.On(m.at) {
			p.pane.Set(p.col(m.at.X), p.row(m.at.Y), m.r, m.ink)
		}
	}
	for _, l := range p.labels {
		p.pane.Text(1, l.row, " "+l.text+" ", l.ink)
	}
}
