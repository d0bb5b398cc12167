package flow

import (
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"barline/model/unit"
)

// airTube is a core between cells of residual air.
type airTube struct {
	t    *testing.T
	mix  Mixing
	core *Core
	air  Residue
}

func newAirTube(t *testing.T, p unit.Pascal, air unit.Fraction) *airTube {
	t.Helper()
	argon, err := Named("argon")
	if err != nil {
		t.Fatal(err)
	}
	spec := Spec{Radius: 17 * unit.Micrometre, Length: 0.3, Gas: argon.Ideal(), Temperature: 293, Cells: 64}
	a := &airTube{t: t, mix: Mixing{Core: spec, Cylinder: 5e-6}}
	if a.core, err = NewCore(spec); err != nil {
		t.Fatal(err)
	}
	if err := a.core.Fill(p, p, 293); err != nil {
		t.Fatal(err)
	}
	if a.air, err = NewResidue(air); err != nil {
		t.Fatal(err)
	}
	return a
}

// step moves both cells to p in dt.
func (a *airTube) step(dt time.Duration, p unit.Pascal, room bool) {
	before := a.core.State()
	if err := a.core.Advance(dt, max(p, 0), max(p, 0), 293); err != nil {
		a.t.Fatal(err)
	}
	after := a.core.State()
	after.A, after.B = p, p // what a gauge with an offset says
	a.mix.Advance(&a.air, dt, &before, &after, room)
}

// swing moves the cells along a straight ramp of twenty seconds.
func (a *airTube) swing(from, to unit.Pascal) {
	const steps = 400
	for k := 1; k <= steps; k++ {
		a.step(50*time.Millisecond, from+(to-from)*unit.Pascal(k)/steps, false)
	}
}

// Pressure swings leave in the cells what the purge formula of CEN/TR
// 15281:2022, annex A, says, and more in the core that they fill.
func TestResidueFollowsThePurgeFormula(t *testing.T) {
	low, high := 0.05*unit.Bar, 3*unit.Bar
	a := newAirTube(t, unit.Atmosphere, 1)
	a.swing(unit.Atmosphere, low)
	if a.air.Cells != 1 {
		t.Fatalf("pumping alone leaves %v of air, want all of it", float64(a.air.Cells))
	}
	p := Purge{Start: 1, Cylinder: 5e-6, Low: low, High: high}
	for n := 1; n <= 4; n++ {
		a.swing(low, high)
		if want := p.After(n); math.Abs(float64(a.air.Cells/want)-1) > 0.02 {
			t.Errorf("after %d swings %.4g of air in the cells, want %.4g", n, float64(a.air.Cells), float64(want))
		}
		if middle := a.mix.At(&a.air, 0.15); middle < a.air.Cells*0.999 {
			t.Errorf("after %d swings the core has %.4g of air, less than the cells that fill it, %.4g", n, float64(middle), float64(a.air.Cells))
		}
		a.swing(high, low)
	}
}

// A gauge that flickers at rest for a day changes nothing.
func TestFlickerIsNoPurge(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for _, p := range []unit.Pascal{9 * unit.Bar, 5 * unit.Millibar, 1 * unit.Bar} {
		a := newAirTube(t, p, 0.01)
		for range 24 * 60 {
			a.step(time.Minute, p+unit.Pascal(30*rng.NormFloat64()), false)
		}
		if middle := a.mix.At(&a.air, 0.15); math.Abs(float64(a.air.Cells-0.01)) > 1e-4 || math.Abs(float64(middle-0.01)) > 1e-4 {
			t.Errorf("a day at %v leaves %.5f of air in the cells and %.5f in the core, want 0.01", p, float64(a.air.Cells), float64(middle))
		}
	}
}

