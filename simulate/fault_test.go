package simulate

import (
	"errors"
	"math"
	"os"
	"strings"
	"testing"
	"time"

	"barline/device/modbus"
	"barline/model/unit"
)

// Every scenario can be played, and each of its cues is a fault that exists.
func TestScenarios(t *testing.T) {
	seen := map[string]bool{}
	for _, s := range Scenarios() {
		if s.Name == "" || s.About == "" || strings.ContainsAny(s.Name, " \n") || strings.Contains(s.About, "\n") || seen[s.Name] {
			t.Errorf("scenario %q, %q", s.Name, s.About)
		}
		seen[s.Name] = true
		b := newBench(t, Options{Seed: 7, Scenario: s.Name})
		for _, c := range s.cues {
			if err := b.Inject(c.Fault); err != nil {
				t.Errorf("%s: %v", s.Name, err)
			}
		}
		to(t, b, 3*time.Second)
	}
	_, err := New(Options{Scenario: "holiday"})
	if err == nil || !strings.Contains(err.Error(), `"holiday"`) || !strings.Contains(err.Error(), "purge") {
		t.Errorf("an unknown scenario gives %v", err)
	}
}

func TestOptionsRefused(t *testing.T) {
	for _, p := range []float64{-1, 1e9, math.NaN(), math.Inf(1)} {
		if _, err := New(Options{Pressure: unit.Pascal(p)}); err == nil {
			t.Errorf("a start at %g Pa was taken", p)
		}
	}
}

// Every kind of fault has a place and an ordinary size, and ends.
func TestEveryFaultBeginsAndEnds(t *testing.T) {
	for k := range kindCount {
		if len(k.Places()) == 0 {
			t.Errorf("%v has no place", k)
		}
		for _, where := range append(k.Places(), "") {
			b := newBench(t, Options{Seed: 1})
			for _, f := range []Fault{{Kind: k, Where: where}, {Kind: k, Where: where, Over: true}} {
				if err := b.Inject(f); err != nil {
					t.Errorf("%v: %v", k, err)
				}
				to(t, b, b.Now()+time.Second)
			}
		}
	}
	b := newBench(t, Options{})
	for _, f := range []Fault{{Kind: kindCount}, {Kind: Leak, Where: "moon"}, {Kind: Sag, Size: math.NaN()}, {Kind: Air, Size: math.Inf(1)}} {
		if err := b.Inject(f); err == nil {
			t.Errorf("%+v was taken", f)
		}
	}
}

func inject(t *testing.T, b *Bench, f Fault) {
	t.Helper()
	if err := b.Inject(f); err != nil {
		t.Fatal(err)
	}
}

func TestDeadTransducer(t *testing.T) {
	b := newBench(t, Options{Seed: 1})
	l := b.Lines()["gauges"]
	frame, err := modbus.AppendRequestRTU(nil, modbus.Request{Unit: 1, Function: modbus.ReadInput, Count: 2})
	if err != nil {
		t.Fatal(err)
	}
	inject(t, b, Fault{Kind: Dead})
	if out := ask(t, l, frame); len(out) != 0 {
		t.Errorf("a dead transducer says % X", out)
	}
	if p := register(t, l, 2, modbus.ReadInput, 0, modbus.ABCD); math.Abs(p-1.1) > 0.05 {
		t.Errorf("its neighbour says %g bar", p)
	}
	inject(t, b, Fault{Kind: Dead, Over: true})
	if out := ask(t, l, frame); len(out) != 9 {
		t.Errorf("alive again it says % X", out)
	}
}

func TestUnplugged(t *testing.T) {
	b := newBench(t, Options{Seed: 1})
	l := b.Lines()
	inject(t, b, Fault{Kind: Unplugged, Where: "spectrometer"})
	if _, err := l["spectrometer"].Read(make([]byte, 9), 0); !errors.Is(err, ErrUnplugged) {
		t.Errorf("a pulled cable reads with %v", err)
	}
	if _, err := l["spectrometer"].Write([]byte("x")); !errors.Is(err, ErrUnplugged) {
		t.Errorf("a pulled cable writes with %v", err)
	}
	cellA(t, l)
	to(t, b, time.Minute)
	inject(t, b, Fault{Kind: Unplugged, Where: "spectrometer", Over: true})
	if said := drain(t, l["spectrometer"]); len(said) != 0 {
		t.Errorf("what was said into the void came back: %q", said)
	}
	to(t, b, time.Minute+time.Second)
	if said := drain(t, l["spectrometer"]); len(said) == 0 {
		t.Error("plugged in again the spectrometer says nothing")
	}
}

func TestClosedLine(t *testing.T) {
	l := newBench(t, Options{}).Lines()["gauges"]
	if err := l.Close(); err != nil {
		t.Fatal(err)
	}
	if _, err := l.Read(make([]byte, 9), 0); !errors.Is(err, os.ErrClosed) {
		t.Errorf("a closed line reads with %v", err)
	}
	if _, err := l.Write([]byte{1}); !errors.Is(err, os.ErrClosed) {
		t.Errorf("a closed line writes with %v", err)
	}
}

// About the asked share of replies is damaged, and the codec refuses each.
func TestGarbage(t *testing.T) {
	b := newBench(t, Options{Seed: 1})
	l := b.Lines()["gauges"]
	inject(t, b, Fault{Kind: Garbage, Size: 0.2})
	request := modbus.Request{Unit: 1, Function: modbus.ReadInput, Count: 2}
	frame, err := modbus.AppendRequestRTU(nil, request)
	if err != nil {
		t.Fatal(err)
	}
	const n = 1000
	damaged := 0
	for range n {
		if _, err := modbus.DecodeReplyRTU(ask(t, l, frame)); err != nil {
			damaged++
		}
	}
	// Binomial: 200 ± 13 (one standard deviation).
	if damaged < 150 || damaged > 250 {
		t.Errorf("%d of %d replies were damaged, want about 200", damaged, n)
	}
}

