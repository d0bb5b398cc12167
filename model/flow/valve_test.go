package flow

import (
	"math"
	"testing"

	"barline/model/unit"
)

func near(t *testing.T, what string, got, want, relative float64) {
	t.Helper()
	if !(math.Abs(got-want) <= relative*math.Abs(want)) {
		t.Errorf("%s = %v, want %v within %g", what, got, want, relative)
	}
}

// Critical ratios of nozzles: textbook values, e.g. A.H. Shapiro, The Dynamics
// and Thermodynamics of Compressible Fluid Flow (1953), p*/p0 = 0.5283 for
// γ = 1.4 and 0.4871 for γ = 5/3 (from memory, printed to four digits).
func TestCriticalRatio(t *testing.T) {
	near(t, "argon", gasNamed(t, "argon").CriticalRatio(), 0.4871, 1e-4)
	near(t, "nitrogen", gasNamed(t, "nitrogen").CriticalRatio(), 0.5283, 1e-4)
}

// Choked mass flow of a nozzle, ISO 9300:2005 (ideal gas, C_d = 1):
// ṁ = A·p₁·C*/√(R_s·T₁), C* = 0.7262 for γ = 5/3 and 0.6847 for γ = 1.4.
func TestChokedNozzle(t *testing.T) {
	const area = 0.02e-6
	v := NewOrifice(area, 1)
	for name, c := range map[string]float64{"helium": 0.7262, "argon": 0.7262, "xenon": 0.7262, "nitrogen": 0.6847, "air": 0.6847} {
		m := gasNamed(t, name)
		want := area * 18e5 * c / math.Sqrt(GasConstant/m.MolarMass*301)
		near(t, name, v.MolarFlow(m, 18e5, 301, 8e5, 295)*m.MolarMass, want, 1e-4)
	}
}

// A valve of C = 1 dm³/(s bar) with air at 20 °C and 7 bar passes 7 dm³/s at
// reference, 420 dm³/min, when choked: the definition in ISO 6358-1:2013.
func TestSonicConductanceOfAir(t *testing.T) {
	air := gasNamed(t, "air")
	v := Valve{Conductance: 1e-8, Critical: 0.3}
	moles := v.MolarFlow(air, 7e5, referenceTemperature, 2e5, 293)
	litresPerMinute := moles * GasConstant * referenceTemperature / referencePressure * 60e3
	near(t, "air", litresPerMinute, 420, 1e-12)
	// Below choking: r = 0.65 is half-way from b to 1: √(1−¼).
	near(t, "subsonic", v.MolarFlow(air, 7e5, referenceTemperature, 0.65*7e5, 293)/moles, math.Sqrt(0.75), 1e-12)
	// Towards r = 1 the flow is continuous and falls to zero; it reverses.
	below := v.MolarFlow(air, 7e5, 293, 7e5*(laminarFrom-1e-9), 293)
	above := v.MolarFlow(air, 7e5, 293, 7e5*(laminarFrom+1e-9), 293)
	near(t, "across 0.999", above, below, 1e-5)
	if f := v.MolarFlow(air, 7e5, 293, 7e5, 293); f != 0 {
		t.Errorf("equal pressures flow %v", f)
	}
	near(t, "reversed", v.MolarFlow(air, 1e5, 293, 7e5, 300), -v.MolarFlow(air, 7e5, 300, 1e5, 293), 1e-15)
	if f := (Valve{}).MolarFlow(air, 7e5, 293, 0, 293); f != 0 {
		t.Errorf("a shut valve flows %v", f)
	}
}

// Relative to air by volume, as data sheets of valves give them to two digits:
// √(29/M) with the heat ratio's 6 %.
func TestValveFactors(t *testing.T) {
	for name, want := range map[string]float64{"helium": 2.85, "neon": 1.27, "argon": 0.90, "krypton": 0.62, "xenon": 0.50} {
		near(t, name, gasNamed(t, name).ValveFactor(), want, 0.006)
	}
}

func TestRegulatorAndNeedle(t *testing.T) {
	m := gasNamed(t, "argon")
	r := Regulator{Supply: 180e5, Set: 18e5, Band: 1e5, Open: Valve{Conductance: 5e-8}}
	needle := Valve{Conductance: 2e-11}
	flow, between := r.Through(needle, m, 294, 3e5)
	// A needle far narrower than the regulator sees nearly the set pressure.
	near(t, "between", float64(between), 18e5, 1e-3)
	near(t, "flow", flow, needle.MolarFlow(m, between, 294, 3e5, 294), 1e-12)
	near(t, "balance", r.flow(m, 294, between), flow, 1e-3)
	if f, _ := r.Through(needle, m, 294, 18e5); f != 0 {
		t.Errorf("at the set pressure %v flows", f)
	}
	// A wide needle starves behind the regulator.
	wide, between := r.Through(Valve{Conductance: 1e-6}, m, 294, 1e5)
	near(t, "starved balance", r.flow(m, 294, between), wide, 1e-6)
	if between > 17.5e5 {
		t.Errorf("regulator holds %v behind a wide needle", between)
	}
}

// Ultimate pressure stands where leak and pump balance: p = p_u + Q/S, the
// textbook check of vacuum practice.
func TestPump(t *testing.T) {
	m := gasNamed(t, "argon")
	u := Pump{Speed: 1e-3, Ultimate: 0.5}
	q := 2e-4 // Pa m³/s
	p := unit.Pascal(0.5 + q/1e-3)
	near(t, "throughput", float64(Throughput(u.MolarFlow(m, p, 294), 294)), q, 1e-9)
	if f := u.MolarFlow(m, 0.4, 294); f != 0 {
		t.Errorf("below its ultimate pressure the pump moves %v", f)
	}
	// Behind a narrow valve the choked valve decides.
	u.Valve = Valve{Conductance: 1e-12}
	near(t, "throttled", u.MolarFlow(m, 1e5, 294), u.Valve.MolarFlow(m, 1e5, 294, 0, 294), 1e-9)
	if f := u.MolarFlow(m, 0, 294); f != 0 {
		t.Errorf("an empty cell gives %v", f)
	}
}
