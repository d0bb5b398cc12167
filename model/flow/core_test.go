package flow

import (
	"fmt"
	"math"
	"testing"
	"time"

	"barline/model/unit"
)

const room unit.Kelvin = 294.7

func gasNamed(t testing.TB, name string) Medium {
	t.Helper()
	m, err := Named(name)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func core(t testing.TB, s Spec) *Core {
	t.Helper()
	c, err := NewCore(s)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func advance(t testing.TB, c *Core, dt time.Duration, a, b unit.Pascal) {
	t.Helper()
	if err := c.Advance(dt, a, b, c.state.Temperature); err != nil {
		t.Fatal(err)
	}
}

// crossings runs a jump of the ends and returns the times, in units of
// 8ηL²/(a²·ref), at which the far end (sealed) or the middle passes each level.
func crossings(t *testing.T, cells int, sealed bool, from, to, ref float64, levels []float64) []float64 {
	t.Helper()
	// A bore so wide and a pressure so high that slip is below 1e-4.
	s := Spec{Radius: 2e-3, Length: 7, Gas: gasNamed(t, "argon").Ideal(), Temperature: room, Cells: cells, SealedB: sealed}
	const bar = 8.3e5
	c := core(t, s)
	if err := c.Fill(unit.Pascal(from*bar), unit.Pascal(from*bar), room); err != nil {
		t.Fatal(err)
	}
	advance(t, c, 0, unit.Pascal(to*bar), unit.Pascal(to*bar))
	tau := 8 * s.Gas.Viscosity(room) * 49 / (4e-6 * ref * bar)
	far := s.Length
	if !sealed {
		far, tau = s.Length/2, tau/4
	}
	var times []float64
	was, p, x, dx := 0.0, 0.0, 0.0, 0.004
	was = from
	for len(times) < len(levels) {
		advance(t, c, time.Duration(dx*tau*1e9), unit.Pascal(to*bar), unit.Pascal(to*bar))
		p = float64(c.At(far)) / bar
		for len(times) < len(levels) && (p-levels[len(times)])*(to-from) >= 0 {
			f := (levels[len(times)] - was) / (p - was)
			if to == 0 { // the tail goes as 1/t
				f = (1/levels[len(times)] - 1/was) / (1/p - 1/was)
			}
			times = append(times, x+dx*f)
		}
		was, x = p, x+dx
		if x > 4 {
			dx = 0.05
		}
		if x > 200 {
			t.Fatalf("level %v not reached, at %v", levels[len(times)], p)
		}
	}
	return times
}

// Viscous filling and emptying, ∂P/∂τ = ½∂²(P²)/∂ζ², in units of 8ηL²/(a²p),
// converged by an independent calculation to the digits given. The tail of the
// evacuation is p = 0.89645/(τ+0.788).
func TestViscousTimes(t *testing.T) {
	cases := []struct {
		name           string
		from, to, ref  float64
		levels, expect []float64
	}{
		{"fill from vacuum", 0, 1, 1, []float64{0.5, 0.9, 0.99}, []float64{0.6540, 1.3459, 2.2908}},
		{"step up", 0.5, 1, 1, []float64{0.75, 0.95, 0.99, 0.995}, []float64{0.4746, 1.1520, 1.8095, 2.0911}},
		{"step down", 1, 0.5, 1, []float64{0.75, 0.55, 0.505}, []float64{0.5445, 1.7439, 3.5865}},
		{"evacuate", 1, 0, 1, []float64{0.5, 0.1, 0.01}, []float64{1.0045, 8.176, 88.86}},
	}
	for _, c := range cases {
		for _, sealed := range []bool{true, false} {
			t.Run(fmt.Sprintf("%s sealed=%v", c.name, sealed), func(t *testing.T) {
				got := crossings(t, 128, sealed, c.from, c.to, c.ref, c.levels)
				for i, g := range got {
					tolerance := 4e-4
					if c.to == 0 && c.levels[i] < 0.5 {
						tolerance = 2e-3 // what is left of slip shortens the tail
					}
					if math.Abs(g/c.expect[i]-1) > tolerance {
						t.Errorf("level %v at %.4f, want %.4f", c.levels[i], g, c.expect[i])
					}
				}
			})
		}
	}
}

// throughput returns the steady molar flow from a to b.
func throughput(t *testing.T, s Spec, a, b unit.Pascal) float64 {
	t.Helper()
	c := core(t, s)
	if err := c.Fill(a, b, s.Temperature); err != nil {
		t.Fatal(err)
	}
	advance(t, c, time.Second, a, b)
	st := c.State()
	if math.Abs(st.EnteredA+st.EnteredB) > 1e-9*math.Abs(st.EnteredA) {
		t.Fatalf("steady state gains: %v in at A, %v at B", st.EnteredA, st.EnteredB)
	}
	return st.EnteredA
}

// The limits of the conductance of a long round tube.
func TestConductanceLimits(t *testing.T) {
	const a, l = 17e-6, 0.3
	for _, name := range []string{"helium", "argon", "xenon"} {
		s := Spec{Radius: a, Length: l, Gas: gasNamed(t, name).Ideal(), Temperature: room, Cells: 60}
		rt := GasConstant * float64(room)
		// Knudsen, Ann. Phys. 333, 75 (1909): ṅ = (2πa³/3L)·v̄·Δp/RT.
		v := math.Sqrt(8 * rt / (math.Pi * s.Gas.MolarMass))
		want := 2 * math.Pi * a * a * a / (3 * l) * v * 1e-4 / rt
		if got := throughput(t, s, 1e-4, 0); math.Abs(got/want-1) > 2e-3 {
			t.Errorf("%s molecular: %v mol/s, want %v", name, got, want)
		}
		// Poiseuille with first-order slip, 1 + 4ℓ/a at the mean pressure:
		// ṅ = πa⁴(p₁²−p₂²)/(16ηLRT) · (1 + 4·Kn). Second-order terms of the
		// kinetic form (α·Kn) are the rest.
		pa, pb := 900*unit.Bar, 700*unit.Bar
		kn := rarefied(s.Gas, s.Gas.Viscosity(room), a, room) / 800e5
		eta := s.Gas.Viscosity(room)
		want = math.Pi * a * a * a * a * float64(pa*pa-pb*pb) / (16 * eta * l * rt) * (1 + 4*kn)
		if got := throughput(t, s, pa, pb); math.Abs(got/want-1) > 1e-4 {
			t.Errorf("%s viscous: %v mol/s, want %v", name, got, want)
		}
	}
}

// The steady profile of a viscous gas is linear in p²; At and Profile agree.
func TestSteadyProfile(t *testing.T) {
	s := Spec{Radius: 1e-3, Length: 0.3, Gas: gasNamed(t, "argon").Ideal(), Temperature: room, Cells: 20}
	c := core(t, s)
	pa, pb := 9.3*unit.Bar, 2.385*unit.Bar
	if err := c.Fill(pa, pb, room); err != nil {
		t.Fatal(err)
	}
	profile := c.Profile(make([]unit.Pascal, c.Cells()))
	for i, p := range profile {
		z := (float64(i) + 0.5) / 20
		want := math.Sqrt(float64(pa*pa) + float64(pb*pb-pa*pa)*z)
		if math.Abs(float64(p)/want-1) > 2e-5 {
			t.Errorf("p(%v L) = %v, want %v Pa", z, p, want)
		}
		if got := c.At(unit.Metre(z * 0.3)); math.Abs(float64(got/p)-1) > 1e-12 {
			t.Errorf("At(%v L) = %v, profile has %v", z, got, p)
		}
	}
	if c.At(-1) != pa || c.At(0) != pa || c.At(0.3) != pb || c.At(9) != pb {
		t.Errorf("ends: %v %v, want %v %v", c.At(0), c.At(0.3), pa, pb)
	}
	if lag := c.Lag(); math.Abs(float64(lag)) > 1e-3 {
		t.Errorf("steady core lags by %v Pa", float64(lag))
	}
}

// Mass is conserved to rounding through jumps, ramps and changing temperature.
func TestMassIsConserved(t *testing.T) {
	for _, name := range []string{"argon", "xenon", "helium"} {
		c := core(t, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, name), Temperature: room, Cells: 100})
		most := 0.0
		for i, e := range []struct {
			dt   time.Duration
			a, b unit.Pascal
			t    unit.Kelvin
		}{
			{0, 9e5, 0, 294}, {time.Millisecond, 9e5, 9e5, 294}, {time.Second, 9.1e5, 1e-3, 295.5}, {10 * time.Minute, 3, 9e5, 295},
			{50 * time.Millisecond, 2e5, 8e5, 296}, {time.Hour, 0, 0, 296}, {time.Microsecond, 10e5, 1, 296}, {3 * time.Second, 10e5, 10e5, 290.5},
		} {
			if err := c.Advance(e.dt, e.a, e.b, e.t); err != nil {
				t.Fatalf("%s step %d: %v", name, i, err)
			}
			st := c.State()
			most = max(most, math.Abs(st.EnteredA), math.Abs(st.EnteredB), c.Amount())
			if d := st.EnteredA + st.EnteredB - c.Amount(); math.Abs(d) > 1e-13*most {
				t.Errorf("%s step %d: %v mol entered, %v are there", name, i, st.EnteredA+st.EnteredB, c.Amount())
			}
		}
	}
}

