package figure

import (
	"fmt"
	"image"
	"image/color"
	"io"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/palette/moreland"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"barline/model/pulse"
	"barline/model/spectrum"
	"barline/model/unit"
)

// Formats that Propagation writes.
var Formats = []string{"svg", "png"}

const (
	figureWidth   = 20 * vg.Centimeter
	figureHeight  = 20 * vg.Centimeter
	depth         = 50  // dB below the highest value that is still drawn
	columns       = 700 // of the evolution's picture
	longestDrawn  = 1600 * unit.Nanometre
	shortestDrawn = 180 * unit.Nanometre
)

// Propagation draws what became of the light: the spectrum at the end of the
// fibre above its evolution along the fibre, on one wavelength axis, both in
// decibels below their highest value. format is one of Formats.
func Propagation(w io.Writer, format string, r *pulse.Result) error {
	short, long := r.Grid.Wavelengths()
	short, long = max(short, shortestDrawn), min(long, max(longestDrawn, 1.5*r.Setup.Pulse.Wavelength))
	top, err := spectrumPlot(r, short, long)
	if err != nil {
		return err
	}
	plots := [][]*plot.Plot{{top}}
	if len(r.Evolution) > 1 {
		bottom, err := evolutionPlot(r, short, long)
		if err != nil {
			return err
		}
		plots = append(plots, []*plot.Plot{bottom})
	}
	c, err := draw.NewFormattedCanvas(figureWidth, figureHeight*vg.Length(len(plots))/2, format)
	if err != nil {
		return fmt.Errorf("figure: %w", err)
	}
	area := draw.New(c)
	tiles := draw.Tiles{Rows: len(plots), Cols: 1, PadX: vg.Millimeter, PadY: 4 * vg.Millimeter,
		PadTop: 2 * vg.Millimeter, PadBottom: 2 * vg.Millimeter, PadLeft: 2 * vg.Millimeter, PadRight: 4 * vg.Millimeter}
	for i, row := range plot.Align(plots, tiles, area) {
		plots[i][0].Draw(row[0])
	}
	_, err = c.WriteTo(w)
	return err
}

// decibels returns the energy per wavelength of d below top, no lower than the
// depth that is drawn.
func decibels(d spectrum.Density, i int, top float64) float64 {
	v := d.PerWavelength(i) / top
	if v < math.Pow(10, -depth/10) {
		return -depth
	}
	return 10 * math.Log10(v)
}

func highest(d spectrum.Density) float64 {
	top := 0.0
	for i := range d.Energy {
		top = max(top, d.PerWavelength(i))
	}
	return top
}

func spectrumPlot(r *pulse.Result, short, long unit.Metre) (*plot.Plot, error) {
	p := plot.New()
	p.Title.Text = title(r)
	p.X.Label.Text = "wavelength (nm)"
	p.Y.Label.Text = "energy per wavelength (dB)"
	top := highest(r.Output)
	var points plotter.XYs
	for i := range r.Output.Energy {
		if l := r.Output.Wavelength(i); l >= short && l <= long {
			points = append(points, plotter.XY{X: l.Nanometres(), Y: decibels(r.Output, i, top)})
		}
	}
	line, err := plotter.NewLine(points)
	if err != nil {
		return nil, fmt.Errorf("figure: %w", err)
	}
	line.Color = color.RGBA{R: 0x00, G: 0x72, B: 0xb2, A: 0xff} // Okabe & Ito's blue
	p.Add(plotter.NewGrid(), line)
	if l, ok := r.Emission(); ok {
		mark, err := plotter.NewLabels(plotter.XYLabels{
			XYs:    plotter.XYs{{X: l.Centroid.Nanometres(), Y: 3}},
			Labels: []string{fmt.Sprintf("%.1f nm", l.Centroid.Nanometres())},
		})
		if err != nil {
			return nil, fmt.Errorf("figure: %w", err)
		}
		p.Add(mark)
	}
	p.X.Min, p.X.Max = short.Nanometres(), long.Nanometres()
	p.X.Tick.Marker = ticks(200)
	p.Y.Min, p.Y.Max = -depth, 8
	p.Y.Tick.Marker = ticks(10)
	return p, nil
}

// ticks marks the whole multiples of a step.
func ticks(step float64) plot.Ticker {
	return plot.TickerFunc(func(low, high float64) (marks []plot.Tick) {
		for v := math.Ceil(low/step) * step; v <= high; v += step {
			marks = append(marks, plot.Tick{Value: v, Label: fmt.Sprintf("%.4g", v)})
		}
		return marks
	})
}

// title says what was propagated.
func title(r *pulse.Result) string {
	s := r.Setup
	name := "empty fibre"
	if m := s.Gas.Medium(); m != nil {
		name = m.Name()
	}
	return fmt.Sprintf("%s %.4g bar, %.4g uJ, %.3g fs", name, s.Gas.Pressure.Bar(), s.Pulse.Energy.Microjoules(), s.Pulse.Duration.Femtoseconds())
}

func evolutionPlot(r *pulse.Result, short, long unit.Metre) (*plot.Plot, error) {
	colours := moreland.Kindlmann()
	colours.SetMin(-depth)
	colours.SetMax(0)
	top := 0.0
	at := func(s pulse.Sample) spectrum.Density {
		return spectrum.Density{First: r.Output.First, Spacing: r.Output.Spacing, Energy: s.Energy}
	}
	for _, s := range r.Evolution {
		top = max(top, highest(at(s)))
	}
	rows := len(r.Evolution)
	img := image.NewRGBA(image.Rect(0, 0, columns, rows))
	for y, s := range r.Evolution {
		d := at(s)
		for x := range columns {
			l := float64(short) + float64(long-short)*(float64(x)+0.5)/columns
			i := int(math.Round((2*math.Pi*299792458/l - d.First) / d.Spacing))
			c, err := colours.At(decibels(d, min(max(i, 0), len(d.Energy)-1), top))
			if err != nil {
				return nil, fmt.Errorf("figure: %w", err)
			}
			img.Set(x, rows-1-y, c)
		}
	}
	p := plot.New()
	p.X.Label.Text = "wavelength (nm)"
	p.Y.Label.Text = "along the fibre (cm)"
	end := 100 * float64(r.Evolution[rows-1].Position)
	p.Add(plotter.NewImage(img, short.Nanometres(), 0, long.Nanometres(), end))
	compressed, err := plotter.NewLine(plotter.XYs{
		{X: short.Nanometres(), Y: 100 * float64(r.Compression)}, {X: long.Nanometres(), Y: 100 * float64(r.Compression)},
	})
	if err != nil {
		return nil, fmt.Errorf("figure: %w", err)
	}
	compressed.Color = color.White
	compressed.Dashes = []vg.Length{vg.Points(4), vg.Points(4)}
	p.Add(compressed)
	p.X.Min, p.X.Max = short.Nanometres(), long.Nanometres()
	p.X.Tick.Marker = ticks(200)
	p.Y.Min, p.Y.Max = 0, end
	return p, nil
}
