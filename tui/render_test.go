package tui

import (
	"math"
	"strings"
	"testing"
	"time"

	"github.com/charmbracelet/x/ansi"
	"pgregory.net/rapid"

	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/trend"
	"barline/model/unit"
	"barline/tui/frame"
	"barline/tui/tuitest"
)

func oddNumber(t *rapid.T, name string) float64 {
	return rapid.OneOf(rapid.Float64(), rapid.Float64Range(-1e-3, 2e6),
		rapid.SampledFrom([]float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, math.MaxFloat64})).Draw(t, name)
}

// odd is a snapshot that no bench would give.
func odd(t *rapid.T) *live.Snapshot {
	s := &live.Snapshot{}
	if rapid.Bool().Draw(t, "bench") {
		s.Bench = tuitest.Heron()
		s.Bench.Bench.Name = rapid.String().Draw(t, "name")
	}
	number := func(name string) float64 { return oddNumber(t, name) }
	s.Now.Mono = time.Duration(rapid.Int64().Draw(t, "now"))
	s.Now.UTC = time.Unix(rapid.Int64Range(0, 4e9).Draw(t, "utc"), 0).UTC()
	s.Mode = live.Mode(rapid.IntRange(0, 9).Draw(t, "mode"))
	s.Why, s.Notice = rapid.String().Draw(t, "why"), rapid.String().Draw(t, "notice")
	s.ArmedUntil = time.Duration(rapid.Int64().Draw(t, "armed"))
	s.Target, s.Setpoint, s.Core = unit.Pascal(number("target")), unit.Pascal(number("setpoint")), unit.Pascal(number("core"))
	s.Lag, s.SettleIn = unit.Pascal(number("lag")), time.Duration(rapid.Int64().Draw(t, "settle"))
	s.CoreKnown, s.ResidualKnown, s.Residual = rapid.Bool().Draw(t, "core known"), true, unit.Metre(number("residual"))
	s.Program = live.Progress{Name: "scan", Index: rapid.IntRange(0, 9).Draw(t, "i"), Count: rapid.IntRange(0, 9).Draw(t, "n"), Dwelling: true, DwellLeft: -1}
	for range 3 {
		s.Profile = append(s.Profile, unit.Pascal(number("profile")))
		s.Curve = append(s.Curve, emission.CurvePoint{Pressure: unit.Pascal(number("cp")), Emission: unit.Metre(number("ce")), Sigma: unit.Metre(number("cs"))})
		s.Points = append(s.Points, live.Point{Pressure: unit.Pascal(number("pp")), Emission: unit.Metre(number("pe"))})
		m := number("row")
		s.Rows = append(s.Rows, live.StepData{SetPa: number("set"), CorePa: number("rc"), ResidualM: &m, MeasuredM: &m, SigmaM: number("rs"), Status: rapid.String().Draw(t, "rst")})
		s.Alarms = append(s.Alarms, live.Alarm{Name: rapid.String().Draw(t, "al"), Cause: rapid.String().Draw(t, "ac"), Active: rapid.Bool().Draw(t, "aa")})
		s.Recent = append(s.Recent, live.Line{Kind: live.Kind(rapid.String().Draw(t, "kind")), Text: rapid.String().Draw(t, "line")})
		s.Links = append(s.Links, live.LinkHealth{Instrument: rapid.String().Draw(t, "in"), Reason: rapid.String().Draw(t, "lr")})
		s.Marks = append(s.Marks, live.Mark{At: time.Duration(rapid.Int64().Draw(t, "mark")), Kind: live.KindNote})
	}
	v := &trend.View{Levels: []trend.Level{{Width: time.Second}}}
	for range 5 {
		v.Levels[0].Buckets = append(v.Levels[0].Buckets, trend.Bucket{
			Start: s.Now.Mono - time.Duration(rapid.Int64Range(0, 1e12).Draw(t, "bs")), Min: number("b"), Max: number("b"), Mean: number("b"), Count: 1,
		})
	}
	s.PressureA, s.Expected, s.Residuals = v, v, v
	for role := range s.Latest {
		s.Latest[role] = reading.Reading{
			Channel: "x", Role: reading.Role(role), Value: number("value"), Status: reading.Status(rapid.IntRange(0, 6).Draw(t, "status")),
			Taken: reading.Stamp{Mono: s.Now.Mono - time.Duration(rapid.Int64Range(0, 4e9).Draw(t, "age"))},
		}
		s.Trends[role] = v
	}
	p := &s.Prediction
	p.Valid, p.Emission, p.Sigma, p.SolitonOrder = true, unit.Metre(number("pe")), unit.Metre(number("ps")), number("n")
	p.VerdictCount, p.ZeroDispersionCount = rapid.IntRange(-1, 99).Draw(t, "vc"), rapid.IntRange(-1, 99).Draw(t, "zc")
	p.Verdicts[0] = emission.Verdict{Name: rapid.String().Draw(t, "v"), Value: number("vv"), Bound: number("vb")}
	p.ZeroDispersion[0] = unit.Metre(number("zd"))
	return s
}

