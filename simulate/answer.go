package simulate

import (
	"errors"
	"math"
	"slices"
)

// answer is what full-field runs say of one quantity: over density and energy
// with everything as stated, and how it bends with each input that is moved.
//
//	q(ρ, E, x) = q(ρ, E) + Σ slope(ρ)·x + curve(ρ)·x²
//
// Slope and curve come from a run to either side, at one energy. That they
// change with energy, and how two inputs that are moved together act on each
// other, is left out.
type answer struct {
	plain        surface
	slope, curve [movedCount]line
}

// line is a quantity over density.
type line struct{ density, value []float64 }

// at returns the quantity at a density; beyond its ends it stays.
func (l line) at(density float64) float64 {
	i, u := place(l.density, density)
	var v [4]float64
	for k := range v {
		v[k] = l.value[min(max(i-1+k, 0), len(l.value)-1)]
	}
	return hermite(l.density, i, v, u)
}

// newAnswer reads the quantity off the runs. A run that does not know it gives
// NaN; bound says between what it may go on from there, see newSurface.
func newAnswer(runs []run, bound [2]float64, of func(run) float64) (answer, error) {
	var a answer
	var err error
	var plain []knot
	for _, r := range runs {
		if r.moved == asStated {
			plain = append(plain, knot{r.density, r.energy, of(r)})
		}
	}
	if a.plain, err = newSurface(plain, bound); err != nil {
		return a, err
	}
	for m := duration; m < movedCount; m++ {
		for _, up := range runs {
			if up.moved != m || up.by < 0 {
				continue
			}
			down := slices.IndexFunc(runs, func(r run) bool {
				return r.moved == m && r.by == -up.by && r.density == up.density && r.energy == up.energy
			})
			if down < 0 {
				return a, errors.New("a stored run with a moved input has none on the other side")
			}
			high, low, middle := of(up), of(runs[down]), a.plain.at(up.density, up.energy)
			slope, curve := (high-low)/(2*up.by), (high+low-2*middle)/(2*up.by*up.by)
			if math.IsNaN(slope + curve) {
				return a, errors.New("a stored run with a moved input does not emit")
			}
			a.slope[m].density = append(a.slope[m].density, up.density)
			a.slope[m].value = append(a.slope[m].value, slope)
			a.curve[m].value = append(a.curve[m].value, curve)
		}
		if d := a.slope[m].density; len(d) < 3 || !slices.IsSorted(d) {
			return a, errors.New("stored runs with a moved input do not ascend in density")
		}
		a.curve[m].density = a.slope[m].density
	}
	return a, nil
}

// at returns the quantity at a density, an energy, and inputs moved by x.
func (a *answer) at(density, energy float64, x *[movedCount]float64) float64 {
	q := a.plain.at(density, energy)
	for m := duration; m < movedCount; m++ {
		if x[m] != 0 {
			q += x[m] * (a.slope[m].at(density) + x[m]*a.curve[m].at(density))
		}
	}
	return q
}
