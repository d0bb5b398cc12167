package panel

import (
	"math"
	"testing"
)

func near(t *testing.T, what string, got, want, rel float64) {
	t.Helper()
	if !(math.Abs(got-want) <= rel*math.Abs(want)) {
		t.Errorf("%s is %.8g, want %.8g within %g", what, got, want, rel)
	}
}

func advance(t *testing.T, n *Network, total, step float64) {
	t.Helper()
	for left := total; left > 1e-12; left -= step {
		if err := n.Advance(min(step, left)); err != nil {
			t.Fatal(err)
		}
	}
}

// Critical ratios and choked flow relative to air: ideal nozzle, computed from
// heat ratio and molar mass; ISO 6358-1:2013 uses the same reference state.
func TestNozzle(t *testing.T) {
	near(t, "critical ratio, monatomic", argon.CriticalRatio(), 0.4871, 1e-4)
	near(t, "critical ratio, air", air.CriticalRatio(), 0.5283, 1e-4)
	for _, c := range []struct {
		name string
		mass float64
		want float64
	}{{"helium", 4.002602e-3, 2.85}, {"neon", 20.1797e-3, 1.27}, {"argon", 39.948e-3, 0.90}, {"krypton", 83.798e-3, 0.62}, {"xenon", 131.293e-3, 0.50}} {
		near(t, "flow factor of "+c.name, Gas{c.mass, 5.0 / 3}.FlowFactor(), c.want, 0.01)
	}

	o := NewOrifice(1e-9, argon)
	up := State{P: 10e5, T: 294.7}
	choked := o.Flow(up, State{P: 1, T: 294.7})
	if at := o.Flow(up, State{P: 0.4870 * 10e5, T: 294.7}); at != choked {
		t.Errorf("flow below the critical ratio is %g, choked %g", at, choked)
	}
	if at := o.Flow(up, State{P: 0.52 * 10e5, T: 294.7}); !(at < choked) {
		t.Errorf("flow above the critical ratio is %g, choked %g", at, choked)
	}
	if back := o.Flow(State{P: 1, T: 294.7}, up); back != -choked {
		t.Errorf("backward flow is %g, forward %g", back, choked)
	}
	// The standard's definition: at reference state C·p₁ m³/s of air flow.
	a := NewOrifice(1e-9, argon).Flow(State{ReferencePressure, ReferenceTemperature, 1}, State{0, 300, 1})
	near(t, "choked flow of air", a*R*ReferenceTemperature/ReferencePressure, 1e-9*ReferencePressure, 1e-12)
}

// An evacuated, insulated vessel fills to γT₀ (textbook thermodynamics, for
// example Moran & Shapiro, Fundamentals of Engineering Thermodynamics, section
// 4.12), a partly filled one to γT₀/(1 + (γ−1)p₁/p₂).
func TestAdiabaticFill(t *testing.T) {
	for _, c := range []struct{ from, rel float64 }{{1, 2e-5}, {2.385e5, 1e-6}} {
		n := NewNetwork(argon)
		cell := n.AddVolume(60e-6, State{P: c.from, T: 294.7})
		supply := n.AddReservoir(State{P: 18e5, T: 294.7})
		n.Open(n.AddPassage(supply, cell, NewOrifice(1e-10, argon)), 1)
		advance(t, n, 4, 0.02)
		s := n.State(cell)
		if s.P < 5e5 {
			t.Fatalf("cell reached only %g Pa", s.P)
		}
		near(t, "temperature after the fill", s.T, 5.0/3*294.7/(1+2.0/3*c.from/s.P), c.rel)
	}
}

// A sudden vent of an insulated vessel is isentropic for what stays inside:
// T₂ = T₁ (p₂/p₁)^((γ−1)/γ).
func TestIsentropicVent(t *testing.T) {
	n := NewNetwork(argon)
	cell := n.AddVolume(60e-6, State{P: 10e5, T: 293})
	room := n.AddReservoir(State{P: 101325, T: 293, Air: 1})
	v := n.AddPassage(cell, room, NewOrifice(1.5e-10, argon))
	n.Open(v, 1)
	for n.State(cell).P > 5e5 {
		advance(t, n, 0.01, 0.01)
	}
	s := n.State(cell)
	near(t, "temperature after the vent", s.T, 293*math.Pow(s.P/10e5, 0.4), 2e-6)
}

// Choked flow out of a vessel whose wall holds it at one temperature empties
// it exponentially: dp/dt = −C k √(T₀/T) p₀ (T/T₀) p/V … with T = T₀, τ = V/(C k p₀).
func TestIsothermalDecayIsExponential(t *testing.T) {
	n := NewNetwork(argon)
	const v, c = 60e-6, 1e-12
	cell := n.AddVolume(v, State{P: 8e5, T: ReferenceTemperature})
	wall := n.AddWall(1e9, 0, ReferenceTemperature)
	n.AddContact(cell, wall, 1e4, 0)
	vacuum := n.AddReservoir(State{P: 1, T: ReferenceTemperature})
	n.Open(n.AddPassage(cell, vacuum, NewOrifice(c, argon)), 1)
	tau := v / (c * argon.FlowFactor() * ReferencePressure)
	advance(t, n, tau, 5)
	near(t, "pressure after one time constant", n.State(cell).P, 8e5/math.E, 2e-5)
}

