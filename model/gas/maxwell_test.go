package gas

import (
	"math"
	"testing"
)

// maxwell returns the saturation pressure by the equal-area rule: the pressure
// at which gas and liquid have the same Gibbs energy, by bisection.
func maxwell(t *testing.T, s *Species, temperature float64) float64 {
	t.Helper()
	var f fluid
	f.set(s.equation, temperature)
	slope := func(rho float64) float64 { _, d := f.pressure(rho); return d }
	bisect := func(lo, hi float64, above func(float64) bool) float64 {
		for range 200 {
			mid := 0.5 * (lo + hi)
			if above(mid) {
				hi = mid
			} else {
				lo = mid
			}
		}
		return 0.5 * (lo + hi)
	}
	c := s.equation.rhoRed
	gasEnd := bisect(0, c, func(r float64) bool { return slope(r) < 0 })
	liquidEnd := bisect(c, 3*c, func(r float64) bool { return slope(r) > 0 })
	low, _ := f.pressure(liquidEnd)
	high, _ := f.pressure(gasEnd)
	at := func(rho, p float64) float64 { have, _ := f.pressure(rho); return have - p }
	gibbs := func(rho, p float64) float64 {
		a, _, _ := f.residual(rho)
		return a + math.Log(rho) + p/(rho*f.of.r*f.t)
	}
	return bisect(math.Max(low, 0), high, func(p float64) bool {
		g := bisect(0, gasEnd, func(r float64) bool { return at(r, p) > 0 })
		l := bisect(liquidEnd, 3.5*c, func(r float64) bool { return at(r, p) > 0 })
		return gibbs(g, p) > gibbs(l, p)
	})
}

// The saturation line in the table is that of the equation of state.
func TestBoilingIsTheEqualAreaRule(t *testing.T) {
	s, err := Named("xenon")
	if err != nil {
		t.Fatal(err)
	}
	for _, k := range []float64{252.3, 273.15, 278.15, 286.2, 288.65, 289.5} {
		want := maxwell(t, s, k)
		if got := boilingPressure(s.boundary, k); math.Abs(got/want-1) > 1e-4 {
			t.Errorf("at %g K: %.6g Pa, equal areas %.6g Pa", k, got, want)
		}
	}
}
