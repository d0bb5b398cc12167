package frame

import "strings"

// String returns the frame as text for a terminal: lines parted by "\n", none
// at the end, blanks at line ends left out. Every line stands alone, so that
// an unchanged one need not be sent again.
func (f *Frame) String() string {
	var b strings.Builder
	b.Grow(f.w * f.h * 2)
	for y := range f.h {
		if y > 0 {
			b.WriteByte('\n')
		}
		f.line(&b, f.cells[y*f.w:(y+1)*f.w])
	}
	return b.String()
}

func (f *Frame) line(b *strings.Builder, row []Cell) {
	end := len(row)
	for end > 0 && row[end-1].Rune == ' ' && !f.style.shows(row[end-1].Ink) {
		end--
	}
	open, shown := "", false
	for _, c := range row[:end] {
		if c.Rune == 0 {
			continue
		}
		codes := f.style.codes(c.Ink)
		if c.Rune == ' ' && !f.style.shows(c.Ink) {
			codes = ""
			if !shown {
				codes = open // a blank looks the same in any of these inks
			}
		}
		if codes != open {
			shown = f.style.shows(c.Ink)
			if open != "" {
				b.WriteString("\x1b[0m")
			}
			if codes != "" {
				b.WriteString("\x1b[")
				b.WriteString(codes)
				b.WriteByte('m')
			}
			open = codes
		}
		r := c.Rune
		if f.style.ASCII && r >= 0x80 {
			r = ascii(r)
		}
		b.WriteRune(r)
	}
	if open != "" {
		b.WriteString("\x1b[0m")
	}
}

// shows reports whether a blank in this ink can be seen.
func (s Style) shows(ink Ink) bool {
	return ink == Hold || ink == Banner || ink == Cursor || ink == Past
}

// ascii stands in for one drawn character.
func ascii(r rune) rune {
	switch {
	case r < 0x80:
		return r
	case r >= 0x2800 && r < 0x2900:
		return asciiDots(byte(r - 0x2800))
	}
	switch r {
	case '─', '━', '╌', '┄', '╴', '╶', '\u2212':
		return '-'
	case '═':
		return '='
	case '│', '┃', '┆', '╎', '║':
		return '|'
	case '▲', '△', '↑':
		return '^'
	case '▼', '▽', '↓':
		return 'v'
	case '●', '◆', '■':
		return '*'
	case '○', '◇', '□', '◐':
		return 'o'
	case '▶', '▷', '→':
		return '>'
	case '◀', '◁', '←':
		return '<'
	case '×':
		return 'x'
	case '·':
		return '.'
	case '°':
		return ' '
	}
	if r >= 0x2500 && r < 0x2580 {
		return '+'
	}
	return '?'
}

// asciiDots draws the eight dots of a Braille cell by the height at which they
// stand.
func asciiDots(bits byte) rune {
	rows := [4]byte{0x01 | 0x08, 0x02 | 0x10, 0x04 | 0x20, 0x40 | 0x80}
	n, top, bottom := 0, -1, -1
	for i, m := range rows {
		if bits&m != 0 {
			if top < 0 {
				top = i
			}
			n, bottom = n+1, i
		}
	}
	switch {
	case n == 0:
		return ' '
	case n >= 3:
		return '|'
	case n == 2 && bottom-top > 1:
		return ':'
	case top == 0:
		return '\''
	case bottom == 3:
		return '.'
	}
	return '-'
}