// Moles of each species and energy, over everything, stay as they are.
func TestConservation(t *testing.T) {
	n, _ := stiffPanel()
	gas0, air0, energy0 := totals(n)
	for i := range 500 {
		n.Open(Passage(1), float64(i%7)/6)
		if err := n.Advance(0.02); err != nil {
			t.Fatal(err)
		}
	}
	gas, airMoles, energy := totals(n)
	const rounding = 1e-15 // mol, of some 0.01 mol that moved through 500 solves
	if d := gas - gas0; math.Abs(d) > rounding {
		t.Errorf("%g mol of gas appeared", d)
	}
	if d := airMoles - air0; math.Abs(d) > rounding {
		t.Errorf("%g mol of air appeared", d)
	}
	near(t, "energy", energy, energy0, 1e-12)
}

// stiffPanel is cylinder, line, manifold and cell with a wide valve between
// the last two, a wall, and a leak to the room.
func stiffPanel() (*Network, Node) {
	n := NewNetwork(argon)
	line := n.AddVolume(5e-6, State{P: 18e5, T: 294})
	manifold := n.AddVolume(8e-6, State{P: 3e5, T: 294, Air: 0.1})
	cell := n.AddVolume(60e-6, State{P: 0.4e5, T: 294, Air: 0.02})
	wall := n.AddWall(500, 0.5, 294)
	n.AddContact(cell, wall, 0.03, 0.07)
	supply := n.AddReservoir(State{P: 200e5, T: 294})
	room := n.AddReservoir(State{P: 101325, T: 294, Air: 1})
	n.Open(n.AddPassage(supply, line, Regulator{18e5, 1e-7}), 1)
	n.AddPassage(line, manifold, NewOrifice(8e-11, argon))
	n.Open(n.AddPassage(manifold, cell, NewOrifice(2e-9, argon)), 1)
	n.Open(n.AddPassage(cell, room, NewOrifice(1e-14, argon)), 1)
	return n, cell
}

func totals(n *Network) (gas, airMoles, energy float64) {
	for v := -len(n.reservoirs); v < len(n.volumes); v++ {
		g, a := n.Moles(Node(v))
		gas += g
		airMoles += a
	}
	return gas, airMoles, n.Energy()
}

// The answer may not depend on how often somebody looks.
func TestStepsAgree(t *testing.T) {
	coarse, cell := stiffPanel()
	fine, _ := stiffPanel()
	coarse.Open(1, 0.8)
	fine.Open(1, 0.8)
	advance(t, coarse, 3, 0.5)
	advance(t, fine, 3, 0.001)
	near(t, "pressure", coarse.State(cell).P, fine.State(cell).P, 2e-5)
	near(t, "temperature", coarse.State(cell).T, fine.State(cell).T, 2e-5)
}

func BenchmarkQuietFrame(b *testing.B) {
	n, _ := stiffPanel()
	for range 200 {
		_ = n.Advance(0.02)
	}
	b.ReportAllocs()
	for b.Loop() {
		if err := n.Advance(0.02); err != nil {
			b.Fatal(err)
		}
	}
}

// A vessel without heat exchange that empties through a choked nozzle:
//
//	p/p₀ = (1 + (γ−1)/2 · t/τ)^(−2γ/(γ−1)),  τ = V n₀⁻¹ p₀/(R T₀) / (C k p₀ √(T_ref/T₀))
//
// textbook gas dynamics (for example Thompson, Compressible-Fluid Dynamics
// (1972), section 6.4). With steps of equal length the error of RODAS3 falls
// with their third power.
func TestBlowDownIsOfOrderThree(t *testing.T) {
	const v, c, p0, t0 = 60e-6, 1e-9, 10e5, 294.7
	run := func(steps int) float64 {
		n := NewNetwork(argon)
		cell := n.AddVolume(v, State{P: p0, T: t0})
		n.Open(n.AddPassage(cell, n.AddReservoir(State{P: 1, T: t0}), NewOrifice(c, argon)), 1)
		n.build()
		h := 0.5 / float64(steps)
		for range steps {
			n.upwind()
			n.jacobian(n.y)
			n.rates(n.y, n.ws.f)
			n.step(h)
			copy(n.y, n.ws.yn)
		}
		return n.State(cell).P
	}
	tau := v / (R * t0) / (c * argon.FlowFactor() * ReferencePressure / (R * ReferenceTemperature) * math.Sqrt(ReferenceTemperature/t0))
	want := p0 * math.Pow(1+0.5/tau/3, -5)
	coarse, fine := math.Abs(run(8)-want), math.Abs(run(16)-want)
	if fine > 1e-4*want || coarse/fine < 6 || coarse/fine > 10 {
		t.Errorf("errors of %g Pa and, at half the step, %g Pa of %g Pa: ratio %.2f, want 8", coarse, fine, want, coarse/fine)
	}
}
