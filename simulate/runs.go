package simulate

import (
	_ "embed"
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
)

// runsText is what full-field propagation finds for the stated bench on a grid
// of pressure and pulse energy: density, the place of compression, and the
// emission's centroid, width and share of the light, zero where there is none.
// TestWriteRuns computes it anew.
//
//go:embed runs.csv
var runsText string

// run is one of the stored runs. Where nothing was emitted centroid is 0.
type run struct {
	pressure, energy float64 // Pa, J
	density          float64 // mol/m³
	compression      float64 // m from the input
	centroid, width  float64 // m
	conversion       float64
}

func readRuns() ([]run, error) {
	lines := strings.Split(strings.TrimSpace(runsText), "\n")
	runs := make([]run, 0, len(lines))
	for i, line := range lines[1:] {
		var v [7]float64
		fields := strings.Split(line, ",")
		if len(fields) != len(v) {
			return nil, fmt.Errorf("stored run %d has %d fields, expected %d", i+1, len(fields), len(v))
		}
		for k, f := range fields {
			var err error
			if v[k], err = strconv.ParseFloat(f, 64); err != nil {
				return nil, fmt.Errorf("stored run %d: %w", i+1, err)
			}
		}
		runs = append(runs, run{v[0] * bar, v[1] * 1e-6, v[2], v[3] * 1e-3, v[4] * 1e-9, v[5] * 1e-9, v[6]})
	}
	return runs, nil
}

// surface is a quantity over density and pulse energy, on a grid of both.
type surface struct {
	density, energy []float64 // ascending
	value           []float64 // rows of one density
}

// newSurface lays a quantity of the runs out on their grid. Where emits is
// asked for, only runs that emit count, and the others are continued from the
// two next higher densities at their energy, within bound.
func newSurface(runs []run, emits bool, bound [2]float64, of func(run) float64) (surface, error) {
	var s surface
	for _, r := range runs {
		if !slices.Contains(s.density, r.density) {
			s.density = append(s.density, r.density)
		}
		if !slices.Contains(s.energy, r.energy) {
			s.energy = append(s.energy, r.energy)
		}
	}
	slices.Sort(s.density)
	slices.Sort(s.energy)
	width := len(s.energy)
	if len(runs) != len(s.density)*width || len(s.density) < 4 || width < 4 {
		return s, errors.New("stored runs are no grid")
	}
	s.value = make([]float64, len(runs))
	for i := range s.value {
		s.value[i] = math.NaN()
	}
	for _, r := range runs {
		if !emits || r.centroid > 0 {
			s.value[slices.Index(s.density, r.density)*width+slices.Index(s.energy, r.energy)] = of(r)
		}
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
