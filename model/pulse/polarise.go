package pulse

import "math"

// polarisation turns the field at one point of the fibre into the nonlinear
// polarisation, instant by instant in one pass.
type polarisation struct {
	field  []float64 // V/m
	p      []float64 // C/m², overwritten
	step   float64   // s
	drive  []float64 // (e²/m) nₑE, scratch
	absorb []float64 // current that takes the ionisation energy, scratch
	window []float64 // soft ends of time for the plasma's part

	kerr      float64 // ε₀χ⁽³⁾ in C m/V³ at relative density 1
	rate      *RateTable
	atoms     float64 // 1/m³ at relative density 1
	potential float64 // J
	area      float64 // m²

	peak    float64 // largest |E| in V/m of the last field
	ionised float64 // share of the atoms ionised behind it
	work    float64 // energy in J that it gives to the plasma per metre
}

// softEnds returns a window over n instants that is one inside and falls to
// zero over the given share of either end, as a squared cosine.
func softEnds(n int, share float64) []float64 {
	w := make([]float64, n)
	edge := share * float64(n)
	for i := range w {
		d := min(float64(i)+0.5, float64(n)-0.5-float64(i)) / edge
		w[i] = 1
		if d < 1 {
			s := math.Sin(math.Pi / 2 * d)
			w[i] = s * s
		}
	}
	return w
}

// at computes the polarisation at the relative gas density r.
func (w *polarisation) at(r float64) {
	w.instant(r * w.kerr)
	w.ionised, w.work = 0, 0
	if w.rate != nil && w.peak > w.rate.low {
		w.plasma(r * w.atoms)
	}
}

// instant computes the Kerr response and the peak of the field.
func (w *polarisation) instant(kerr float64) {
	field := w.field
	p := w.p[:len(field)]
	top := 0.0
	for j, e := range field {
		square := e * e
		p[j] = kerr * square * e
		if square > top { // the built-in max costs three times as much
			top = square
		}
	}
	w.peak = math.Sqrt(top)
}

// plasma adds the time integral of the plasma current
//
//	J = (e²/m) ∫ nₑE dt + I n (1−η) W/E
//
// of Geissler et al., Phys. Rev. Lett. 83, 2930 (1999), so that Kerr response
// and plasma share one transform. Unwindowed it would not return to zero and
// would wrap round the ends of time.
func (w *polarisation) plasma(atoms float64) {
	from := w.ionise(atoms)
	w.integrate(from)
}

// ionise fills drive with (e²/m) nₑE and absorb with the current that takes
// the ionisation energy, and returns the first instant at which either may
// differ from zero.
func (w *polarisation) ionise(atoms float64) (from int) {
	const accel = elementaryCharge * elementaryCharge / electronMass
	field, rate := w.field, w.rate
	drive, absorb := w.drive[:len(field)], w.absorb[:len(field)]
	threshold := rate.low
	for from < len(field) && math.Abs(field[from]) <= threshold {
		from++
	}
	half := w.step / 2
	neutral := 1.0 // share of the atoms not ionised
	last := 0.0
	for j := from; j < len(field); j++ {
		e := field[j]
		now, taken := 0.0, 0.0
		if a := math.Abs(e); a > threshold {
			r := rate.at(a)
			now, taken = r.electrons, r.loss
		}
		if x := half * (last + now); x > 0 {
			neutral *= decay(x)
		}
		last = now
		drive[j] = accel * atoms * (1 - neutral) * e
		absorb[j] = 0
		if taken > 0 {
			absorb[j] = w.potential * atoms * neutral * taken / e
		}
	}
	w.ionised = 1 - neutral
	return from
}

// integrate adds the windowed time integral of the current from the given
// instant on. Trapezoids would underrate the plasma by 0.6 % at the pump and
// by 20 % at 180 nm; the centred rule
//
//	∫ f over one step ≈ step/24 · (13 (f₀+f₁) − f₋₁ − f₂)
//
// is of fourth order and shifts no phase (Abramowitz & Stegun, 25.4.1 ff., by
// cubic interpolation).
func (w *polarisation) integrate(from int) {
	n := len(w.field)
	field, p, window := w.field, w.p[:n], w.window[:n]
	drive, absorb := w.drive[:n], w.absorb[:n]
	weight := w.step / 24
	var d0, d1 float64     // drive at j−2 and j−1
	var t0, t1, t2 float64 // current at j−3, j−2 and j−1
	var current, moment, work float64
	for j := from; j < n-1; j++ {
		d2 := drive[j]
		current += weight * (13*(d1+d2) - d0 - drive[j+1])
		d0, d1 = d1, d2
		t3 := current + absorb[j]
		moment += weight * (13*(t1+t2) - t0 - t3)
		t0, t1, t2 = t1, t2, t3
		if j > from {
			p[j-1] += window[j-1] * moment
		}
		work += field[j] * t3
	}
	w.work = work * w.step * w.area
}

// decay returns exp(−x) for x of at least 0, to 1e-13 by its series where x is
// small, as it nearly always is.
func decay(x float64) float64 {
	if x < 0.003 {
		return 1 - x*(1-x/2*(1-x/3*(1-x/4)))
	}
	return math.Exp(-x)
}
