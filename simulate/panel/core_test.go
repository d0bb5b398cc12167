package panel

import (
	"math"
	"testing"
)

const coreRadius, coreLength = 17e-6, 0.3

func newCore(t testing.TB, cells int, p float64) *Core {
	t.Helper()
	c, err := NewCore(argon, coreRadius, coreLength, cells, State{P: p, T: 294.7})
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func ends(a, b float64) [2]State { return [2]State{{P: a, T: 294.7}, {P: b, T: 294.7}} }

// steady runs the core to a steady state and returns the flow in mol/s.
func steady(t *testing.T, a, b float64) float64 {
	t.Helper()
	c := newCore(t, 32, (a+b)/2)
	var e Exchange
	var err error
	for range 4000 {
		if e, err = c.Advance(0.1, 294.7, ends(a, b), ends(a, b)); err != nil {
			t.Fatal(err)
		}
	}
	near(t, "what goes in against what comes out", -e.Gas[0], e.Gas[1], 1e-9)
	return e.Gas[1] / 0.1
}

// Viscous limit: Poiseuille's ṅ = πa⁴(p₁² − p₂²)/(16 η L R T). At 10 bar Kn is
// 2e-4 and the molecular part adds Z·D_K/(a²p/8η), a thousandth.
func TestPoiseuille(t *testing.T) {
	eta := viscosity(294.7, argon.MolarMass)
	want := math.Pi * math.Pow(coreRadius, 4) * (1e12 - 0.25e12) / (16 * eta * coreLength * R * 294.7)
	near(t, "flow from 10 bar to 5 bar", steady(t, 10e5, 5e5), want, 3e-3)
}

// Molecular limit: Knudsen's long tube, (2πa³/3L) v̄ Δp/RT.
func TestKnudsen(t *testing.T) {
	mean := math.Sqrt(8 * R * 294.7 / (math.Pi * argon.MolarMass))
	want := 2 * math.Pi * math.Pow(coreRadius, 3) / (3 * coreLength) * mean * (2 - 1) / (R * 294.7)
	near(t, "flow from 2 Pa to 1 Pa", steady(t, 2, 1), want, 3e-3)
}

// Viscosity of dilute argon at 300 K, 22.7241 µPa s: check value printed in
// Lemmon & Jacobsen, Int. J. Thermophys. 25, 21 (2004), from memory.
func TestViscosity(t *testing.T) {
	near(t, "viscosity of argon at 300 K", viscosity(300, argon.MolarMass), 22.7241e-6, 1e-5)
}

// Filling from near vacuum through one end: the dead end (here the middle,
// both ends open) stands at half the pressure after τ = 0.6540 and at 0.9
// after 1.3459 in units of 8ηL²/(a²p). The numbers are the converged solution
// of ∂p/∂t = (a²/16η) ∂²p²/∂z².
func TestFillTime(t *testing.T) {
	const p = 50e5 // so viscous that the molecular part is out of sight
	c := newCore(t, 200, 1)
	half := coreLength / 2
	unit := 8 * viscosity(294.7, argon.MolarMass) * half * half / (coreRadius * coreRadius * p)
	dt := unit / 2000
	marks := []struct{ level, want float64 }{{0.5, 0.6540}, {0.9, 1.3459}, {0.99, 2.2908}}
	for i, now := 0, 0.0; i < len(marks); {
		if _, err := c.Advance(dt, 294.7, ends(p, p), ends(p, p)); err != nil {
			t.Fatal(err)
		}
		now += dt
		if c.At(0.5).P >= marks[i].level*p {
			near(t, "time to the level", now/unit, marks[i].want, 6e-3)
			i++
		}
	}
}

func TestCoreKeepsEveryMole(t *testing.T) {
	c, err := NewCore(argon, coreRadius, coreLength, 24, State{P: 2e5, T: 294.7, Air: 0.3})
	if err != nil {
		t.Fatal(err)
	}
	gas0, air0 := c.Moles()
	out := Exchange{}
	for i := range 1000 {
		before := [2]State{{P: 1e5 * float64(1+i%9), T: 300, Air: 0.01}, {P: 4e5, T: 290, Air: 0.2}}
		e, err := c.Advance(0.02, 294.7+float64(i%5), before, before)
		if err != nil {
			t.Fatal(err)
		}
		for k := range 2 {
			out.Gas[0] += e.Gas[k]
			out.Air[0] += e.Air[k]
		}
	}
	gas, airMoles := c.Moles()
	throughput := 1e-9 // mol, what moved is far more
	if d := gas + out.Gas[0] - gas0; math.Abs(d) > 1e-12*throughput {
		t.Errorf("%g mol of gas appeared", d)
	}
	if d := airMoles + out.Air[0] - air0; math.Abs(d) > 1e-12*throughput {
		t.Errorf("%g mol of air appeared", d)
	}
}

func TestCoreSurvivesExtremes(t *testing.T) {
	c := newCore(t, 24, 1e-3)
	for _, p := range []float64{15e5, 1e-3, 1e5, 0, 12e5, 1} {
		for range 200 {
			if _, err := c.Advance(0.5, 294.7, ends(p, 1e-3), ends(p, 1e-3)); err != nil {
				t.Fatalf("at %g Pa: %v", p, err)
			}
			if s := c.At(0.3); math.IsNaN(s.P) || s.P < 0 || math.IsNaN(s.Air) {
				t.Fatalf("at %g Pa the core holds %+v", p, s)
			}
		}
	}
}

func BenchmarkCoreFrame(b *testing.B) {
	c := newCore(b, 24, 9e5)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := c.Advance(0.02, 294.7, ends(9e5, 9.001e5), ends(9e5, 9.001e5)); err != nil {
			b.Fatal(err)
		}
	}
}

// A step from half to full pressure, dead end at 0.75, 0.95 and 0.99 after
// τ = 0.4746, 1.1520 and 1.8095: converged solution of the viscous equation.
// The molecular part, here 4e-4 of the whole, makes ours that much faster.
func TestStepTime(t *testing.T) {
	const p = 50e5
	half := coreLength / 2
	unit := 8 * viscosity(294.7, argon.MolarMass) * half * half / (coreRadius * coreRadius * p)
	times := func(cells int) (at [3]float64) {
		c := newCore(t, cells, p/2)
		dt := unit / 1000
		before, now := c.At(0.5).P/p, 0.0
		for i := 0; i < 3; {
			if _, err := c.Advance(dt, 294.7, ends(p, p), ends(p, p)); err != nil {
				t.Fatal(err)
			}
			now += dt
			level := c.At(0.5).P / p
			for ; i < 3 && level >= [3]float64{0.75, 0.95, 0.99}[i]; i++ {
				at[i] = (now - dt*(level-[3]float64{0.75, 0.95, 0.99}[i])/(level-before)) / unit
			}
			before = level
		}
		return at
	}
	want := [3]float64{0.4746, 1.1520, 1.8095}
	coarse, fine := times(coreCells), times(4*coreCells)
	for i := range want {
		near(t, "time on 96 finite volumes", fine[i], want[i], 2e-3)
		near(t, "time on 24 finite volumes", coarse[i], want[i], 1e-2)
	}
}

const coreCells = 24 // as the bench has