// Whatever the snapshot holds, every page fits its screen and shows no NaN.
func TestAnySnapshotFitsAnyScreen(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := odd(t)
		w, h := rapid.IntRange(0, 130).Draw(t, "w"), rapid.IntRange(0, 45).Draw(t, "h")
		v := view{
			page: Page(rapid.IntRange(0, int(pageCount)).Draw(t, "page")), overlay: overlay(rapid.IntRange(0, int(overlayCount)).Draw(t, "overlay")),
			text: rapid.String().Draw(t, "text"), zoom: rapid.IntRange(-5, 20).Draw(t, "zoom"), plain: rapid.Bool().Draw(t, "plain"),
			scroll: rapid.IntRange(0, 9).Draw(t, "scroll"), pick: rapid.IntRange(0, 9).Draw(t, "pick"), cursor: time.Duration(rapid.Int64().Draw(t, "cursor")),
		}
		if rapid.Bool().Draw(t, "frozen") {
			v.frozen, v.back = freeze(s), time.Duration(rapid.Int64Range(0, 1e15).Draw(t, "back"))
		}
		style := Style{Colours: frame.Colours(rapid.IntRange(0, 2).Draw(t, "colours")), ASCII: rapid.Bool().Draw(t, "ascii")}
		screen := draw(s, v, w, h, style).String()
		lines := strings.Split(screen, "\n")
		if h > 0 && len(lines) != h {
			t.Fatalf("%d lines on a screen of %d", len(lines), h)
		}
		for _, l := range lines {
			if got := ansi.StringWidth(l); got > w {
				t.Fatalf("line of %d columns on a screen of %d: %q", got, w, l)
			}
		}
	})
}

// Numbers that are none are never shown as such.
func TestNoNaNOnScreen(t *testing.T) {
	nan := math.NaN()
	s := tuitest.Calm()
	for role := range s.Latest {
		s.Latest[role].Value = nan
	}
	s.Core, s.Setpoint, s.Target, s.Residual, s.Lag = unit.Pascal(nan), unit.Pascal(nan), unit.Pascal(nan), unit.Metre(nan), unit.Pascal(nan)
	s.Prediction.Emission, s.Prediction.Sigma, s.Prediction.SolitonOrder = unit.Metre(nan), unit.Metre(math.Inf(1)), nan
	for page := range pageCount {
		for _, size := range [][2]int{{80, 24}, {200, 60}, {30, 8}} {
			screen := Render(s, page, size[0], size[1], Style{})
			if strings.Contains(screen, "NaN") || strings.Contains(screen, "Inf") {
				t.Errorf("page %v shows what is not a number:\n%s", page, screen)
			}
		}
	}
}

