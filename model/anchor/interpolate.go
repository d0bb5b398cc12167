package anchor

import (
	"sort"

	"barline/model/unit"
)

// most is the number of knots in one direction that an interpolation uses:
// a cubic where there are as many.
const most = 4

// weights fills w and dw with the Lagrange weights, and their derivatives, of
// n knots x for the value at a point.
func weights(x *[most]float64, n int, at float64, w, dw *[most]float64) {
	for i := range n {
		w[i], dw[i] = 1, 0
		for j := range n {
			if j != i {
				dw[i] = (dw[i]*(at-x[j]) + w[i]) / (x[i] - x[j])
				w[i] *= (at - x[j]) / (x[i] - x[j])
			}
		}
	}
}

// value is an interpolated κ with its derivative in the direction of the row.
type value struct{ kappa, slope, omega, conversion, peak, ionised float64 }

// at interpolates along the row; ok is false beyond its knots by more than the
// factor half.
func (r *row) at(density, half float64) (v value, ok bool) {
	n := len(r.knots)
	if !(density >= r.knots[0].density/half && density <= r.knots[n-1].density*half) {
		return v, false
	}
	i := sort.Search(n, func(k int) bool { return r.knots[k].density >= density })
	use := min(n, most)
	first := min(max(i-most/2, 0), n-use)
	var x, w, dw [most]float64
	for k := range use {
		x[k] = r.knots[first+k].density
	}
	weights(&x, use, density, &w, &dw)
	for k := range use {
		q := &r.knots[first+k]
		v.kappa += w[k] * q.kappa
		v.slope += dw[k] * q.kappa
		v.omega += w[k] * q.omega
		v.conversion += w[k] * q.conversion
		v.peak += w[k] * q.peak
		v.ionised += w[k] * q.ionised
	}
	return v, true
}

// at interpolates the branch over density along its rows, then over energy
// across the rows that reach.
func (b *branch) at(density, energy, halfDensity, halfEnergy float64) (p Point, ok bool) {
	rows := b.rows
	i := sort.Search(len(rows), func(k int) bool { return rows[k].energy >= energy })
	// Of the rows nearest to the energy, those that reach the density.
	var x [most]float64
	var v [most]value
	n := 0
	for low, high := i-1, i; n < most && (low >= 0 || high < len(rows)); {
		k := low
		if low < 0 || high < len(rows) && rows[high].energy-energy < energy-rows[low].energy {
			k = high
			high++
		} else {
			low--
		}
		if q, reaches := rows[k].at(density, halfDensity); reaches {
			x[n], v[n] = rows[k].energy, q
			n++
		}
	}
	if n == 0 {
		return p, false
	}
	least, largest := x[0], x[0]
	for _, e := range x[1:n] {
		least, largest = min(least, e), max(largest, e)
	}
	if !(energy >= least-halfEnergy && energy <= largest+halfEnergy) {
		return p, false
	}
	var w, dw [most]float64
	weights(&x, n, energy, &w, &dw)
	for k := range n {
		p.Kappa += w[k] * v[k].kappa
		p.OverDens += w[k] * v[k].slope
		p.OverEnergy += dw[k] * v[k].kappa
		p.Omega += w[k] * v[k].omega
		p.Conversion += w[k] * v[k].conversion
		p.Peak += unit.Metre(w[k] * v[k].peak)
		p.Ionised += w[k] * v[k].ionised
	}
	p.Conversion, p.Ionised = min(max(p.Conversion, 0), 1), min(max(p.Ionised, 0), 1)
	return p, true
}
