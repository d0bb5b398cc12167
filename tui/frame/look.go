package frame

import (
	"strconv"
	"strings"
)

// Colour is a colour of a terminal as red, green and blue. Set is false for
// the terminal's own foreground or background.
type Colour struct {
	R, G, B uint8
	Set     bool
}

// Look is how a cell appears.
type Look struct {
	Fore, Back    Colour
	Bold, Reverse bool
}

// Look returns how ink appears in this style, for pictures of a screen.
func (s Style) Look(ink Ink) Look {
	var l Look
	parts := strings.Split(s.codes(ink), ";")
	for i := 0; i < len(parts); i++ {
		n, err := strconv.Atoi(parts[i])
		switch {
		case err != nil:
		case n == 1:
			l.Bold = true
		case n == 7:
			l.Reverse = true
		case (n == 38 || n == 48) && i+2 < len(parts):
			index, _ := strconv.Atoi(parts[i+2])
			if n == 38 {
				l.Fore = paletteColour(index)
			} else {
				l.Back = paletteColour(index)
			}
			i += 2
		case n >= 30 && n < 38:
			l.Fore = paletteColour(n - 30)
		case n >= 90 && n < 98:
			l.Fore = paletteColour(n - 90 + 8)
		case n >= 40 && n < 48:
			l.Back = paletteColour(n - 40)
		}
	}
	return l
}

// basic are common values of the sixteen colours; every terminal has its own.
var basic = [16]Colour{
	{0, 0, 0, true}, {170, 34, 34, true}, {34, 139, 34, true}, {170, 119, 0, true},
	{34, 68, 187, true}, {153, 51, 153, true}, {0, 136, 136, true}, {187, 187, 187, true},
	{102, 102, 102, true}, {255, 85, 85, true}, {85, 221, 85, true}, {255, 221, 85, true},
	{102, 136, 255, true}, {238, 119, 238, true}, {85, 221, 221, true}, {255, 255, 255, true},
}

// paletteColour returns a colour of the 256 of xterm: sixteen basic ones, a
// cube of six levels a side, 24 greys (xterm's 256colres.h, public domain
// arithmetic: levels 0, 95, 135, 175, 215, 255; greys 8 + 10 n).
func paletteColour(n int) Colour {
	switch {
	case n < 0 || n > 255:
		return Colour{}
	case n < 16:
		return basic[n]
	case n < 232:
		level := func(i int) uint8 {
			if i == 0 {
				return 0
			}
			return uint8(55 + 40*i)
		}
		n -= 16
		return Colour{level(n / 36), level(n / 6 % 6), level(n % 6), true}
	}
	grey := uint8(8 + 10*(n-232))
	return Colour{grey, grey, grey, true}
}
