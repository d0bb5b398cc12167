package simulate

import (
	"fmt"
	"os"
	"strconv"
	"testing"
	"time"

	"barline/model/clock"
)

// Whatever a person and fate do to the bench, its physics goes on, says no
// nonsense, and does the same again from the same seed. With
// BARLINE_TREATMENTS=2000 it is 2000 benches instead of a few.
func TestRandomTreatment(t *testing.T) {
	n := 6
	if text := os.Getenv("BARLINE_TREATMENTS"); text != "" {
		var err error
		if n, err = strconv.Atoi(text); err != nil {
			t.Fatal(err)
		}
	}
	for seed := range n {
		end := treat(t, uint64(seed))
		if seed < 3 {
			if again := treat(t, uint64(seed)); again != end {
				t.Errorf("seed %d ends once as %s, once as %s", seed, end, again)
			}
		}
	}
}

// treat does forty random things to a bench over some minutes and returns its
// state at the end.
func treat(t *testing.T, seed uint64) string {
	t.Helper()
	n := noise(seed ^ 0xBE7C4)
	draw := func(i int64, below int) int { return int(n.uniform(ofGarbage, i) * float64(below)) }
	scenarios := Scenarios()
	b := newBench(t, Options{Seed: seed, Scenario: scenarios[draw(0, len(scenarios))].Name})
	l := b.Lines()
	for i := int64(1); i <= 40; i++ {
		switch draw(10*i, 4) {
		case 0:
			_, _ = l["controller"].Write(fmt.Appendf(nil, "SOUR:PRES:LEV %d.%d\n", draw(10*i+1, 20), draw(10*i+2, 10)))
		case 1:
			order := []string{"SOUR:PRES:MODE HOLD\n", "SOUR:PRES:MODE CONT\n", "OUTP:CELLA OFF\n", "OUTP:CELLA ON\n", "OUTP:CELLB OFF\n", "OUTP:CELLB ON\n"}
			_, _ = l["controller"].Write([]byte(order[draw(10*i+1, len(order))]))
		default:
			k := Kind(draw(10*i+1, int(kindCount)))
			inject(t, b, Fault{Kind: k, Where: k.Places()[draw(10*i+2, len(k.Places()))], Over: draw(10*i+3, 2) == 0})
		}
		if err := b.Advance(b.Now() + time.Duration(draw(10*i+4, 8000))*time.Millisecond); err != nil {
			t.Fatalf("seed %d, act %d: %v; cells %+v, %+v, manifold %+v, line %+v, valves %+v", seed, i, err,
				b.gas.cell(0), b.gas.cell(1), b.gas.manifold(), b.gas.net.State(b.gas.line), b.controller.valves)
		}
		for _, s := range []struct {
			what      string
			value     float64
			low, high float64
		}{
			{"pressure of cell A", b.gas.cell(0).P, 0, 18e5},
			{"pressure of cell B", b.gas.cell(1).P, 0, 18e5},
			{"pressure of the manifold", b.gas.manifold().P, 0, 18e5},
			{"temperature of cell A", b.gas.cell(0).T, 100, 600},
			{"air in cell B", b.gas.cell(1).Air, -1e-6, 1 + 1e-6},
			{"pressure in the core", b.core().P, 0, 18e5},
			{"air in the core", b.core().Air, -1e-6, 1 + 1e-6},
		} {
			if !(s.value >= s.low && s.value <= s.high) {
				t.Fatalf("seed %d, act %d: %s is %g", seed, i, s.what, s.value)
			}
		}
	}
	return fmt.Sprint(b.gas.cell(0), b.gas.cell(1), b.core(), b.energy, b.sensor.read(b.noise, b.frame))
}

// On a clock that runs by itself a line waits for an instrument that talks by
// itself.
func TestLineWaitsOnARunningClock(t *testing.T) {
	b := newBench(t, Options{Seed: 1})
	b.Follow(clock.NewScaled(50))
	l := b.Lines()["spectrometer"]
	buf := make([]byte, 256)
	if n, err := l.Read(buf, 10*time.Second); err != nil || n == 0 {
		t.Errorf("after a wait: %d bytes, %v", n, err)
	}
	if _, err := l.Read(nil, time.Second); err == nil {
		t.Error("a read into nothing is no error")
	}
}
