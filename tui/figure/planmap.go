package figure

import (
	"fmt"
	"image/color"
	"io"
	"math"
	"slices"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"barline/model/plan"
	"barline/model/unit"
)

// Mark is one place to point out on a map.
type Mark struct {
	Pressure unit.Pascal
	Energy   unit.Joule
	Text     string
}

const (
	mapWidth  = 22 * vg.Centimeter
	mapHeight = 15 * vg.Centimeter
	keyHeight = 2.6 * vg.Centimeter // of the names under the map
	keyRow    = 3                   // names in one line of the key
)

// tints of forbidden regions: light, so that lines and words stay readable, and
// told apart by their names.
var tints = []color.RGBA{
	{0xdd, 0xdd, 0xdd, 0xff}, {0xf6, 0xd5, 0xc3, 0xff}, {0xcf, 0xe3, 0xf1, 0xff}, {0xf4, 0xeb, 0xb8, 0xff},
	{0xcd, 0xe8, 0xdb, 0xff}, {0xec, 0xd3, 0xe3, 0xff}, {0xbb, 0xbb, 0xc8, 0xff}, {0xe2, 0xd9, 0xc4, 0xff},
}

// PlanMap draws the emission of one gas over pressure and energy: lines of
// equal emission, the target among them, and the regions that a bound forbids,
// each named. format is one of Formats.
func PlanMap(w io.Writer, format string, m *plan.Map, from, to unit.Metre, marks []Mark) error {
	if len(m.Pressures) < 2 || len(m.Energies) < 2 {
		return fmt.Errorf("figure: a map of %d pressures and %d energies, expected at least 2 of each", len(m.Pressures), len(m.Energies))
	}
	p := plot.New()
	p.Title.Text = fmt.Sprintf("%s: emission over pressure and energy (%s)", m.Gas, m.Answer)
	p.X.Label.Text, p.Y.Label.Text = "absolute pressure (bar)", "pulse energy in the fibre (uJ)"
	p.X.Scale, p.Y.Scale = plot.LogScale{}, plot.LogScale{}
	p.X.Tick.Marker, p.Y.Tick.Marker = plot.TickerFunc(decades), plot.TickerFunc(decades)
	g := borders{edges(m.Pressures, 1e-5), edges(m.Energies, 1e6)}
	names, err := g.regions(p, m)
	if err != nil {
		return err
	}
	if err := isolines(p, m, from, to); err != nil {
		return err
	}
	for _, k := range marks {
		if err := point(p, k); err != nil {
			return err
		}
	}
	p.X.Min, p.X.Max = g.pressure[0], g.pressure[len(g.pressure)-1]
	p.Y.Min, p.Y.Max = g.energy[0], g.energy[len(g.energy)-1]
	c, err := draw.NewFormattedCanvas(mapWidth, mapHeight, format)
	if err != nil {
		return fmt.Errorf("figure: %w", err)
	}
	area := draw.New(c)
	p.Draw(draw.Crop(area, 2*vg.Millimeter, -5*vg.Millimeter, keyHeight, -2*vg.Millimeter))
	key(draw.Crop(area, 8*vg.Millimeter, -8*vg.Millimeter, 2*vg.Millimeter, keyHeight-mapHeight), p.Legend.TextStyle, names)
	_, err = c.WriteTo(w)
	return err
}

// decades marks 1, 2 and 5 of each decade, all digits where there is less than
// one.
func decades(low, high float64) (marks []plot.Tick) {
	for e := math.Floor(math.Log10(low)); e <= math.Ceil(math.Log10(high)); e++ {
		for n := 1.0; n < 10; n++ {
			v := n * math.Pow(10, e)
			if v < low*(1-1e-9) || v > high*(1+1e-9) {
				continue
			}
			t := plot.Tick{Value: v}
			if n == 1 || n == 2 || n == 5 || high < 10*low {
				t.Label = fmt.Sprintf("%.4g", v)
			}
			marks = append(marks, t)
		}
	}
	return marks
}

// borders are the edges of the cells of a map.
type borders struct{ pressure, energy []float64 }

