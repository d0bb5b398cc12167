package chart

import (
	"math"

	"barline/tui/frame"
)

// dots is a raster of Braille dots over an area: W*2 across, H*4 down, (0, 0)
// at the top left. The last ink drawn in a cell colours all of it.
type dots struct {
	area frame.Area
	w, h int
	bits []byte
	ink  []frame.Ink

	broken bool // leave every third pair of columns blank
}

func newDots(a frame.Area) *dots {
	n := a.W * a.H
	return &dots{area: a, w: a.W * 2, h: a.H * 4, bits: make([]byte, n), ink: make([]frame.Ink, n)}
}

// bit is the place of a dot in U+2800's block (Unicode 15.0, section 21.1).
var bit = [4][2]byte{{0x01, 0x08}, {0x02, 0x10}, {0x04, 0x20}, {0x40, 0x80}}

func (d *dots) set(x, y int, ink frame.Ink) {
	if x < 0 || y < 0 || x >= d.w || y >= d.h || d.broken && x%6 >= 4 {
		return
	}
	i := y/4*d.area.W + x/2
	d.bits[i] |= bit[y%4][x%2]
	d.ink[i] = ink
}

// column sets the dots from y0 to y1, both included.
func (d *dots) column(x, y0, y1 int, ink frame.Ink) {
	if y0 > y1 {
		y0, y1 = y1, y0
	}
	for y := max(y0, 0); y <= min(y1, d.h-1); y++ {
		d.set(x, y, ink)
	}
}

// line joins two dots. Ends may lie far outside: only what is inside costs.
func (d *dots) line(x0, y0, x1, y1 float64, ink frame.Ink) {
	if math.IsNaN(x0+y0+x1+y1) || math.IsInf(x0+y0+x1+y1, 0) {
		return
	}
	t0, t1 := clip(x0, x1-x0, float64(d.w), 0, 1)
	t0, t1 = clip(y0, y1-y0, float64(d.h), t0, t1)
	if t0 > t1 {
		return
	}
	dx, dy := x1-x0, y1-y0
	ax, ay, bx, by := x0+t0*dx, y0+t0*dy, x0+t1*dx, y0+t1*dy
	// Where the ends are so far away that clipping lost its digits, the line
	// cannot be placed.
	long := math.Ceil(max(math.Abs(bx-ax), math.Abs(by-ay)))
	if !(long <= float64(d.w+d.h+4)) {
		return
	}
	n := int(long) + 1
	for i := range n {
		f := 0.0
		if n > 1 {
			f = float64(i) / float64(n-1)
		}
		d.set(clampInt(math.Round(ax+f*(bx-ax))), clampInt(math.Round(ay+f*(by-ay))), ink)
	}
}

// clip narrows the part t0..t1 of from + t*delta to what lies within 0..size,
// with a dot to spare.
func clip(from, delta, size, t0, t1 float64) (float64, float64) {
	if delta == 0 {
		if from < -1 || from > size {
			return 1, 0
		}
		return t0, t1
	}
	a, b := (-1-from)/delta, (size-from)/delta
	if a > b {
		a, b = b, a
	}
	return max(t0, a), min(t1, b)
}

// flush draws the cells that hold a dot.
func (d *dots) flush() {
	for i, b := range d.bits {
		if b != 0 {
			d.area.Set(i%d.area.W, i/d.area.W, 0x2800+rune(b), d.ink[i])
		}
	}
}
