package flow

import (
	"math"
	"testing"
)

// The flow of a rarefied gas through a long tube from the linearised
// Boltzmann (BGK) equation with diffuse walls, as the reduced rate
// G(δ) = δ/4·(1+α·Kn)(1+4·Kn/(1+Kn)) over the rarefaction δ = √π/(2·Kn):
// C. Cercignani & F. Sernagiotto, Phys. Fluids 9, 40 (1966), as tabulated by
// F. Sharipov & V. Seleznev, J. Phys. Chem. Ref. Data 27, 657 (1998).
func TestAgainstKineticTheory(t *testing.T) {
	cases := []struct{ delta, rate, tolerance float64 }{
		{1e-9, 8 / (3 * math.Sqrt(math.Pi)), 1e-3}, // Knudsen's limit, exact
		{0.01, 1.4768, 0.01},
		{0.02, 1.4608, 0.01},
		{0.04, 1.4391, 0.01},
		{0.08, 1.4131, 0.01},
		{1, 1.4594, 0.012}, // this row from memory
		// Slip regime, G = δ/4 + σ with σ = 1.016 (same review, section 4).
		{50, 12.5 + 1.016, 0.01},
		{500, 125 + 1.016, 0.001},
	}
	table := potentials()
	for _, c := range cases {
		x := 2 * c.delta / math.Sqrt(math.Pi) // 1/Kn
		_, h := table.potential(x)
		got := h * math.Sqrt(math.Pi) / 8 // δ/4·h/x
		if math.Abs(got/c.rate-1) > c.tolerance {
			t.Errorf("δ = %v: %.4f, want %.4f within %v", c.delta, got, c.rate, c.tolerance)
		}
	}
}

// The table against the formula it stands for and against its own integral.
func TestPotentialTable(t *testing.T) {
	table := potentials()
	exact := func(x float64) float64 { return (x + alpha(x)) * (1 + 4/(1+x)) }
	for x := 1e-7; x < 1e9; x *= 1.37 {
		psi, h := table.potential(x)
		if want := exact(x); math.Abs(h/want-1) > 2e-5 {
			t.Errorf("h(%g) = %g, want %g", x, h, want)
		}
		up, _ := table.potential(x * 1.0001)
		down, _ := table.potential(x / 1.0001)
		if slope := (up - down) / (x*1.0001 - x/1.0001); math.Abs(slope/h-1) > 1e-4 {
			t.Errorf("dΨ/dx(%g) = %g, h is %g", x, slope, h)
		}
		if psi <= 0 {
			t.Errorf("Ψ(%g) = %g", x, psi)
		}
	}
	// Ψ(1) by Simpson's rule in u = s^0.2, where the integrand is smooth.
	const n = 2000
	sum := 0.0
	f := func(u float64) float64 { s := math.Pow(u, 5); return exact(s) * 5 * u * u * u * u }
	for i := range n {
		u := float64(i) / n
		sum += (f(u) + 4*f(u+0.5/n) + f(u+1.0/n)) / (6 * n)
	}
	if psi, _ := table.potential(1); math.Abs(psi/sum-1) > 1e-7 {
		t.Errorf("Ψ(1) = %.10f, want %.10f", psi, sum)
	}
}
