package report

import (
	"fmt"
	"html"
	"math"
	"strings"
	"time"
)

// stroke tells series apart by colour and by dashes, so that a print without
// colour can still be read. Colours after Okabe and Ito, Color Universal
// Design (2008), which eyes of every kind tell apart.
type stroke struct{ colour, dashes string }

var strokes = []stroke{
	{"#0072B2", ""}, {"#D55E00", "7 3"}, {"#009E73", "2 3"}, {"#CC79A7", "9 3 2 3"}, {"#56B4E9", "4 2"}, {"#000000", "1 2"},
}

// Size of a chart and of what its axes need, in user units.
const (
	width, height             = 960.0, 300.0
	left, right, top, bottom  = 70.0, 12.0, 12.0, 42.0
	plotWidth, plotHeight     = width - left - right, height - top - bottom
	mostTicksX, mostTicksY    = 10, 6
	tickLength, labelBaseline = 5.0, 16.0
)

// axis maps values to a length. Its ticks carry text.
type axis struct {
	least, most float64
	label       string
	ticks       []tick
}

type tick struct {
	at   float64
	text string
}

// at returns where v is, from 0 to 1.
func (a axis) at(v float64) float64 { return (v - a.least) / (a.most - a.least) }

// valueAxis spans least to most with a margin and round ticks.
func valueAxis(label string, least, most float64, mostTicks int) axis {
	if most-least < 1e-9*math.Max(math.Abs(most), 1) {
		pad := math.Max(math.Abs(most)*0.01, 0.01)
		least, most = least-pad, most+pad
	}
	pad := 0.04 * (most - least)
	a := axis{least: least - pad, most: most + pad, label: label}
	width := roundStep((a.most - a.least) / float64(mostTicks))
	decimals := max(0, int(math.Ceil(-math.Log10(width)-1e-9)))
	for i := math.Ceil(a.least / width); i*width <= a.most; i++ {
		v := i * width
		if v == 0 {
			v = 0 // no minus sign
		}
		a.ticks = append(a.ticks, tick{v, fmt.Sprintf("%.*f", decimals, v)})
	}
	return a
}

// roundStep returns the least of 1, 2 and 5 times a power of ten that is not
// below v.
func roundStep(v float64) float64 {
	power := math.Pow(10, math.Floor(math.Log10(v)))
	for _, m := range []float64{1, 2, 5} {
		if m*power >= v*(1-1e-9) {
			return m * power
		}
	}
	return 10 * power
}

var timeSteps = []struct {
	width  time.Duration
	layout string
}{
	{time.Second, "15:04:05"}, {2 * time.Second, "15:04:05"}, {5 * time.Second, "15:04:05"}, {10 * time.Second, "15:04:05"},
	{30 * time.Second, "15:04:05"}, {time.Minute, "15:04"}, {2 * time.Minute, "15:04"}, {5 * time.Minute, "15:04"},
	{10 * time.Minute, "15:04"}, {30 * time.Minute, "15:04"}, {time.Hour, "15:04"}, {2 * time.Hour, "2 Jan 15:04"},
	{6 * time.Hour, "2 Jan 15:04"}, {12 * time.Hour, "2 Jan 15:04"}, {24 * time.Hour, "2 Jan"}, {48 * time.Hour, "2 Jan"},
	{7 * 24 * time.Hour, "2 Jan"}, {14 * 24 * time.Hour, "2 Jan"}, {28 * 24 * time.Hour, "2 Jan 2006"}, {91 * 24 * time.Hour, "2 Jan 2006"},
	{365 * 24 * time.Hour, "2 Jan 2006"},
}

// timeAxis spans from to to, in seconds since from, with ticks at round times
// of the zone.
func timeAxis(from, to time.Time, zone *time.Location) axis {
	span := max(to.Sub(from), time.Second)
	a := axis{least: 0, most: span.Seconds(), label: "time, " + zone.String()}
	for i, s := range timeSteps {
		if span/s.width > mostTicksX && i < len(timeSteps)-1 {
			continue
		}
		t := from.In(zone)
		midnight := time.Date(t.Year(), t.Month(), t.Day(), 0, 0, 0, 0, zone)
		t = midnight.Add(t.Sub(midnight).Truncate(s.width))
		for n := 0; !t.After(to) && n <= 2*mostTicksX; t, n = t.Add(s.width), n+1 {
			if !t.Before(from) {
				a.ticks = append(a.ticks, tick{t.Sub(from).Seconds(), t.Format(s.layout)})
			}
		}
		return a
	}
	return a
}

// chart draws SVG. Its methods add to it in the order of painting.
type chart struct {
	b    strings.Builder
	x, y axis
}

