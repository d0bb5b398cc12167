package pulse

import (
	"fmt"
	"math"
	"sort"
)

// Profile is the gas density along the fibre relative to a reference density:
// straight lines between the nodes (Z[i], Ratio[i]), Z in metres from the
// input, ascending; constant beyond the ends.
type Profile struct {
	z, ratio       []float64
	first, squared []float64 // ∫ ratio dz and ∫ ratio² dz from z[0] to z[i]
}

// NewProfile copies the nodes. It refuses fewer than two, positions that do
// not ascend, and ratios that are not finite or below zero.
func NewProfile(z, ratio []float64) (*Profile, error) {
	if len(z) < 2 || len(z) != len(ratio) {
		return nil, fmt.Errorf("density profile of %d positions and %d ratios: want the same number, at least 2", len(z), len(ratio))
	}
	p := &Profile{
		z: append([]float64(nil), z...), ratio: append([]float64(nil), ratio...),
		first: make([]float64, len(z)), squared: make([]float64, len(z)),
	}
	for i := range z {
		if !(ratio[i] >= 0 && ratio[i] < 1e6) {
			return nil, fmt.Errorf("density profile: ratio %g at %g m: want a finite one of at least 0", ratio[i], z[i])
		}
		if i == 0 {
			continue
		}
		if !(z[i] > z[i-1]) {
			return nil, fmt.Errorf("density profile: position %g m after %g m: want ascending ones", z[i], z[i-1])
		}
		first, squared := p.within(i-1, z[i])
		p.first[i], p.squared[i] = p.first[i-1]+first, p.squared[i-1]+squared
	}
	return p, nil
}

// At returns the ratio at z.
func (p *Profile) At(z float64) float64 {
	if p == nil {
		return 1
	}
	i := p.segment(z)
	return p.line(i, z)
}

// Most returns the largest ratio.
func (p *Profile) Most() float64 {
	most := 0.0
	for _, r := range p.ratio {
		most = max(most, r)
	}
	return most
}

// Near reports whether two profiles have the same nodes and ratios that differ
// by at most within. Two that are nil are near.
func (p *Profile) Near(q *Profile, within float64) bool {
	if p == nil || q == nil {
		return p == q
	}
	if len(p.z) != len(q.z) {
		return false
	}
	for i := range p.z {
		if p.z[i] != q.z[i] || math.Abs(p.ratio[i]-q.ratio[i]) > within {
			return false
		}
	}
	return true
}

// Integrals returns ∫ ratio dz and ∫ ratio² dz over [from, to].
func (p *Profile) Integrals(from, to float64) (first, squared float64) {
	if p == nil {
		return to - from, to - from
	}
	f1, s1 := p.upTo(to)
	f0, s0 := p.upTo(from)
	return f1 - f0, s1 - s0
}

func (p *Profile) upTo(z float64) (first, squared float64) {
	i := p.segment(z)
	first, squared = p.within(i, z)
	return p.first[i] + first, p.squared[i] + squared
}

// segment returns the index of the last node at or before z, kept inside.
func (p *Profile) segment(z float64) int {
	i := sort.SearchFloat64s(p.z, z) - 1
	return min(max(i, 0), len(p.z)-1)
}

// line returns the ratio at z on segment i.
func (p *Profile) line(i int, z float64) float64 {
	if z <= p.z[0] {
		return p.ratio[0]
	}
	if i == len(p.z)-1 {
		return p.ratio[i]
	}
	t := (z - p.z[i]) / (p.z[i+1] - p.z[i])
	return p.ratio[i] + t*(p.ratio[i+1]-p.ratio[i])
}

// within integrates from node i to z on segment i, in closed form.
func (p *Profile) within(i int, z float64) (first, squared float64) {
	dz := z - p.z[i]
	a, b := p.ratio[i], p.line(i, z)
	return dz * (a + b) / 2, dz * (a*a + a*b + b*b) / 3
}
