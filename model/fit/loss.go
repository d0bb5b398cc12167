package fit

import (
	"math"
	"slices"
)

// Loss says how much a point weighs that lies far from the model. The zero
// Loss is the square.
type Loss struct{ c float64 }

// Huber is the square up to 1.345 σ and linear beyond: an outlier pulls with
// bounded force, and 95 % of the efficiency remains where all is normal
// (Huber, Ann. Math. Stat. 35, 73 (1964), doi:10.1214/aoms/1177703732; corner
// of Holland & Welsch, Commun. Stat. A 6, 813 (1977), doi:10.1080/03610927708827533).
func Huber() Loss { return Loss{1.345} }

// value returns ρ(r) for a residual in units of σ.
func (l Loss) value(r float64) float64 {
	if a := math.Abs(r); l.c > 0 && a > l.c {
		return l.c * (2*a - l.c)
	}
	return r * r
}

// weight returns ψ(r)/r, by which the square of r is to be weighted.
func (l Loss) weight(r float64) float64 {
	if a := math.Abs(r); l.c > 0 && a > l.c {
		return l.c / a
	}
	return 1
}

// influence returns ψ(r)², scaled to be 1 on average where r is normal
// (Huber's proposal 2, Ann. Math. Stat. 35, 73 (1964), section 11).
func (l Loss) influence(r float64) float64 {
	if l.c == 0 {
		return r * r
	}
	inside := math.Erf(l.c / math.Sqrt2) // share of a normal scatter within the corner
	density := math.Exp(-l.c*l.c/2) / math.Sqrt(2*math.Pi)
	mean := inside - 2*l.c*density + l.c*l.c*(1-inside)
	psi := r * l.weight(r)
	return psi * psi / mean
}

// spread returns the scale of residuals that a few outliers do not move: the
// median of their sizes, which is 0.6745 σ of a normal scatter, corrected for
// the parameters already taken from n points.
func spread(residuals []float64, parameters float64) float64 {
	sizes := make([]float64, len(residuals))
	for i, r := range residuals {
		sizes[i] = math.Abs(r)
	}
	slices.Sort(sizes)
	n := len(sizes)
	median := sizes[n/2]
	if n%2 == 0 {
		median = (sizes[n/2-1] + sizes[n/2]) / 2
	}
	correction := 1.0
	if free := float64(n) - parameters; free >= 1 {
		correction = math.Sqrt(float64(n) / free)
	}
	return median / 0.674489750196082 * correction
}
