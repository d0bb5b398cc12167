package simulate

import (
	"errors"
	"math"
	"slices"
)

// knot is a quantity at a density and a pulse energy; NaN where the run there
// does not know it.
type knot struct{ density, energy, value float64 }

// surface is a quantity over density and pulse energy, on a grid of both.
type surface struct {
	density, energy []float64 // ascending
	value           []float64 // rows of one density
}

// newSurface lays knots out on their grid. Those without a value are continued
// from the two next higher densities at their energy, within bound.
func newSurface(knots []knot, bound [2]float64) (surface, error) {
	var s surface
	for _, k := range knots {
		if !slices.Contains(s.density, k.density) {
			s.density = append(s.density, k.density)
		}
		if !slices.Contains(s.energy, k.energy) {
			s.energy = append(s.energy, k.energy)
		}
	}
	slices.Sort(s.density)
	slices.Sort(s.energy)
	width := len(s.energy)
	if len(knots) != len(s.density)*width || len(s.density) < 4 || width < 4 {
		return s, errors.New("stored runs are no grid")
	}
	s.value = make([]float64, len(knots))
	for _, k := range knots {
		s.value[slices.Index(s.density, k.density)*width+slices.Index(s.energy, k.energy)] = k.value
	}
	for i := len(s.density) - 3; i >= 0; i-- {
		for k := range width {
			if math.IsNaN(s.value[i*width+k]) {
				step := (s.density[i] - s.density[i+1]) / (s.density[i+2] - s.density[i+1])
				one, two := s.value[(i+1)*width+k], s.value[(i+2)*width+k]
				s.value[i*width+k] = min(max(one+step*(two-one), bound[0]), bound[1])
			}
		}
	}
	if slices.ContainsFunc(s.value, math.IsNaN) {
		return s, errors.New("stored runs do not emit where they should")
	}
	return s, nil
}

// at returns the quantity at a density and an energy, by cubic interpolation
// with continuous slopes. Beyond the grid it stays as at the edge.
func (s surface) at(density, energy float64) float64 {
	row, u := place(s.density, density)
	var across [4]float64
	for j := range across {
		r := min(max(row-1+j, 0), len(s.density)-1)
		values := s.value[r*len(s.energy) : (r+1)*len(s.energy)]
		col, v := place(s.energy, energy)
		var along [4]float64
		for k := range along {
			along[k] = values[min(max(col-1+k, 0), len(values)-1)]
		}
		across[j] = hermite(s.energy, col, along, v)
	}
	return hermite(s.density, row, across, u)
}

// place returns the interval of the knots that x lies in and how far into it,
// 0 to 1.
func place(knots []float64, x float64) (interval int, share float64) {
	last := len(knots) - 2
	for interval < last && x >= knots[interval+1] {
		interval++
	}
	share = (x - knots[interval]) / (knots[interval+1] - knots[interval])
	return interval, min(max(share, 0), 1)
}

// hermite interpolates within an interval of the knots from the values at the
// two knots before and the two behind, slopes by the parabola through three
// neighbours (Fritsch & Carlson, SIAM J. Numer. Anal. 17, 238 (1980), without
// the limiter); at the ends of the knots by the chord.
func hermite(knots []float64, i int, v [4]float64, u float64) float64 {
	h := knots[i+1] - knots[i]
	chord := (v[2] - v[1]) / h
	slope := func(h0, c0, h1, c1 float64) float64 { return (c0*h1 + c1*h0) / (h0 + h1) }
	left, right := chord, chord
	if i > 0 {
		h0 := knots[i] - knots[i-1]
		left = slope(h0, (v[1]-v[0])/h0, h, chord)
	}
	if i+2 < len(knots) {
		h1 := knots[i+2] - knots[i+1]
		right = slope(h, chord, h1, (v[3]-v[2])/h1)
	}
	u2 := u * u
	u3 := u2 * u
	return v[1]*(2*u3-3*u2+1) + v[2]*(3*u2-2*u3) + h*(left*(u3-2*u2+u)+right*(u3-u2))
}