// edges returns the borders between values in equal ratios, in another unit.
func edges[T ~float64](values []T, factor float64) []float64 {
	half := math.Sqrt(float64(values[1] / values[0]))
	list := []float64{float64(values[0]) * factor / half}
	for _, v := range values {
		list = append(list, float64(v)*factor*half)
	}
	return list
}

// regions fills what is forbidden, and returns the names in the order of the
// tints.
func (g borders) regions(p *plot.Plot, m *plan.Map) (names []string, err error) {
	rings := map[string][]plotter.XYer{}
	type spot struct{ x, y, weight float64 }
	widest := map[string]spot{}
	for j, row := range m.Cells {
		for i := 0; i < len(row); {
			name, from := row[i].Forbidden, i
			for i < len(row) && row[i].Forbidden == name {
				i++
			}
			if name == "" {
				continue
			}
			if !slices.Contains(names, name) {
				names = append(names, name)
			}
			x0, x1, y0, y1 := g.pressure[from], g.pressure[i], g.energy[j], g.energy[j+1]
			rings[name] = append(rings[name], plotter.XYs{{X: x0, Y: y0}, {X: x1, Y: y0}, {X: x1, Y: y1}, {X: x0, Y: y1}})
			if w := math.Log(x1 / x0); w > 1.1*widest[name].weight {
				widest[name] = spot{x0, math.Sqrt(y0 * y1), w}
			}
		}
	}
	for k, name := range names {
		area, err := plotter.NewPolygon(rings[name]...)
		if err != nil {
			return nil, fmt.Errorf("figure: %w", err)
		}
		area.Color, area.LineStyle = tints[k%len(tints)], draw.LineStyle{}
		p.Add(area)
	}
	whole := math.Log(g.pressure[len(g.pressure)-1] / g.pressure[0])
	for _, name := range names {
		s := widest[name]
		if s.weight < 0.006*whole*float64(len(name)) { // the word would not fit: the key has it
			continue
		}
		if err := word(p, s.x*1.03, s.y, name, color.Gray{0x40}, 0); err != nil {
			return nil, err
		}
	}
	return names, nil
}

// word writes a text that begins at a place, turned by an angle.
func word(p *plot.Plot, x, y float64, s string, c color.Color, turn float64) error {
	l, err := plotter.NewLabels(plotter.XYLabels{XYs: plotter.XYs{{X: x, Y: y}}, Labels: []string{s}})
	if err != nil {
		return fmt.Errorf("figure: %w", err)
	}
	l.TextStyle[0].Color, l.TextStyle[0].Font.Size, l.TextStyle[0].Rotation = c, font.Points(9), turn
	p.Add(l)
	return nil
}

// point draws a mark.
func point(p *plot.Plot, k Mark) error {
	x, y := k.Pressure.Bar(), k.Energy.Microjoules()
	s, err := plotter.NewScatter(plotter.XYs{{X: x, Y: y}})
	if err != nil {
		return fmt.Errorf("figure: %w", err)
	}
	s.GlyphStyle = draw.GlyphStyle{Color: color.Black, Radius: vg.Points(4), Shape: draw.CircleGlyph{}}
	p.Add(s)
	return word(p, x*1.02, y/1.08, k.Text, color.Black, 0)
}

// key names the tints.
func key(c draw.Canvas, style text.Style, names []string) {
	style.Font.Size = font.Points(9)
	column, line := c.Rectangle.Size().X/keyRow, 4.5*vg.Millimeter
	for k, name := range names {
		x := c.Min.X + vg.Length(k%keyRow)*column
		y := c.Max.Y - vg.Length(k/keyRow+1)*line
		box := []vg.Point{{X: x, Y: y}, {X: x + 5*vg.Millimeter, Y: y}, {X: x + 5*vg.Millimeter, Y: y + 3*vg.Millimeter}, {X: x, Y: y + 3*vg.Millimeter}}
		c.FillPolygon(tints[k%len(tints)], box)
		c.FillText(style, vg.Point{X: x + 7*vg.Millimeter, Y: y}, "forbidden: "+name)
	}
}