func newChart(title string, x, y axis) *chart {
	c := &chart{x: x, y: y}
	fmt.Fprintf(&c.b, `<svg viewBox="0 0 %g %g" role="img" aria-label="%s">`, width, height, html.EscapeString(title))
	fmt.Fprintf(&c.b, `<rect class="frame" x="%g" y="%g" width="%g" height="%g"/>`, left, top, plotWidth, plotHeight)
	for _, t := range x.ticks {
		px := left + x.at(t.at)*plotWidth
		fmt.Fprintf(&c.b, `<path class="grid" d="M%.1f %gV%g"/><text class="mid" x="%.1f" y="%g">%s</text>`,
			px, top, top+plotHeight+tickLength, px, top+plotHeight+labelBaseline+tickLength, html.EscapeString(t.text))
	}
	for _, t := range y.ticks {
		py := top + (1-y.at(t.at))*plotHeight
		fmt.Fprintf(&c.b, `<path class="grid" d="M%g %.1fH%g"/><text class="end" x="%g" y="%.1f">%s</text>`,
			left-tickLength, py, left+plotWidth, left-tickLength-3, py+4, html.EscapeString(t.text))
	}
	fmt.Fprintf(&c.b, `<text class="mid" x="%g" y="%g">%s</text>`, left+plotWidth/2, height-4, html.EscapeString(x.label))
	fmt.Fprintf(&c.b, `<text class="mid" transform="translate(14 %g) rotate(-90)">%s</text>`, top+plotHeight/2, html.EscapeString(y.label))
	return c
}

func (c *chart) px(v float64) float64 { return left + c.x.at(v)*plotWidth }
func (c *chart) py(v float64) float64 { return top + (1-c.y.at(v))*plotHeight }

// columns draws a series as a line through its columns; a column whose least
// and greatest values differ is drawn from one to the other. Where nothing is
// known the line is broken.
func (c *chart) columns(cols []column, s stroke) {
	fmt.Fprintf(&c.b, `<path fill="none" stroke="%s" stroke-width="1.5" stroke-dasharray="%s" d="`, s.colour, s.dashes)
	down := false
	for i, col := range cols {
		if !col.any {
			down = false
			continue
		}
		x := left + (float64(i)+0.5)/float64(len(cols))*plotWidth
		verb := "L"
		if !down {
			verb = "M"
		}
		fmt.Fprintf(&c.b, "%s%.1f %.1f", verb, x, c.py(col.least))
		if col.most != col.least {
			fmt.Fprintf(&c.b, "V%.1f", c.py(col.most))
		}
		if !down && (i+1 == len(cols) || !cols[i+1].any) { // alone: a short dash
			fmt.Fprintf(&c.b, "h1.5")
		}
		down = true
	}
	c.b.WriteString(`"/>`)
}

// bars draws each column by itself, from its least to its greatest value.
func (c *chart) bars(cols []column, s stroke) {
	fmt.Fprintf(&c.b, `<path fill="none" stroke="%s" stroke-width="2.5" stroke-linecap="round" d="`, s.colour)
	for i, col := range cols {
		if col.any {
			x := left + (float64(i)+0.5)/float64(len(cols))*plotWidth
			fmt.Fprintf(&c.b, "M%.1f %.1fV%.1f", x, c.py(col.least), c.py(col.most)-0.1)
		}
	}
	c.b.WriteString(`"/>`)
}

// band fills what lies between the least and the greatest value of each bin.
func (c *chart) band(x []float64, cols []column, gap float64) {
	for from := 0; from < len(x); {
		to := from + 1
		for to < len(x) && x[to]-x[to-1] <= gap {
			to++
		}
		fmt.Fprint(&c.b, `<path class="band" d="`)
		for i := from; i < to; i++ {
			verb := "L"
			if i == from {
				verb = "M"
			}
			fmt.Fprintf(&c.b, "%s%.1f %.1f", verb, c.px(x[i]), c.py(cols[i].most))
		}
		for i := to - 1; i >= from; i-- {
			fmt.Fprintf(&c.b, "L%.1f %.1f", c.px(x[i]), c.py(cols[i].least))
		}
		c.b.WriteString(`Z"/>`)
		from = to
	}
}

// point marks one measured value.
func (c *chart) point(x, y float64) {
	fmt.Fprintf(&c.b, `<circle cx="%.1f" cy="%.1f" r="2"/>`, c.px(x), c.py(y))
}

// level draws a horizontal line at y.
func (c *chart) level(y float64) {
	fmt.Fprintf(&c.b, `<path class="level" d="M%g %.1fH%g"/>`, left, c.py(y), left+plotWidth)
}

// svg returns the chart; it can be drawn to no more.
func (c *chart) svg() string { return c.b.String() + "</svg>" }
