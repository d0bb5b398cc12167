package frame

import (
	"github.com/charmbracelet/x/ansi"
)

// Cell is one character position. A Rune of 0 is the right half of a wide
// character.
type Cell struct {
	Rune rune
	Ink  Ink
}

// Frame is a screenful of cells.
type Frame struct {
	w, h  int
	style Style
	cells []Cell

	places []place
}

// place is a named rectangle, for the mouse.
type place struct {
	name       string
	x, y, w, h int
}

// New returns a blank frame. Negative sizes count as zero.
func New(w, h int, style Style) *Frame {
	w, h = max(w, 0), max(h, 0)
	f := &Frame{w: w, h: h, style: style, cells: make([]Cell, w*h)}
	for i := range f.cells {
		f.cells[i].Rune = ' '
	}
	return f
}

// Size returns columns and rows.
func (f *Frame) Size() (w, h int) { return f.w, f.h }

// At returns a cell, or a blank one outside the frame.
func (f *Frame) At(x, y int) Cell {
	if x < 0 || y < 0 || x >= f.w || y >= f.h {
		return Cell{Rune: ' '}
	}
	return f.cells[y*f.w+x]
}

// PlaceAt returns the name of the place last named at a cell, and how far
// across it the cell lies, from 0 to 1. The name is empty where there is none.
func (f *Frame) PlaceAt(x, y int) (name string, across float64) {
	for i := len(f.places) - 1; i >= 0; i-- {
		p := f.places[i]
		if x >= p.x && y >= p.y && x < p.x+p.w && y < p.y+p.h {
			return p.name, float64(x-p.x) / float64(max(p.w-1, 1))
		}
	}
	return "", 0
}

// Area returns the whole frame as an area to draw in.
func (f *Frame) Area() Area { return Area{f: f, W: f.w, H: f.h} }

// Area is a rectangle of a frame. Coordinates are its own; what falls outside
// it is not drawn. The zero Area has no room.
type Area struct {
	f    *Frame
	x, y int
	W, H int
}

// Style returns the style that the frame will be shown in.
func (a Area) Style() Style {
	if a.f == nil {
		return Style{}
	}
	return a.f.style
}

// Sub returns the part of a at x, y of at most w by h cells.
func (a Area) Sub(x, y, w, h int) Area {
	if x < 0 {
		w, x = w+x, 0
	}
	if y < 0 {
		h, y = h+y, 0
	}
	w, h = min(w, a.W-x), min(h, a.H-y)
	return Area{f: a.f, x: a.x + x, y: a.y + y, W: max(w, 0), H: max(h, 0)}
}

// Set draws one narrow character.
func (a Area) Set(x, y int, r rune, ink Ink) {
	if x < 0 || y < 0 || x >= a.W || y >= a.H {
		return
	}
	a.f.cells[(a.y+y)*a.f.w+a.x+x] = Cell{r, ink}
}

// At returns what stands at x, y.
func (a Area) At(x, y int) Cell {
	if x < 0 || y < 0 || x >= a.W || y >= a.H {
		return Cell{Rune: ' '}
	}
	return a.f.cells[(a.y+y)*a.f.w+a.x+x]
}

// Name makes the area a place that PlaceAt finds.
func (a Area) Name(name string) {
	if a.f != nil && a.W > 0 && a.H > 0 {
		a.f.places = append(a.f.places, place{name, a.x, a.y, a.W, a.H})
	}
}

// Fill draws r in every cell.
func (a Area) Fill(r rune, ink Ink) {
	for y := range a.H {
		for x := range a.W {
			a.Set(x, y, r, ink)
		}
	}
}

// Tint gives every cell the ink and leaves the characters.
func (a Area) Tint(ink Ink) {
	for y := range a.H {
		for x := range a.W {
			a.Set(x, y, a.At(x, y).Rune, ink)
		}
	}
}

// Text draws s from x on and returns the column after it. Text that does not
// fit ends in an ellipsis.
func (a Area) Text(x, y int, s string, ink Ink) int {
	s = a.Style().spell(s)
	room := a.W - x
	if y < 0 || y >= a.H || room <= 0 {
		return x
	}
	if width(s) > room {
		s = cut(s, room-1) + string(a.Style().ellipsis())
	}
	for _, r := range s {
		w := runeWidth(r)
		switch {
		case w == 0:
			continue
		case w == 2:
			if x+1 >= a.W {
				r, w = ' ', 1
			} else {
				a.Set(x+1, y, 0, ink)
			}
		}
		a.Set(x, y, printable(r), ink)
		x += w
	}
	return x
}

// Right draws s so that it ends before column x and returns where it begins.
func (a Area) Right(x, y int, s string, ink Ink) int {
	from := x - a.Width(s)
	a.Text(max(from, 0), y, s, ink)
	return from
}

// Centre draws s in the middle of the w columns from x on.
func (a Area) Centre(x, y, w int, s string, ink Ink) {
	a.Sub(x, 0, w, a.H).Text(max(0, (w-a.Width(s))/2), y, s, ink)
}

// Width returns how many columns Text needs for s.
func (a Area) Width(s string) int { return width(a.Style().spell(s)) }

// runeWidth counts ambiguous characters as narrow, which is what terminals
// outside East Asian locales do; elsewhere there is the ASCII style.
func runeWidth(r rune) int {
	if r < 0x7f && r >= 0x20 || r >= 0x2500 && r < 0x2900 { // plain text, lines, blocks, Braille
		return 1
	}
	if r < 0x20 || r == 0x7f {
		return 1 // drawn as a dot
	}
	return ansi.StringWidth(string(r)) // as the terminal library counts
}

func width(s string) int {
	n := 0
	for _, r := range s {
		n += runeWidth(r)
	}
	return n
}

// cut returns the longest start of s that fits n columns.
func cut(s string, n int) string {
	for i, r := range s {
		if n -= runeWidth(r); n < 0 {
			return s[:i]
		}
	}
	return s
}

// printable replaces what would move the cursor or change the terminal.
func printable(r rune) rune {
	if r < 0x20 || r >= 0x7f && r < 0xa0 || r == '\u2028' || r == '\u2029' || r == '\u00ad' {
		return '.'
	}
	return r
}
