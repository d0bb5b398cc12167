package flow

import (
	"testing"

	"barline/model/unit"
)

// Viscosities of dilute gases at 300 K, in µPa s, from sources other than
// those of the correlations: Perry's Chemical Engineers' Handbook, 8th ed.
// (2007), table 2-312 (helium, neon, argon, nitrogen); the ratios of E.F. May,
// R.F. Berg & M.R. Moldover, Int. J. Thermophys. 28, 1085 (2007), to helium
// 19.825 at 298.15 K (from memory: argon 1.13800, nitrogen 0.8976, xenon
// 1.1604); the check values of Lemmon & Jacobsen (2004).
func TestViscosity(t *testing.T) {
	cases := []struct {
		gas       string
		t         unit.Kelvin
		want      float64
		tolerance float64
	}{
		{"helium", 300, 19.952, 0.005},
		{"neon", 300, 31.524, 0.006},
		{"argon", 300, 22.771, 0.003},
		{"nitrogen", 300, 17.800, 0.005},
		{"argon", 298.15, 19.825 * 1.13800, 0.003},
		{"nitrogen", 298.15, 19.825 * 0.8976, 0.003},
		{"xenon", 298.15, 19.825 * 1.1604, 0.01},
		{"argon", 300, 22.7241, 1e-5},
		{"nitrogen", 300, 17.8771, 1e-5},
		{"air", 300, 18.5230, 1e-5},
	}
	for _, c := range cases {
		near(t, c.gas, gasNamed(t, c.gas).Viscosity(c.t)*1e6, c.want, c.tolerance)
	}
}

// Argon at 300 K, 1.6025 kg/m³ at 1 bar and 16.111 at 10 bar: NIST Chemistry
// WebBook, fluid properties (from memory).
func TestDensity(t *testing.T) {
	m := gasNamed(t, "argon")
	for p, want := range map[unit.Pascal]float64{1e5: 1.6025, 10e5: 16.111} {
		rho, err := m.Density(p, 300)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "argon", float64(rho)*m.MolarMass, want, 5e-5)
	}
	// Xenon boils near 48 bar at 280 K (Lemmon & Span 2006); its virial equation has roots of
	// liquid density there that are none of the gas.
	for p := unit.Pascal(50e5); p < 400e5; p += 0.7e5 {
		if rho, err := gasNamed(t, "xenon").Density(p, 280); err == nil {
			t.Errorf("xenon at %v and 280 K is a gas of %v", p, rho)
		}
	}
	if rho, err := m.Density(0, 300); rho != 0 || err != nil {
		t.Errorf("vacuum: %v, %v", rho, err)
	}
}

func TestUnknownGas(t *testing.T) {
	if _, err := Named("phlogiston"); err == nil {
		t.Error("accepted")
	}
}
