package figure

import (
	"bufio"
	"encoding/xml"
	"fmt"
	"io"
	"strings"

	"barline/tui/frame"
)

// A cell is cellW by cellH units of the picture.
const (
	cellW = 8
	cellH = 17
	edge  = 10
)

// SVG writes f as an SVG 1.1 picture. The title is what a reader that shows no
// pictures says instead.
func SVG(w io.Writer, f *frame.Frame, style frame.Style, title string) error {
	b := bufio.NewWriter(w)
	cols, rows := f.Size()
	width, height := cols*cellW+2*edge, rows*cellH+2*edge
	ground, ink := frame.Colour{R: 16, G: 18, B: 22, Set: true}, frame.Colour{R: 208, G: 208, B: 208, Set: true}
	if style.Light {
		ground, ink = frame.Colour{R: 252, G: 252, B: 250, Set: true}, frame.Colour{R: 32, G: 32, B: 32, Set: true}
	}
	fmt.Fprintf(b, `<svg xmlns="http://www.w3.org/2000/svg" width="%d" height="%d" viewBox="0 0 %d %d" role="img" font-family="DejaVu Sans Mono, Menlo, Consolas, monospace" font-size="13">`+"\n", width, height, width, height)
	fmt.Fprintf(b, "<title>%s</title>\n", escape(title))
	fmt.Fprintf(b, `<rect width="%d" height="%d" fill="%s"/>`+"\n", width, height, hex(ground))
	p := &painter{f: f, style: style, ground: ground, ink: ink, shapes: map[frame.Colour]*strings.Builder{}}
	for y := range rows {
		p.row(b, y, cols)
	}
	for _, c := range p.order {
		fmt.Fprintf(b, `<path fill="%s" d="%s"/>`+"\n", hex(c), p.shapes[c].String())
	}
	fmt.Fprintln(b, "</svg>")
	return b.Flush()
}

// painter gathers the shapes of one colour into one path.
type painter struct {
	f           *frame.Frame
	style       frame.Style
	ground, ink frame.Colour
	shapes      map[frame.Colour]*strings.Builder
	order       []frame.Colour
}

func (p *painter) colours(ink frame.Ink) (fore, back frame.Colour, bold bool) {
	l := p.style.Look(ink)
	fore, back = l.Fore, l.Back
	if !fore.Set {
		fore = p.ink
	}
	if !back.Set {
		back = p.ground
	}
	if l.Reverse {
		fore, back = back, fore
	}
	return fore, back, l.Bold
}

// row writes the backgrounds and words of a row and keeps its shapes.
func (p *painter) row(b io.Writer, y, cols int) {
	top := edge + y*cellH
	for x := 0; x < cols; {
		c := p.f.At(x, y)
		_, back, _ := p.colours(c.Ink)
		n := 1
		for x+n < cols && p.f.At(x+n, y).Ink == c.Ink {
			n++
		}
		if back != p.ground {
			fmt.Fprintf(b, `<rect x="%d" y="%d" width="%d" height="%d" fill="%s"/>`+"\n", edge+x*cellW, top, n*cellW, cellH, hex(back))
		}
		x += n
	}
	for x := 0; x < cols; {
		c := p.f.At(x, y)
		fore, _, bold := p.colours(c.Ink)
		if p.shape(c.Rune, fore, edge+x*cellW, top) || c.Rune == ' ' || c.Rune == 0 {
			x++
			continue
		}
		word := []rune{c.Rune}
		n := 1
		for x+n < cols {
			next := p.f.At(x+n, y)
			if next.Ink != c.Ink || next.Rune == ' ' || isShape(next.Rune) {
				break
			}
			if next.Rune != 0 {
				word = append(word, next.Rune)
			}
			n++
		}
		weight := ""
		if bold {
			weight = ` font-weight="bold"`
		}
		fmt.Fprintf(b, `<text x="%d" y="%d" textLength="%d" lengthAdjust="spacingAndGlyphs" fill="%s"%s>%s</text>`+"\n",
			edge+x*cellW, top+13, n*cellW, hex(fore), weight, escape(string(word)))
		x += n
	}
}

func (p *painter) path(c frame.Colour) *strings.Builder {
	if p.shapes[c] == nil {
		p.shapes[c] = &strings.Builder{}
		p.order = append(p.order, c)
	}
	return p.shapes[c]
}

func isShape(r rune) bool {
	_, line := strokes[r]
	return line || r > 0x2800 && r < 0x2900
}

// strokes are the arms of line-drawing characters: left, right, up, down.
var strokes = map[rune][4]bool{
	'─': {true, true, false, false}, '│': {false, false, true, true},
	'┌': {false, true, false, true}, '┐': {true, false, false, true},
	'└': {false, true, true, false}, '┘': {true, false, true, false},
	'┤': {true, false, true, true}, '├': {false, true, true, true},
	'┴': {true, true, true, false}, '┬': {true, true, false, true}, '┼': {true, true, true, true},
	'═': {true, true, false, false},
}

// shape draws a character that is not a letter, if it is one.
func (p *painter) shape(r rune, c frame.Colour, x, y int) bool {
	if r > 0x2800 && r < 0x2900 {
		d := p.path(c)
		bits := byte(r - 0x2800)
		for row, pair := range [4][2]byte{{0x01, 0x08}, {0x02, 0x10}, {0x04, 0x20}, {0x40, 0x80}} {
			for col, m := range pair {
				if bits&m != 0 {
					fmt.Fprintf(d, "M%.2f %.2fh2v2h-2z", float64(x)+1+float64(col)*4, float64(y)+1.1+float64(row)*4.25)
				}
			}
		}
		return true
	}
	arms, line := strokes[r]
	if !line {
		return false
	}
	d := p.path(c)
	mx, my := x+cellW/2, y+cellH/2
	if r == '═' {
		fmt.Fprintf(d, "M%d %dh%dv1h-%dzM%d %dh%dv1h-%dz", x, my-2, cellW, cellW, x, my+2, cellW, cellW)
		return true
	}
	if arms[0] {
		fmt.Fprintf(d, "M%d %dh%dv1h-%dz", x, my, cellW/2+1, cellW/2+1)
	}
	if arms[1] {
		fmt.Fprintf(d, "M%d %dh%dv1h-%dz", mx, my, cellW/2, cellW/2)
	}
	if arms[2] {
		fmt.Fprintf(d, "M%d %dv%dh1v-%dz", mx, y, cellH/2+1, cellH/2+1)
	}
	if arms[3] {
		fmt.Fprintf(d, "M%d %dv%dh1v-%dz", mx, my, cellH-cellH/2, cellH-cellH/2)
	}
	return true
}

func hex(c frame.Colour) string { return fmt.Sprintf("#%02x%02x%02x", c.R, c.G, c.B) }

func escape(s string) string {
	var b strings.Builder
	_ = xml.EscapeText(&b, []byte(s)) // a strings.Builder takes everything
	return b.String()
}
