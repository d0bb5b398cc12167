package frame

import (
	"strings"
	"testing"

	"github.com/charmbracelet/x/ansi"
	"pgregory.net/rapid"
)

func TestTextIsCutWithAnEllipsis(t *testing.T) {
	for _, c := range []struct {
		text  string
		w     int
		style Style
		want  string
	}{
		{"9.003 bar", 9, Style{}, "9.003 bar"},
		{"9.003 bar", 8, Style{}, "9.003 b…"},
		{"9.003 bar", 8, Style{ASCII: true}, "9.003 b~"},
		{"22.4 °C ± 0.1", 20, Style{ASCII: true}, "22.4 degC +/- 0.1"},
		{"圧力 9", 4, Style{}, "圧…"}, // a wide character is not halved
		{"圧力", 4, Style{}, "圧力"},
		{"圧力", 4, Style{ASCII: true}, "??"},
		{"x", 0, Style{}, ""},
	} {
		f := New(c.w, 1, c.style)
		f.Area().Text(0, 0, c.text, Plain)
		if got := f.String(); got != c.want {
			t.Errorf("%q in %d columns is %q, want %q", c.text, c.w, got, c.want)
		}
	}
}

// What an instrument sends must not reach the terminal as a command.
func TestControlCharactersNeverReachTheTerminal(t *testing.T) {
	f := New(40, 1, Style{})
	f.Area().Text(0, 0, "a\x1b[2J\a\r\n\x9b31mb\u2028c", Plain)
	if got, want := f.String(), "a.[2J...\ufffd31mbc"; got != want {
		t.Errorf("text comes out as %q, want %q", got, want)
	}
}

func TestZeroAreaTakesAnything(t *testing.T) {
	var a Area
	a.Fill('x', Plain)
	a.Set(0, 0, 'x', Plain)
	a.Tint(Hold)
	a.Centre(0, 0, 5, "text", Plain)
	a.Sub(1, 1, 5, 5).Right(9, 0, "text", Plain)
	if x := a.Text(3, 0, "text", Plain); x != 3 || a.Width("text") != 4 || a.At(0, 0).Rune != ' ' {
		t.Errorf("text ends at %d, want where it began", x)
	}
}

func TestInksWithoutColours(t *testing.T) {
	for ink := range inkCount {
		f := New(3, 1, Style{Colours: NoColours})
		f.Area().Text(0, 0, "x", ink)
		for _, part := range strings.Split(f.String(), "\x1b[") {
			code, _, found := strings.Cut(part, "m")
			if !found {
				continue
			}
			switch code {
			case "0", "1", "7", "1;7":
			default:
				t.Errorf("ink %d without colours sends %q", ink, code)
			}
		}
	}
}

// Whatever is written wherever, each line fits, and it all comes out as plain
// ASCII where only that can be shown.
func TestAnyTextAnywhereFits(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		w, h := rapid.IntRange(-1, 30).Draw(t, "w"), rapid.IntRange(-1, 5).Draw(t, "h")
		style := Style{Colours: Colours(rapid.IntRange(0, 2).Draw(t, "colours")), ASCII: rapid.Bool().Draw(t, "ascii"), Light: rapid.Bool().Draw(t, "light")}
		f := New(w, h, style)
		for range rapid.IntRange(1, 6).Draw(t, "n") {
			a := f.Area().Sub(rapid.IntRange(-5, 30).Draw(t, "x"), rapid.IntRange(-2, 5).Draw(t, "y"),
				rapid.IntRange(-2, 30).Draw(t, "sw"), rapid.IntRange(-2, 5).Draw(t, "sh"))
			text, ink := rapid.String().Draw(t, "text"), Ink(rapid.IntRange(0, int(inkCount)+2).Draw(t, "ink"))
			switch rapid.IntRange(0, 3).Draw(t, "how") {
			case 0:
				a.Text(rapid.IntRange(-3, 30).Draw(t, "at"), 0, text, ink)
			case 1:
				a.Right(rapid.IntRange(-3, 40).Draw(t, "at"), 0, text, ink)
			case 2:
				a.Centre(0, 0, a.W, text, ink)
			case 3:
				a.Fill('█', ink)
			}
		}
		out := f.String()
		lines := strings.Split(out, "\n")
		if h > 0 && len(lines) != h {
			t.Fatalf("%d lines, want %d", len(lines), h)
		}
		for _, l := range lines {
			if got := ansi.StringWidth(l); got > max(w, 0) {
				t.Fatalf("%d columns, want at most %d: %q", got, w, l)
			}
			if style.ASCII && strings.ContainsFunc(ansi.Strip(l), func(r rune) bool { return r < ' ' || r > '~' }) {
				t.Fatalf("not ASCII: %q", l)
			}
		}
	})
}

// The 256 colours by their published arithmetic: 16 is black, 231 white, 196
// pure red, 244 mid grey (xterm's 256colres.h).
func TestPaletteColours(t *testing.T) {
	for n, want := range map[int]Colour{
		16: {0, 0, 0, true}, 231: {255, 255, 255, true}, 196: {255, 0, 0, true}, 244: {128, 128, 128, true}, 67: {95, 135, 175, true},
	} {
		if got := paletteColour(n); got != want {
			t.Errorf("colour %d is %v, want %v", n, got, want)
		}
	}
	if l := (Style{Colours: Palette}).Look(Hold); !l.Bold || l.Fore != (Colour{0, 0, 0, true}) || !l.Back.Set {
		t.Errorf("HOLD looks like %+v", l)
	}
}