// Air in the core at rest evens out with the cells: the first term of the
// series for a slab with both faces held, 4/π·exp(−π²Dt/L²) in the middle
// (Crank, The Mathematics of Diffusion, 2nd ed. 1975, eq. 2.47). D of air in
// argon at 1 bar is 0.2 cm²/s.
func TestAirEvensOutAsASlabDoes(t *testing.T) {
	a := newAirTube(t, 1*unit.Bar, 0)
	for i := range a.air.Core {
		a.air.Core[i] = 0.1
	}
	a.air.mixed = false
	tau := 0.3 * 0.3 / (math.Pi * math.Pi * 0.2e-4)
	for range int(tau) {
		a.step(time.Second, 1*unit.Bar, false)
	}
	want := 0.1 * 4 / math.Pi * math.Exp(-1)
	if got := float64(a.mix.At(&a.air, 0.15)); math.Abs(got/want-1) > 0.01 {
		t.Errorf("after one time constant %.5f, want %.5f", got, want)
	}
}

func TestRoomAirComesIn(t *testing.T) {
	a := newAirTube(t, 0.1*unit.Bar, 0)
	a.step(0, 0.1*unit.Bar, false)
	a.step(time.Second, 1*unit.Bar, true)
	if math.Abs(float64(a.air.Cells)-0.9) > 1e-5 {
		t.Errorf("let up with air from a tenth: %v of air, want 0.9", float64(a.air.Cells))
	}
	for range 10 {
		a.step(time.Second, 1*unit.Bar, false)
	}
	if near, middle := a.mix.At(&a.air, 0.01), a.mix.At(&a.air, 0.15); near < 0.7 || middle > near {
		t.Errorf("the core has %v of air at its end and %v in its middle", float64(near), float64(middle))
	}
}

// Air that is the same everywhere stays so, whatever the gas does: flow and
// density must tell the same story.
func TestEvenAirStaysEven(t *testing.T) {
	a := newAirTube(t, 1*unit.Bar, 0.25)
	a.mix.Cylinder = 0.25
	a.swing(1*unit.Bar, 9*unit.Bar)
	a.swing(9*unit.Bar, 2*unit.Millibar)
	a.swing(2*unit.Millibar, 5*unit.Bar)
	for i, x := range a.air.Core[:64] {
		if math.Abs(x-0.25) > 1e-9 {
			t.Fatalf("volume %d has %v of air, want 0.25", i, x)
		}
	}
}

func TestResidueRefusesNonsense(t *testing.T) {
	for _, air := range []unit.Fraction{-0.1, 1.1, unit.Fraction(math.NaN())} {
		if _, err := NewResidue(air); err == nil {
			t.Errorf("%v was taken", float64(air))
		}
	}
	a := newAirTube(t, 1*unit.Bar, 0.1)
	was, good := a.air, a.core.State()
	for _, change := range []func(*State){
		func(s *State) { s.A = unit.Pascal(math.NaN()) },
		func(s *State) { s.B = unit.Pascal(math.Inf(1)) },
		func(s *State) { s.Temperature = 0 },
	} {
		bad := good
		change(&bad)
		a.mix.Advance(&a.air, time.Second, &good, &bad, false)
	}
	a.mix.Advance(&a.air, -time.Second, &good, &good, false)
	if a.air != was {
		t.Error("nonsense changed the air")
	}
	// Below zero by its offset: the cell is empty as far as can be told.
	a.step(time.Second, -600, false)
	a.step(time.Second, 1*unit.Bar, false)
	if want := 5e-6 + (0.1-5e-6)*1e-3; math.Abs(float64(a.air.Cells)-want) > 1e-9 {
		t.Errorf("filled from below zero: %v, want %v", float64(a.air.Cells), want)
	}
	for i, x := range a.air.Core {
		if !(x >= 0 && x <= 1) {
			t.Fatalf("volume %d has %v of air", i, x)
		}
	}
}

func BenchmarkResidue(b *testing.B) {
	argon, err := Named("argon")
	if err != nil {
		b.Fatal(err)
	}
	spec := Spec{Radius: 17 * unit.Micrometre, Length: 0.3, Gas: argon, Temperature: 293, Cells: 64}
	core, err := NewCore(spec)
	if err != nil {
		b.Fatal(err)
	}
	if err := core.Fill(9*unit.Bar, 9*unit.Bar, 293); err != nil {
		b.Fatal(err)
	}
	m, s := Mixing{Core: spec}, core.State()
	r, err := NewResidue(1e-3)
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		r.mixed = false
		m.Advance(&r, 50*time.Millisecond, &s, &s, false)
	}
}