// A smooth transient converges at second order in space and in time.
func TestOrderOfConvergence(t *testing.T) {
	run := func(cells, steps int) float64 {
		c := core(t, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, "argon"), Temperature: room, Cells: cells})
		if err := c.Fill(2e5, 2e5, room); err != nil {
			t.Fatal(err)
		}
		// One step each: the tolerance is out of the way, the order shows.
		const total = 0.2
		for k := range steps {
			f := func(x float64) float64 { return 2e5 + 1e5*x*x }
			x0, x1 := float64(k)/float64(steps), float64(k+1)/float64(steps)
			mid := 0.5 * (f(x0) + f(x1))
			if _, err := c.step(total/float64(steps), 1, mid, f(x1), mid, f(x1)); err != nil {
				t.Fatal(err)
			}
			c.state.A, c.state.B = unit.Pascal(f(x1)), unit.Pascal(f(x1))
		}
		return float64(c.Mean())
	}
	order := func(coarse, middle, fine float64) float64 {
		return math.Log2((coarse - middle) / (middle - fine))
	}
	if o := order(run(16, 128), run(32, 128), run(64, 128)); math.Abs(o-2) > 0.1 {
		t.Errorf("order in space %.3f, want 2", o)
	}
	if o := order(run(32, 64), run(32, 128), run(32, 256)); math.Abs(o-2) > 0.15 {
		t.Errorf("order in time %.3f, want 2", o)
	}
}

