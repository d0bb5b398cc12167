package tui

import (
	"strings"
	"testing"
	"time"

	"barline/model/limit"
	"barline/model/live"
	"barline/model/unit"
	"barline/tui/tuitest"
)

func TestFareOfAnInstrument(t *testing.T) {
	f := live.Fare{
		Instrument: "gauges", Good: 1204, Bad: 3, Asked: 1207, Silent: 2, Refused: 1,
		RoundTrip: 3100 * time.Microsecond, Slowest: 9 * time.Millisecond, Worst: "cell A: unit 1: no reply within 500ms",
	}
	want := "gauges: 1204 readings good, 3 bad, 2 without an answer, 1 refused, answers in 3.1 ms, slowest 9.0 ms; last: cell A: unit 1: no reply within 500ms"
	if got := fareText(f); got != want {
		t.Errorf("%q, want %q", got, want)
	}
	if got := fareText(live.Fare{Instrument: "spectrometer", Good: 7}); got != "spectrometer: 7 readings good" {
		t.Errorf("%q", got)
	}
	s := tuitest.Calm()
	s.Fares = []live.Fare{f}
	if screen := draw(s, view{page: Log}, 160, 40, Style{}).String(); !strings.Contains(screen, "1204 readings good") {
		t.Error("the Log page does not say how the gauges fare")
	}
}

func TestAirInTheCoreIsTold(t *testing.T) {
	s := tuitest.Calm()
	s.CoreKnown, s.CoreAir = true, 5e-6
	if got := airText(s); got != "" {
		t.Errorf("pure gas: %q", got)
	}
	if s.CoreAir = 0.012; airText(s) != "air 1.2 %" {
		t.Errorf("%q", airText(s))
	}
}

// A valve, an energy and a zero are asked for in words, with the cautions that
// a program would have.
func TestOrdersAreTyped(t *testing.T) {
	s := tuitest.Calm()
	v := view{}
	typed := func(text string) []live.Intent {
		v, _ = view{}.press("v", s)
		for _, r := range text {
			v, _ = v.press(string(r), s)
		}
		var intents []live.Intent
		v, intents = v.press("enter", s)
		return intents
	}
	if got := typed("shut inlet"); len(got) != 1 || got[0] != (live.MoveValve{Valve: limit.Inlet}) {
		t.Errorf("%#v", got)
	}
	if got := typed("energy 1 uJ"); len(got) != 1 || got[0] != (live.Attenuate{Energy: 1 * unit.Microjoule}) {
		t.Errorf("%#v", got)
	}
	if got := typed("open sesame"); len(got) != 0 || !strings.Contains(v.message, "expected inlet") {
		t.Errorf("%#v (%s)", got, v.message)
	}
	if got := typed("open vent"); len(got) != 0 || v.overlay != cautionOverlay {
		t.Errorf("venting without its caution: %#v", got)
	}
}
