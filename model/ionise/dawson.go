package ionise

import "math"

// dawson returns Dawson's integral e^{−x²}∫₀ˣ e^{t²}dt for x ≥ 0, to 1e-14.
//
// Source: sampling series of G. B. Rybicki, Comput. Phys. 3, 85 (1989), with a
// step at which its error is e^{−(π/2h)²} = 1e-17; asymptotic series beyond,
// DLMF 7.12.
func dawson(x float64) float64 {
	if x > 20 {
		v := 1 / (x * x)
		return (1 + v*(0.5+v*(0.75+v*(1.875+v*6.5625)))) / (2 * x)
	}
	if x < 0.03 { // Σ (−2x²)^k x/(2k+1)!!
		v := 2 * x * x
		return x * (1 - v/3*(1-v/5*(1-v/7*(1-v/9))))
	}
	const h = 0.25
	n0 := 2 * math.Round(x/(2*h)) // even, so that x ≈ n0·h
	rest := x - n0*h
	sum := 0.0
	for n := -27.0; n <= 27; n += 2 {
		d := rest - n*h
		sum += math.Exp(-d*d) / (n + n0)
	}
	return sum / math.SqrtPi
}
