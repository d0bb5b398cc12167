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
	n0 := 2 * math.Round(x/(2*rybicki)) // even, so that x ≈ n0·h
	rest := x - n0*rybicki
	// e^{−(rest−nh)²} = e^{−rest²} · (e^{2·rest·h})ⁿ · e^{−n²h²}, n odd.
	up := math.Exp(2 * rest * rybicki)
	down := 1 / up
	up2, down2 := up*up, down*down
	sum := 0.0
	for i, w := range bells {
		n := float64(2*i + 1)
		sum += w * (up/(n0+n) + down/(n0-n))
		up, down = up*up2, down*down2
	}
	return math.Exp(-rest*rest) * sum / math.SqrtPi
}

const rybicki = 0.25 // step h

// bells holds e^{−n²h²} for n = 1, 3, 5, …
var bells = func() (w [13]float64) {
	for i := range w {
		n := float64(2*i + 1)
		w[i] = math.Exp(-n * n * rybicki * rybicki)
	}
	return w
}()
