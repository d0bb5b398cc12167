package figure

import (
	"fmt"
	"image/color"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"

	"barline/model/plan"
	"barline/model/unit"
)

var (
	lineColour   = color.RGBA{0x55, 0x55, 0x55, 0xff}
	targetColour = color.RGBA{0x00, 0x72, 0xb2, 0xff} // Okabe & Ito's blue
)

// isolines draws lines of equal emission at whole steps, and the target.
//
// Names stand along their lines, at four heights in turn, so that none hides
// its neighbour.
func isolines(p *plot.Plot, m *plan.Map, from, to unit.Metre) error {
	low, high := span(m)
	if high == 0 {
		return nil // it emits nowhere
	}
	step := 10.0
	for (high.Nanometres()-low.Nanometres())/step > 16 {
		step *= 2
	}
	for i, v := 0, math.Ceil(low.Nanometres()/step)*step; v <= high.Nanometres(); i, v = i+1, v+step {
		l := isoline{lambda: unit.Metre(v * 1e-9), name: fmt.Sprintf("%.0f nm", v), colour: lineColour, width: vg.Points(0.6), height: 0.35 + 0.15*float64(i%4)}
		if err := l.draw(p, m); err != nil {
			return err
		}
	}
	name := "target %.4g nm"
	target := isoline{colour: targetColour, width: vg.Points(2), height: 0.08}
	if from != to {
		target.lambda, target.name = to, fmt.Sprintf("target to %.4g nm", to.Nanometres())
		if err := target.draw(p, m); err != nil {
			return err
		}
		name = "target from %.4g nm"
	}
	target.lambda, target.name = from, fmt.Sprintf(name, from.Nanometres())
	return target.draw(p, m)
}

// span returns the shortest and longest emission of a map.
func span(m *plan.Map) (low, high unit.Metre) {
	for _, row := range m.Cells {
		for _, c := range row {
			if c.Emission > 0 && (high == 0 || c.Emission < low) {
				low = c.Emission
			}
			high = max(high, c.Emission)
		}
	}
	return low, high
}

// isoline is where the emission is at lambda.
type isoline struct {
	lambda unit.Metre
	name   string
	colour color.Color
	width  vg.Length
	height float64 // of the name along the line, 0 to 1
}

// draw draws one line for each stretch of energies that has the wavelength
// without a jump.
func (l isoline) draw(p *plot.Plot, m *plan.Map) error {
	const jump = 1.25 // of the pressure from row to row, on one line
	var line plotter.XYs
	longest := plotter.XYs{}
	flush := func() error {
		if len(line) > len(longest) {
			longest = line
		}
		if len(line) > 1 {
			drawn, err := plotter.NewLine(line)
			if err != nil {
				return fmt.Errorf("figure: %w", err)
			}
			drawn.Color, drawn.Width = l.colour, l.width
			p.Add(drawn)
		}
		line = nil
		return nil
	}
	for j, row := range m.Cells {
		x, ok := crossing(m.Pressures, row, l.lambda)
		if len(line) > 0 && (!ok || math.Abs(math.Log(x/line[len(line)-1].X)) > math.Log(jump)) {
			if err := flush(); err != nil {
				return err
			}
		}
		if ok {
			line = append(line, plotter.XY{X: x, Y: m.Energies[j].Microjoules()})
		}
	}
	if err := flush(); err != nil {
		return err
	}
	if len(longest) < 2 {
		return nil
	}
	at := longest[int(l.height*float64(len(longest)-1))]
	return word(p, at.X, at.Y, l.name, l.colour, math.Pi/2)
}

// crossing returns the lowest pressure in bar at which a row has lambda.
func crossing(pressures []unit.Pascal, row []plan.Cell, lambda unit.Metre) (float64, bool) {
	for i := 1; i < len(row); i++ {
		a, b := row[i-1].Emission, row[i].Emission
		if a == 0 || b == 0 || (a < lambda) == (b < lambda) || math.Abs(float64(b-a)) > 0.12*float64(a) {
			continue // none, or a jump to another branch
		}
		t := float64((lambda - a) / (b - a))
		return pressures[i-1].Bar() * math.Pow(float64(pressures[i]/pressures[i-1]), t), true
	}
	return 0, false
}
