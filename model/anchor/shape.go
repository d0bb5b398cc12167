package anchor

import (
	"math"

	"barline/model/unit"
)

// Shape is how strength and width of the strongest lobe follow the pulse:
// relative changes per relative change, from the nodes near a place.
type Shape struct {
	StrengthEnergy, WidthEnergy     float64
	StrengthDuration, WidthDuration float64 // where DurationKnown
	DurationKnown                   bool
}

// Shape compares the nodes of the two energies next to a place; ok is false
// where there are none. Between nodes and across the bench's noise these are
// slopes to tell causes apart by, and no predictions.
func (m *Map) Shape(density float64, energy unit.Joule) (s Shape, ok bool) {
	low, high := m.beside(density, energy)
	if low == nil || high == nil {
		return s, false
	}
	over := math.Log(float64(high.Energy) / float64(low.Energy))
	a, b := low.Lobes[0], high.Lobes[0]
	if !(a.Conversion > 0) || !(b.Conversion > 0) || !(a.Width > 0) || !(b.Width > 0) {
		return s, false
	}
	s.StrengthEnergy = math.Log(b.Conversion/a.Conversion) / over
	s.WidthEnergy = math.Log(float64(b.Width)/float64(a.Width)) / over
	if l, p, known := m.longer, m.plain, m.longer != nil && m.plain != nil; known && len(l.Lobes) > 0 && len(p.Lobes) > 0 {
		u, v := p.Lobes[0], l.Lobes[0]
		if u.Conversion > 0 && v.Conversion > 0 && u.Width > 0 && v.Width > 0 {
			by := math.Log1p(change[Duration])
			s.StrengthDuration = math.Log(v.Conversion/u.Conversion) / by
			s.WidthDuration = math.Log(float64(v.Width)/float64(u.Width)) / by
			s.DurationKnown = true
		}
	}
	return s, true
}

// beside returns the nodes that emit next to a place, one at the energy below
// and one above, both at the density nearest to it that has both.
func (m *Map) beside(density float64, energy unit.Joule) (low, high *Node) {
	best := math.Inf(1)
	for i := range m.nodes {
		a := &m.nodes[i]
		if len(a.Lobes) == 0 || a.Energy > energy {
			continue
		}
		for j := i + 1; j < len(m.nodes); j++ {
			b := &m.nodes[j]
			if b.Density != a.Density || len(b.Lobes) == 0 || b.Energy <= a.Energy {
				continue
			}
			away := math.Abs(math.Log(a.Density/density)) + math.Abs(math.Log(float64(a.Energy*b.Energy/(energy*energy))))/2 + math.Log(float64(b.Energy/a.Energy))
			if away < best {
				best, low, high = away, a, b
			}
			break
		}
	}
	return low, high
}

// stretched returns the run with a longer pulse and the node without.
func (m *Map) stretched(nodes []Node) (longer, plain *Node) {
	for _, n := range nodes {
		if n.Moved != Duration {
			continue
		}
		for i := range m.nodes {
			if p := &m.nodes[i]; p.Density == n.Density && p.Energy == n.Energy {
				return &n, p
			}
		}
	}
	return nil, nil
}