// Adaptive steps keep what they promise: one call over a transient agrees with
// many small ones.
func TestLongStepAgreesWithShort(t *testing.T) {
	for _, to := range []unit.Pascal{0, 3, 2.385e5, 10e5} {
		run := func(parts int) float64 {
			c := core(t, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, "argon"), Temperature: room})
			if err := c.Fill(5e5, 5e5, room); err != nil {
				t.Fatal(err)
			}
			advance(t, c, 0, to, to)
			for range parts {
				advance(t, c, 300*time.Millisecond/time.Duration(parts), to, to)
			}
			return float64(c.Mean())
		}
		one, many := run(1), run(300)
		if math.Abs(one-many) > 1e-4*5e5 {
			t.Errorf("5 bar to %v: %v in one step, %v in many", to, one, many)
		}
	}
}

func TestBadInputIsRefused(t *testing.T) {
	good := Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, "xenon"), Temperature: room, Cells: 50}
	nan, inf := math.NaN(), math.Inf(1)
	for name, change := range map[string]func(*Spec){
		"no radius":       func(s *Spec) { s.Radius = 0 },
		"negative radius": func(s *Spec) { s.Radius = -1e-6 },
		"no length":       func(s *Spec) { s.Length = 0 },
		"NaN length":      func(s *Spec) { s.Length = unit.Metre(nan) },
		"infinite length": func(s *Spec) { s.Length = unit.Metre(inf) },
		"no gas":          func(s *Spec) { s.Gas = Medium{} },
		"no temperature":  func(s *Spec) { s.Temperature = 0 },
		"two volumes":     func(s *Spec) { s.Cells = 2 },
		"many volumes":    func(s *Spec) { s.Cells = MaxCells + 1 },
	} {
		s := good
		change(&s)
		if _, err := NewCore(s); err == nil {
			t.Errorf("%s: accepted", name)
		}
	}
	c := core(t, good)
	advance(t, c, time.Second, 2e5, 1e5)
	was := c.State()
	for name, f := range map[string]func() error{
		"back in time":        func() error { return c.Advance(-1, 2e5, 1e5, room) },
		"cell below zero":     func() error { return c.Advance(time.Second, -40, 1e5, room) },
		"NaN pressure":        func() error { return c.Advance(time.Second, 2e5, unit.Pascal(nan), room) },
		"infinite pressure":   func() error { return c.Advance(time.Second, unit.Pascal(inf), 1e5, room) },
		"NaN temperature":     func() error { return c.Advance(time.Second, 2e5, 1e5, unit.Kelvin(nan)) },
		"zero temperature":    func() error { return c.Advance(time.Second, 2e5, 1e5, 0) },
		"liquid xenon":        func() error { return c.Advance(time.Second, 90e5, 1e5, 280) },
		"cold":                func() error { return c.Advance(time.Second, 2e5, 1e5, 40) },
		"fill below zero":     func() error { return c.Fill(-1, 0, room) },
		"restore below zero":  func() error { return c.Restore(State{A: -1, Temperature: room}) },
		"restore finer grid":  func() error { s := was; s.Density[c.n] = 1; return c.Restore(s) },
		"restore NaN density": func() error { s := was; s.Density[3] = nan; return c.Restore(s) },
	} {
		err := f()
		if err == nil {
			t.Errorf("%s: accepted", name)
		}
		if c.State() != was {
			t.Errorf("%s: the state moved", name)
		}
	}
}

