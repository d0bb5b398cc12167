package emission

import (
	"math"

	"barline/model/pulse"
)

// shapeNumbers are the constants of a pulse shape.
type shapeNumbers struct {
	peak  float64 // peak power over energy/duration
	width float64 // duration over T₀
}

// Sech²: 2 ln(1+√2)/2 and 2 ln(1+√2). Gauss: 2√(ln 2/π) and 2√(ln 2).
// Source: closed forms, as in G. P. Agrawal, Nonlinear Fiber Optics, 6th ed.
// (2019), sections 3.2 and 5.2.
func numbersOf(s pulse.Shape) shapeNumbers {
	if s == pulse.Gauss {
		return shapeNumbers{peak: 2 * math.Sqrt(math.Ln2/math.Pi), width: 2 * math.Sqrt(math.Ln2)}
	}
	return shapeNumbers{peak: math.Log(1 + math.Sqrt2), width: 2 * math.Log(1+math.Sqrt2)}
}

// launched is the pulse at the fibre input for an energy of one joule.
type launched struct {
	peak     float64 // W/J
	duration float64 // s, full width at half maximum
	t0       float64 // s
}

// launch stretches the transform-limited pulse by its group-delay dispersion.
func launch(p pulse.Pulse) launched {
	n := numbersOf(p.Shape)
	tau := float64(p.Duration)
	drop, wider := stretch(p.Shape, float64(p.GDD)*n.width*n.width/(tau*tau))
	return launched{peak: n.peak / tau * drop, duration: tau * wider, t0: tau * wider / n.width}
}

// far is the dispersion beyond which a sech² pulse has taken the shape of its
// spectrum, within a percent.
const far = 50.0

// stretch returns by how much group-delay dispersion d, in units of T₀², lowers
// the peak power and widens the pulse. Spectra: sech(πωT₀/2), e^{−(ωT₀)²/2}.
func stretch(s pulse.Shape, d float64) (drop, wider float64) {
	if d == 0 {
		return 1, 1
	}
	if s == pulse.Gauss {
		wider = math.Sqrt(1 + d*d)
		return 1 / wider, wider
	}
	if d = math.Abs(d); d > far { // the pulse has the shape of its spectrum
		return math.Pi / (2 * d), 2 * d / math.Pi
	}
	power := func(t float64) float64 {
		// Field at time t (in T₀), both halves of the symmetric spectrum.
		const top = 14.0                    // sech(22) is 1e-10
		steps := 400 + int(math.Ceil(24*d)) // a few for each turn of the phase
		var re, im float64
		for i := range steps + 1 {
			w := top * float64(i) / float64(steps)
			a := math.Cos(w*t) / math.Cosh(math.Pi*w/2)
			if i == 0 || i == steps {
				a /= 2
			}
			sin, cos := math.Sincos(d * w * w / 2)
			re, im = re+a*cos, im+a*sin
		}
		whole := float64(steps) / top // ∫ sech(πω/2) dω from 0 on is 1
		return (re*re + im*im) / (whole * whole)
	}
	drop = power(0)
	half := math.Log(1 + math.Sqrt2) // of the unstretched pulse, T₀
	lo, hi := 0.3*half, half*(2+4*d)
	for range 32 {
		mid := 0.5 * (lo + hi)
		if power(mid) > drop/2 {
			lo = mid
		} else {
			hi = mid
		}
	}
	return drop, lo / half
}
