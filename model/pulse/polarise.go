package pulse

import "math"

// polarisation turns the field at one point of the fibre into the nonlinear
// polarisation, instant by instant in one pass.
type polarisation struct {
	field  []float64 // V/m
	p      []float64 // C/m², overwritten
	drive  []float64 // (e²/m) nₑE, times unit²
	taking []float64 // current that takes the ionisation energy, times unit
	step   float64   // s
	unit   float64   // 1/24 of it
	window []float64 // soft ends of time for the plasma's part

	kerr      float64 // ε₀χ⁽³⁾ in C m/V³ at relative density 1
	area      float64 // m²
	atoms     []ionising
	threshold float64 // V/m; in weaker fields nothing ionises

	peak    float64 // largest |E| in V/m of the last field
	ionised float64 // share of the atoms ionised behind it
	work    float64 // energy in J that it gives to the plasma per metre
}

// ionising is one kind of atom and how far it is ionised at the instant.
type ionising struct {
	Atoms
	neutral float64 // share of the atoms not ionised
	last    float64 // rate of the instant before, 1/s
}

func newPolarisation(g Grid, m *Medium) polarisation {
	w := polarisation{
		field: make([]float64, g.Points), p: make([]float64, g.Points),
		drive: make([]float64, g.Points), taking: make([]float64, g.Points),
		step: float64(g.Step), unit: float64(g.Step) / 24, window: softEnds(g.Points, timeEdge),
		kerr: vacuumPermit * m.Chi3, area: m.Area, threshold: math.Inf(1),
	}
	for _, a := range m.Atoms {
		w.atoms = append(w.atoms, ionising{Atoms: a})
		w.threshold = min(w.threshold, a.Rate.low)
	}
	return w
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
	if w.peak > w.threshold {
		from := w.ionise(r)
		w.integrate(from)
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

// ionise fills drive and taking with the two parts of the plasma current
//
//	J = (e²/m) ∫ nₑE dt + Σ I n (1−η) W/E
//
// of Geissler et al., Phys. Rev. Lett. 83, 2930 (1999), the first before its
// integration, and returns the first instant at which anything ionises, but
// for the first two of all.
func (w *polarisation) ionise(r float64) (from int) {
	const accel = elementaryCharge * elementaryCharge / electronMass
	for i := range w.atoms {
		w.atoms[i].neutral, w.atoms[i].last = 1, 0
	}
	field, threshold := w.field, w.threshold
	from = 2 // which leaves room for the terms at the end of integrate's sums
	for from < len(field) && math.Abs(field[from]) <= threshold {
		from++
	}
	clear(w.taking[from-1:])
	drive, taking := w.drive[from:], w.taking[from:]
	first, second := r*accel*w.unit*w.unit, r*w.unit
	free := 0.0
	ionises := false
	for j, e := range field[from:] {
		if strength := math.Abs(e); strength > threshold || ionises {
			ionises = strength > threshold
			electrons, power := w.free(strength)
			free = first * electrons
			if power > 0 {
				taking[j] = second * power / e
			}
		}
		drive[j] = free * e
	}
	w.tally()
	return from
}

// integrate adds the windowed time integral of the current from an instant on,
// so that Kerr response and plasma share one transform. Without the window it
// would not return to zero and would wrap round the ends of time.
//
// Trapezoids would underrate the plasma by 0.6 % at the pump and by 20 % at
// 180 nm; with a term at the end they are of fourth order and shift no phase:
//
//	∫ f dt up to t_j ≈ step · (Σ (f_{i−1} + f_i)/2 − (f_{j+1} − f_{j−1})/24)
//
// (Euler–Maclaurin: Abramowitz & Stegun, 25.4.7). That looks one instant ahead,
// the second integral one more: what is written belongs to two instants ago.
// The current is held in units that save a product in each term.
func (w *polarisation) integrate(from int) {
	drive := w.drive[from:]
	taking := w.taking[from-1:][:len(drive)]
	p, window, before := w.p[from-2:][:len(drive)], w.window[from-2:][:len(drive)], w.field[from-1:][:len(drive)]
	var drive0, drive1 float64 // at j−2 and j−1
	var flow0, flow1 float64   // all current at j−3 and j−2
	var current, moment, work float64
	for i, drive2 := range drive {
		current += 12 * (drive0 + drive1)
		flow2 := current + (drive0 - drive2) + taking[i]
		drive0, drive1 = drive1, drive2
		moment += 12 * (flow0 + flow1)
		p[i] += window[i] * (moment + (flow0 - flow2))
		flow0, flow1 = flow1, flow2
		work += before[i] * flow2
	}
	w.work = work / w.unit * w.step * w.area
}

// free moves all atoms on by one instant to a field of the given strength.
// It returns, at relative density 1, the electrons per m³ and the power in
// W/m³ that freeing more of them takes.
func (w *polarisation) free(strength float64) (electrons, power float64) {
	for i := range w.atoms {
		a := &w.atoms[i]
		var now ratePair
		if strength > a.Rate.low {
			now = a.Rate.at(strength)
		}
		a.neutral *= decay(w.step / 2 * (a.last + now.electrons))
		a.last = now.electrons
		electrons += a.Density * (1 - a.neutral)
		power += a.Potential * a.Density * a.neutral * now.loss
	}
	return electrons, power
}

// tally counts the share of all atoms that is ionised.
func (w *polarisation) tally() {
	var free, all float64
	for _, a := range w.atoms {
		free += a.Density * (1 - a.neutral)
		all += a.Density
	}
	if all > 0 {
		w.ionised = free / all
	}
}

// decay returns exp(−x) for x of at least 0, to 1e-13 by its series where x is
// small, as it nearly always is.
func decay(x float64) float64 {
	if x < 0.003 {
		return 1 - x*(1-x/2*(1-x/3*(1-x/4)))
	}
	return math.Exp(-x)
}
