package chart

import (
	"math"

	"barline/tui/frame"
)

// screen is the order in which the eight dots of a cell come on as a shade
// grows, in eighths: neighbours stay apart as long as they can.
var screen = [4][2]float64{{0, 4}, {6, 2}, {1, 5}, {7, 3}}

// Shade sets as many dots as a shade of 0 (none) to 1 (all) asks for, at every
// place of the chart. What is not a number is none. A shade above nothing has
// at least one dot in eight.
func (p *Plot) Shade(shade func(x, y float64) float64, ink frame.Ink) {
	if p.dots == nil {
		return
	}
	for i := range p.dots.w {
		x := p.axes.X.Lo + (p.axes.X.Hi-p.axes.X.Lo)*float64(i)/float64(max(p.dots.w-1, 1))
		for j := range p.dots.h {
			y := p.axes.Y.Hi - (p.axes.Y.Hi-p.axes.Y.Lo)*float64(j)/float64(max(p.dots.h-1, 1))
			if s := shade(x, y); !math.IsNaN(s) && s*8 > screen[j%4][i%2] {
				p.dots.set(i, j, ink)
			}
		}
	}
}