// Where everything is fitted, every value that is shown carries its unit: the
// number of the reading is followed by it wherever it stands.
func TestNoValueWithoutUnit(t *testing.T) {
	for _, size := range [][2]int{{80, 24}, {100, 30}, {120, 40}, {200, 60}} {
		screen := ansi.Strip(Render(tuitest.Panel(), Bench, size[0], size[1], Style{}))
		for value, unit := range map[string]string{
			"9.710": " bar", "9.690": " bar", "9.580": " bar", "22.4": " °C", "1.30": " µJ", "266.9": " nm", "622.7": " nm", "+0.1": " nm", "± 10": " nm",
		} {
			rest := screen
			for {
				i := strings.Index(rest, value)
				if i < 0 {
					break
				}
				rest = rest[i+len(value):]
				if !strings.HasPrefix(rest, unit) {
					t.Errorf("%dx%d: %s stands without%s", size[0], size[1], value, unit)
				}
			}
			if !strings.Contains(screen, value+unit) {
				t.Errorf("%dx%d: %s%s is not shown", size[0], size[1], value, unit)
			}
		}
	}
}

// However small the screen, pressure, alarm and the key of HOLD stay.
func TestSmallScreenKeepsTheEssentials(t *testing.T) {
	for _, size := range [][2]int{{79, 24}, {80, 23}, {30, 5}, {24, 3}} {
		screen := ansi.Strip(Render(tuitest.Stale(), Bench, size[0], size[1], Style{}))
		for _, want := range []string{"9.003 bar", "Tab: HOLD", "▲ cell B silent"} {
			if !strings.Contains(screen, want) {
				t.Errorf("%dx%d does not show %q:\n%s", size[0], size[1], want, screen)
			}
		}
	}
}

// A reading that nobody marked stale is still shown as a failure when it is.
func TestOldReadingIsNeverShownAsLive(t *testing.T) {
	s := tuitest.Calm()
	for _, c := range []struct {
		age  time.Duration
		want string
		not  string
	}{
		{500 * time.Millisecond, "● good", "old"},
		{1500 * time.Millisecond, "● 1.5 s old", "silent"},
		{2500 * time.Millisecond, "✕ silent 3 s", "9.003"},
	} {
		s.Latest[reading.CellAPressure].Taken.Mono = s.Now.Mono - c.age
		got := show(s, reading.CellAPressure)
		text := got.value + " " + got.mark
		if !strings.Contains(text, c.want) || strings.Contains(text, c.not) {
			t.Errorf("after %v: %q, want %q and no %q", c.age, text, c.want, c.not)
		}
	}
}

func TestNumbers(t *testing.T) {
	for _, c := range []struct{ got, want string }{
		{pressureText(9.0034e5), "9.003 bar"}, {pressureText(0), "0.000 bar"}, {pressureText(4520), "45.2 mbar"}, {pressureText(12.5), "0.1 mbar"},
		{emissionText(261.34e-9, 0.8e-9), "261.3 ± 0.8 nm"}, {emissionText(261.34e-9, 10e-9), "261 ± 10 nm"}, {emissionText(261.34e-9, 0), "261.3 nm"},
		{emissionText(261.347e-9, 0.02e-9), "261.35 ± 0.02 nm"}, {emissionText(261.347e-9, 1e-13), "261.35 ± 0.01 nm"}, {emissionText(261.34e-9, 0.3e-9), "261.3 ± 0.3 nm"},
		{signed(-0.04, 1), "0.0"}, {signed(0.05, 1), "+0.1"}, {signed(-0.8, 1), "−0.8"}, {fixed(math.NaN(), 1), "–"},
		{spanText(130 * time.Second), "2 min 10 s"}, {spanText(2 * time.Hour), "2 h 0 min"}, {spanText(50 * time.Hour), "2 d 2 h"}, {spanText(-1), "0 s"},
		{countText(1042), "1 042"}, {countText(7), "7"}, {countText(12345678), "12 345 678"},
	} {
		if c.got != c.want {
			t.Errorf("%q, want %q", c.got, c.want)
		}
	}
}
