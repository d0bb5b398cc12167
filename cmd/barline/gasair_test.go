package main

import (
	"math"
	"testing"
	"time"

	"barline/model/flow"
	"barline/model/unit"
	"barline/simulate/panel"
)

// Residual air along the core against the simulated core, which was written
// apart: through purges of two depths and a fill, within a fifth anywhere. A
// shallow purge leaves a plug of air in the middle of the fibre that the cells
// know nothing of.
func TestAirInTheCoreAgreesWithTheSimulatedCore(t *testing.T) {
	const radius, length, kelvin = 17e-6, 0.3, 293.0
	argon, err := flow.Named("argon")
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name      string
		low, high float64 // bar
		hold      time.Duration
		cycles    int
	}{
		{"deep", 0.02, 3, 60 * time.Second, 3},
		{"shallow", 0.5, 3, 20 * time.Second, 4},
	} {
		spec := flow.Spec{Radius: radius, Length: length, Gas: argon.Ideal(), Temperature: kelvin, Cells: 64}
		m := flow.Mixing{Core: spec}
		air, err := flow.NewResidue(1)
		if err != nil {
			t.Fatal(err)
		}
		ours, err := flow.NewCore(spec)
		if err != nil {
			t.Fatal(err)
		}
		if err := ours.Fill(unit.Atmosphere, unit.Atmosphere, kelvin); err != nil {
			t.Fatal(err)
		}
		start := panel.State{P: 101325, T: kelvin, Air: 1}
		theirs, err := panel.NewCore(panel.Argon(), radius, length, 64, start)
		if err != nil {
			t.Fatal(err)
		}
		ends, p := [2]panel.State{start, start}, start.P
		const step = 50 * time.Millisecond
		move := func(to float64, over time.Duration) {
			from := p
			for at := step; at <= over; at += step {
				p = from + (to-from)*min(1, 2*float64(at)/float64(over))
				before := ours.State()
				if err := ours.Advance(step, unit.Pascal(p), unit.Pascal(p), kelvin); err != nil {
					t.Fatal(err)
				}
				after := ours.State()
				m.Advance(&air, step, &before, &after, false)
				end := panel.State{P: p, T: kelvin, Air: float64(air.Cells)}
				if _, err := theirs.Advance(step.Seconds(), kelvin, ends, [2]panel.State{end, end}); err != nil {
					t.Fatal(err)
				}
				ends = [2]panel.State{end, end}
			}
		}
		check := func(when string) {
			for _, z := range []float64{0.25, 0.5} {
				x, y := float64(m.At(&air, unit.Metre(z*length))), theirs.At(z).Air
				t.Logf("%s, %s, z = %v L: cells %.3g, core %.3g, simulated core %.3g", c.name, when, z, float64(air.Cells), x, y)
				if math.Abs(math.Log(x/y)) > math.Log(1.2) {
					t.Errorf("%s, %s, z = %v L: %.3g of air, the simulated core has %.3g", c.name, when, z, x, y)
				}
			}
		}
		for range c.cycles {
			move(c.low*1e5, c.hold)
			move(c.high*1e5, 30*time.Second)
			check("filled")
		}
		move(9e5, 60*time.Second)
		check("at 9 bar")
	}
}