// Ends that differ by twelve orders of magnitude, jumps at any rate: no NaN,
// never outside what the ends and the start allow.
func TestExtremesStayBounded(t *testing.T) {
	c := core(t, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, "argon"), Temperature: room, Cells: 100})
	seq := []unit.Pascal{1e6, 1e-6, 0, 3e6, 1, 1e-3, 1e6}
	dts := []time.Duration{1, time.Microsecond, time.Millisecond, 50 * time.Millisecond, time.Second, time.Minute, 24 * time.Hour}
	profile := make([]unit.Pascal, c.Cells())
	high := unit.Pascal(0)
	for i := range 300 {
		a, b := seq[i%len(seq)], seq[(i*3+1)%len(seq)]
		dt := dts[(i*5+i/7)%len(dts)]
		high = max(high, a, b)
		if err := c.Advance(dt, a, b, room); err != nil {
			t.Fatalf("%d: %v over %v to %v, %v", i, err, dt, a, b)
		}
		for _, p := range c.Profile(profile) {
			if !(p >= 0 && p <= high*1.001) {
				t.Fatalf("%d: pressure %v outside 0 to %v", i, float64(p), high)
			}
		}
		if lag := c.Lag(); math.IsNaN(float64(lag)) || !c.settle() {
			t.Fatalf("%d: %v to %v: no steady state, lag %v", i, a, b, float64(lag))
		}
	}
}

func TestStateIsAValue(t *testing.T) {
	s := Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, "argon"), Temperature: room}
	c, d := core(t, s), core(t, s)
	advance(t, c, time.Second, 5e5, 4e5)
	kept := c.State()
	if err := d.Restore(kept); err != nil {
		t.Fatal(err)
	}
	for range 20 {
		advance(t, c, 50*time.Millisecond, 6e5, 6e5)
		advance(t, d, 50*time.Millisecond, 6e5, 6e5)
	}
	if c.State() != d.State() {
		t.Error("two cores with the same state went different ways")
	}
	if kept == c.State() {
		t.Error("a kept state changed")
	}
}