// The zero of a gauge creeps by 1000 mbar an hour, and the other one's does not.
func TestCreepingZero(t *testing.T) {
	b := newBench(t, Options{Seed: 1, Scenario: "quiet"})
	inject(t, b, Fault{Kind: Zero, Where: "cell B", Size: 1000})
	l := b.Lines()
	second := func() float64 { return register(t, l["gauges"], 2, modbus.ReadInput, 0, modbus.ABCD) }
	a, bb := cellA(t, l), second()
	to(t, b, 36*time.Second)
	if d := (second() - bb) - (cellA(t, l) - a); math.Abs(d-0.010) > 0.002 {
		t.Errorf("in 36 s the gauges moved apart by %g bar, want 0.010 bar", d)
	}
}

func TestSagAndShutter(t *testing.T) {
	b := newBench(t, Options{Seed: 1, Scenario: "quiet"})
	to(t, b, time.Second)
	before := b.energy
	inject(t, b, Fault{Kind: Sag, Size: 6})
	to(t, b, time.Minute)
	if ratio := b.energy / before; math.Abs(ratio-0.9) > 0.02 {
		t.Errorf("a sag of 600 %% an hour left %g of the energy after a minute, want 0.90", ratio)
	}
	inject(t, b, Fault{Kind: Shutter})
	l := b.Lines()["spectrometer"]
	drain(t, l)
	to(t, b, time.Minute+time.Second)
	lines := 0
	for line := range splitLines(drain(t, l)) {
		if lines++; !strings.HasPrefix(string(line), "EM --- nm W --- nm S --- % P ") {
			t.Errorf("behind the shutter: %q", line)
		}
	}
	if lines != 5 {
		t.Errorf("%d lines in a second, want 5", lines)
	}
}

func TestWarmRoom(t *testing.T) {
	b := newBench(t, Options{Seed: 1, Scenario: "quiet"})
	inject(t, b, Fault{Kind: Warm, Size: 60})
	to(t, b, 5*time.Minute)
	fibre := register(t, b.Lines()["gauges"], 3, modbus.ReadHolding, 16, modbus.CDAB)
	// The room has 5 K more; a first-order lag of 200 s is behind the ramp by
	// (1 − exp(−300/200))·200 s of it, 2.6 K.
	if math.Abs(fibre-22-2.4) > 0.3 {
		t.Errorf("after five minutes at a kelvin a minute the fibre has %g °C", fibre)
	}
}

// Below the threshold the spectrometer finds light and no emission.
func TestThreshold(t *testing.T) {
	b := newBench(t, Options{Seed: 1, Scenario: "fill"})
	to(t, b, time.Second)
	for line := range splitLines(drain(t, b.Lines()["spectrometer"])) {
		if s := string(line); !strings.HasPrefix(s, "EM --- nm W --- nm S 0.") {
			t.Errorf("at 1.1 bar: %q", s)
		}
	}
}

func TestParseTimed(t *testing.T) {
	for _, c := range []struct {
		text string
		want Timed
	}{
		{"60s leak", Timed{time.Minute, Fault{Kind: Leak, Where: "cell B"}}},
		{"1m30s leak cell A 0.2", Timed{90 * time.Second, Fault{Kind: Leak, Where: "cell A", Size: 0.2}}},
		{" 2m  leak  cell A  over ", Timed{2 * time.Minute, Fault{Kind: Leak, Where: "cell A", Over: true}}},
		{"0s garbage 0.5", Timed{0, Fault{Kind: Garbage, Where: "gauges", Size: 0.5}}},
		{"5s shutter over", Timed{5 * time.Second, Fault{Kind: Shutter, Where: "laser", Over: true}}},
	} {
		got, err := ParseTimed(c.text)
		if err != nil || got != c.want {
			t.Errorf("%q is %+v, %v; want %+v", c.text, got, err, c.want)
		}
	}
	for text, says := range map[string]string{
		"":                  "60s leak",
		"leak":              "60s leak",
		"60s":               "60s leak",
		"-1s leak":          "above zero",
		"60 leak":           `"60"`,
		"60s flood":         "leak, air",
		"60s leak moon":     "cell B, cell A, manifold",
		"60s leak NaN":      "NaN",
		"60s leak over 0.2": "cell B",
		"60s leak 1 2":      "cell B",
	} {
		if got, err := ParseTimed(text); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%q is %+v, %v; want an error that says %q", text, got, err, says)
		}
	}
}

// Faults of the options come at their times, whatever their order.
func TestTimedFaults(t *testing.T) {
	b := newBench(t, Options{Seed: 1, Scenario: "shutter", Faults: []Timed{
		{4 * time.Second, Fault{Kind: Shutter, Over: true}},
		{2 * time.Second, Fault{Kind: Shutter}},
	}})
	for _, c := range []struct {
		at   time.Duration
		shut bool
	}{{time.Second, false}, {3 * time.Second, true}, {5 * time.Second, false}, {61 * time.Second, true}} {
		to(t, b, c.at)
		if b.faults.shutter != c.shut {
			t.Errorf("at %v the shutter is shut: %v", c.at, b.faults.shutter)
		}
	}
	if _, err := New(Options{Faults: []Timed{{0, Fault{Kind: Leak, Where: "moon"}}}}); err == nil {
		t.Error("a leak on the moon was taken")
	}
}
