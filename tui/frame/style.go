package frame

import (
	"strings"
	"time"
)

// Colours is what the terminal can show.
type Colours uint8

const (
	// NoColours leaves bold and reverse, which are not colours.
	NoColours Colours = iota
	// Sixteen are the colours that the terminal's owner has chosen.
	Sixteen
	// Palette are the 256 fixed colours.
	Palette
)

// Style is how a frame is shown. The zero value is a dark terminal without
// colours that knows Unicode, with times in UTC.
type Style struct {
	Colours Colours
	Light   bool           // the background is light
	ASCII   bool           // nothing beyond ASCII
	Zone    *time.Location // of every time shown; nil is UTC
}

// Location returns the time zone of every time shown.
func (s Style) Location() *time.Location {
	if s.Zone == nil {
		return time.UTC
	}
	return s.Zone
}

// Ink is what a cell means. Its colour never stands alone: a mark or a word
// beside it says the same.
type Ink uint8

const (
	Plain     Ink = iota
	Faint         // labels, units, help
	Rule          // lines that part things
	Strong        // names and headings
	Measured      // what an instrument said
	Predicted     // what the model says
	Band          // uncertainty of what the model says
	Target        // setpoint and target
	Rising        // points measured on the way up
	Falling       // points measured on the way down
	Good          // all is well
	Caution       // look at this
	Alarm         // act now
	Gas           // the gas path
	Hold          // the bench is held; the key that holds it
	Banner        // an alarm across the screen
	Keys          // a key that works
	Cursor        // the place that is read out
	Past          // a record played back
	inkCount
)

// sgr are the parameters of Select Graphic Rendition (ECMA-48, 5th ed., 1991,
// section 8.3.117) of one ink: without colours, with sixteen on either
// background, with the palette on either background.
type sgr struct {
	none, sixteen, sixteenLight, dark, light string
}

// The hues follow Okabe and Ito's set for all kinds of colour vision (Wong,
// Nature Methods 8, 441 (2011), DOI 10.1038/nmeth.1618), each taken to the
// nearest palette colour that keeps its contrast on the background.
var inks = [inkCount]sgr{
	Plain:     {"", "", "", "", ""},
	Faint:     {"", "37", "90", "38;5;247", "38;5;242"}, // 90 is the background of some dark themes
	Rule:      {"", "90", "37", "38;5;240", "38;5;250"},
	Strong:    {"1", "1", "1", "1", "1"},
	Measured:  {"1", "1;97", "1;30", "1;38;5;231", "1;38;5;16"},
	Predicted: {"", "96", "34", "38;5;75", "38;5;25"},
	Band:      {"", "36", "36", "38;5;31", "38;5;110"},
	Target:    {"", "33", "33", "38;5;214", "38;5;130"},
	Rising:    {"", "92", "32", "38;5;43", "38;5;29"},
	Falling:   {"", "95", "35", "38;5;175", "38;5;133"},
	Good:      {"", "32", "32", "38;5;43", "38;5;29"},
	Caution:   {"1", "1;93", "1;33", "1;38;5;227", "1;38;5;130"},
	Alarm:     {"1", "1;91", "1;31", "1;38;5;209", "1;38;5;160"},
	Gas:       {"", "", "", "38;5;252", "38;5;238"},
	Hold:      {"1;7", "1;7", "1;7", "1;38;5;16;48;5;214", "1;38;5;231;48;5;130"},
	Banner:    {"1;7", "1;97;41", "1;97;41", "1;38;5;231;48;5;124", "1;38;5;231;48;5;160"},
	Keys:      {"1", "1", "1", "1;38;5;254", "1;38;5;236"},
	Cursor:    {"7", "7", "7", "7", "7"},
	Past:      {"1;7", "1;30;46", "1;37;44", "1;38;5;16;48;5;110", "1;38;5;231;48;5;25"},
}

func (s Style) codes(ink Ink) string {
	if ink >= inkCount {
		return ""
	}
	c := &inks[ink]
	switch {
	case s.Colours == NoColours:
		return c.none
	case s.Colours == Sixteen && s.Light:
		return c.sixteenLight
	case s.Colours == Sixteen:
		return c.sixteen
	case s.Light:
		return c.light
	}
	return c.dark
}

// spelling is how text beyond ASCII is written where only ASCII can be shown.
var spelling = strings.NewReplacer(
	"°C", "degC", "±", "+/-", "µ", "u", "\u2212", "-", "–", "-", "—", "-", "→", "->", "←", "<-",
	"…", "~", "·", "-", "²", "2", "³", "3", "●", "*", "◆", "#", "◇", "o", "○", "o", "▲", "^", "▼", "v",
	"×", "x", "≤", "<=", "≥", ">=", "↑", "^", "↓", "v", "σ", "sigma", "λ", "lambda", "▶", ">", "■", "#",
	"≈", "~", "△", "!", "✕", "X", "✓", "+", "█", "_",
)

// spell returns s as it is drawn.
func (s Style) spell(text string) string {
	if !s.ASCII || plain(text) {
		return text
	}
	text = spelling.Replace(text)
	if plain(text) {
		return text
	}
	return strings.Map(func(r rune) rune {
		if r < 0x80 {
			return r
		}
		return ascii(r)
	}, text)
}

func plain(s string) bool {
	for i := range len(s) {
		if s[i] >= 0x80 {
			return false
		}
	}
	return true
}

func (s Style) ellipsis() rune {
	if s.ASCII {
		return '~'
	}
	return '…'
}
