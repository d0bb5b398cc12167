package anchor

import (
	"math"
	"sort"

	"barline/model/fibre"
	"barline/model/unit"
)

// anchored is a lobe with the κ that it stands for.
type anchored struct {
	node       int
	kappa      float64 // 1/m
	slope      float64 // ∂Δβ/∂ω there, s/m
	omega      float64 // rad/s
	conversion float64
	peak       float64 // from the centroid, m
	branch     int
}

// knot is one node on a branch.
type knot struct{ density, kappa, omega, conversion, peak, ionised float64 }

// row is the part of a branch at one energy, ascending in density.
type row struct {
	energy float64
	knots  []knot
}

// branch is one lobe followed through the nodes, rows ascending in energy.
type branch struct{ rows []row }

// reach is how far, in wavelength, two lobes of neighbouring nodes may be apart
// after the linear shift and still be the same. It holds for neighbours on the
// lattice; wider spacings allow in proportion.
const reach = 5 * unit.Nanometre

// link joins lobes into branches. nodes ascend in energy and then density.
func (b *Bench) link(nodes []Node) []branch {
	var lobes []anchored
	first := make([]int, len(nodes)+1)
	for i, n := range nodes {
		first[i] = len(lobes)
		m := mismatchOf(b.Guide(n.Density), b.omega)
		for _, l := range n.Lobes {
			omega := fibre.Frequency(l.Centroid)
			if delta, slope, ok := m.at(omega); ok && slope > 0 {
				lobes = append(lobes, anchored{i, delta, slope, omega, l.Conversion, float64(l.Peak - l.Centroid), len(lobes)})
			}
		}
	}
	first[len(nodes)] = len(lobes)
	for i := range nodes {
		for j := i + 1; j < len(nodes); j++ {
			allowed := 0.0
			switch {
			case j == i+1 && neighbours(nodes[i], nodes[j]):
				allowed = float64(reach) * max(1, place(nodes[j].Density)-place(nodes[i].Density))
			case nodes[i].Density == nodes[j].Density && adjacent(nodes, i, j):
				allowed = 2 * float64(reach)
			default:
				continue
			}
			join(lobes, lobes[first[i]:first[i+1]], lobes[first[j]:first[j+1]], allowed)
		}
	}
	return gather(nodes, lobes)
}

// neighbours reports whether two nodes of the same energy are close enough in
// density to interpolate between.
func neighbours(a, b Node) bool {
	return a.Energy == b.Energy && place(b.Density)-place(a.Density) < coarsest+0.5
}

// adjacent reports whether no other node of the same density lies between the
// energies of i and j.
func adjacent(nodes []Node, i, j int) bool {
	for k := i + 1; k < j; k++ {
		if nodes[k].Density == nodes[i].Density && nodes[k].Energy < nodes[j].Energy {
			return false
		}
	}
	return true
}

// join links the lobes of two neighbouring nodes, the closest pairs first, each
// to one other at most.
func join(all, a, b []anchored, allowed float64) {
	type pair struct {
		i, j int
		off  float64
	}
	var pairs []pair
	for i := range a {
		for j := range b {
			shift := math.Abs(a[i].kappa-b[j].kappa) / ((a[i].slope + b[j].slope) / 2) // rad/s
			off := shift * float64(fibre.Wavelength(b[j].omega)) / b[j].omega
			if off <= allowed {
				pairs = append(pairs, pair{i, j, off})
			}
		}
	}
	sort.Slice(pairs, func(x, y int) bool { return pairs[x].off < pairs[y].off })
	usedA, usedB := [MaxBranches]bool{}, [MaxBranches]bool{}
	for _, p := range pairs {
		if usedA[p.i] || usedB[p.j] {
			continue
		}
		usedA[p.i], usedB[p.j] = true, true
		merge(all, a[p.i].branch, b[p.j].branch)
	}
}

// merge gives one name to two branches, unless both already hold a lobe of the
// same node: a branch passes a node once.
func merge(lobes []anchored, a, b int) {
	if a == b {
		return
	}
	for _, x := range lobes {
		for _, y := range lobes {
			if x.branch == a && y.branch == b && x.node == y.node {
				return
			}
		}
	}
	for i := range lobes {
		if lobes[i].branch == b {
			lobes[i].branch = a
		}
	}
}

// gather sorts lobes into branches; nodes ascend in energy and then density.
func gather(nodes []Node, lobes []anchored) []branch {
	index := make(map[int]int)
	var list []branch
	for _, l := range lobes {
		at, known := index[l.branch]
		if !known {
			at = len(list)
			index[l.branch] = at
			list = append(list, branch{})
		}
		br, n := &list[at], nodes[l.node]
		if last := len(br.rows) - 1; last < 0 || br.rows[last].energy != float64(n.Energy) {
			br.rows = append(br.rows, row{energy: float64(n.Energy)})
		}
		r := &br.rows[len(br.rows)-1]
		r.knots = append(r.knots, knot{n.Density, l.kappa, l.omega, l.conversion, l.peak, n.Ionised})
	}
	return list
}
