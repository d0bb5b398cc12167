package anchor

import (
	"math"
	"sort"

	"barline/model/fibre"
	"barline/model/unit"
)

// Map answers for κ between the nodes. It never changes.
type Map struct {
	bench    *Bench
	nodes    []Node
	branches []branch
	spacing  struct{ density, energy float64 } // of the nodes, the smallest: relative, and in J
	slopes   [InputCount]Slope
	// longer is the run with a longer pulse, and plain the node it compares
	// with; nil before they stand.
	longer, plain *Node
	leftOut       unit.Metre
	tested        int
	coarse        bool
}

// Slope is how κ moves with an uncertain input, from one run at the central
// node; Known is false before that run and where the lobe was lost.
type Slope struct {
	Kappa float64 // 1/m per unit of the input
	Known bool
}

// Point is one branch at one density and energy.
type Point struct {
	Kappa      float64    // 1/m
	OverDens   float64    // ∂κ/∂density at constant energy, 1/m per mol/m³
	OverEnergy float64    // ∂κ/∂energy at constant density, 1/m per J
	Omega      float64    // rad/s, interpolated: where to start solving
	Conversion float64    // of the output energy
	Peak       unit.Metre // of the lobe, from its centroid
	Ionised    float64    // largest share of atoms along the fibre
	Branch     int        // the same number on the same branch of one map
}

// Build joins nodes into a map. The nodes may come in any order; those that do
// not stand on the lattice, which a bench with another pulse energy may have
// left, are not used.
func (b *Bench) Build(nodes []Node) *Map {
	m := &Map{bench: b}
	for _, n := range nodes {
		if n.Moved == Nothing && b.holds(n) {
			m.nodes = append(m.nodes, n)
		}
	}
	sort.SliceStable(m.nodes, func(i, j int) bool {
		a, c := m.nodes[i], m.nodes[j]
		if a.Energy != c.Energy {
			return a.Energy < c.Energy
		}
		return a.Density < c.Density
	})
	m.nodes = distinct(m.nodes)
	m.branches = b.link(m.nodes)
	m.measure()
	m.slopes = b.slopesOf(m, nodes)
	m.longer, m.plain = m.stretched(nodes)
	m.leftOut, m.tested = m.leaveOut()
	m.coarse = m.rows() < 3 || m.spacing.density > 1.5*densityStep
	return m
}

func distinct(nodes []Node) []Node {
	kept := nodes[:0]
	for _, n := range nodes {
		if last := len(kept) - 1; last >= 0 && kept[last].Density == n.Density && kept[last].Energy == n.Energy {
			continue
		}
		kept = append(kept, n)
	}
	return kept
}

// Nodes returns how many nodes the map stands on.
func (m *Map) Nodes() int { return len(m.nodes) }

// Coarse reports whether the map stands on its first nodes only.
func (m *Map) Coarse() bool { return m.coarse }

// Usable reports whether the map can answer in the middle of the range.
func (m *Map) Usable() bool { return m.nodesPerRow() >= 3 }

// LeftOut returns the rms error of the centroid when each inner node is left
// out in turn and predicted by the others, and at how many nodes it was tried.
func (m *Map) LeftOut() (unit.Metre, int) { return m.leftOut, m.tested }

// Slope returns how κ moves with an input.
func (m *Map) Slope(i Input) Slope { return m.slopes[i] }

// Bench returns what the map belongs to.
func (m *Map) Bench() *Bench { return m.bench }

func (m *Map) rows() int {
	n := 0
	for i := range m.nodes {
		if i == 0 || m.nodes[i].Energy != m.nodes[i-1].Energy {
			n++
		}
	}
	return n
}

// nodesPerRow returns the nodes of the longest row.
func (m *Map) nodesPerRow() int {
	most, n := 0, 0
	for i := range m.nodes {
		if i == 0 || m.nodes[i].Energy != m.nodes[i-1].Energy {
			n = 0
		}
		n++
		most = max(most, n)
	}
	return most
}

// measure finds the spacing of the nodes, which says how far a branch reaches
// beyond its last one.
func (m *Map) measure() {
	m.spacing.density, m.spacing.energy = math.Inf(1), math.Inf(1)
	for i := 1; i < len(m.nodes); i++ {
		if m.nodes[i].Energy == m.nodes[i-1].Energy {
			m.spacing.density = min(m.spacing.density, m.nodes[i].Density/m.nodes[i-1].Density-1)
			continue
		}
		m.spacing.energy = min(m.spacing.energy, float64(m.nodes[i].Energy-m.nodes[i-1].Energy))
	}
	if math.IsInf(m.spacing.density, 1) {
		m.spacing.density = 0
	}
	if math.IsInf(m.spacing.energy, 1) { // one energy so far: as if the next stood at the first step
		m.spacing.energy = 2 * energyStep * float64(m.bench.spec.Pulse.Energy)
	}
}

// Covers reports whether the map speaks for a density in mol/m³ and an energy:
// between neighbouring nodes, or at most half a spacing beyond. Where it does
// and At finds no branch, full-field runs near there find no emission.
func (m *Map) Covers(density float64, energy unit.Joule) bool {
	if !m.Usable() {
		return false
	}
	first, last := m.nodes[0], m.nodes[len(m.nodes)-1]
	halfEnergy := m.spacing.energy / 2
	if !(float64(energy) >= float64(first.Energy)-halfEnergy && float64(energy) <= float64(last.Energy)+halfEnergy) {
		return false
	}
	half := 1 + m.spacing.density/2
	for i := range m.nodes {
		n := &m.nodes[i]
		if density >= n.Density/half && density <= n.Density*half {
			return true
		}
		if i > 0 && neighbours(m.nodes[i-1], *n) && density >= m.nodes[i-1].Density && density <= n.Density {
			return true
		}
	}
	return false
}

// At fills dst with the branches at a density in mol/m³ and a pulse energy,
// strongest first, and returns how many there are: none where no branch
// reaches. It allocates nothing.
func (m *Map) At(density float64, energy unit.Joule, dst *[MaxBranches]Point) int {
	n := 0
	for i := range m.branches {
		p, ok := m.branches[i].at(density, float64(energy), 1+m.spacing.density/2, m.spacing.energy/2)
		if !ok {
			continue
		}
		p.Branch = i
		at := min(n, MaxBranches-1)
		if n >= MaxBranches && dst[at].Conversion >= p.Conversion {
			continue
		}
		dst[at] = p
		for ; at > 0 && dst[at].Conversion > dst[at-1].Conversion; at-- {
			dst[at], dst[at-1] = dst[at-1], dst[at]
		}
		n = min(n+1, MaxBranches)
	}
	return n
}

// Emission solves for the emission of every branch in the gas of guide, which
// is that of the bench at another density, temperature or share of air. It
// fills dst like At and omega, in rad/s, beside it.
func (m *Map) Emission(guide fibre.Guide, energy unit.Joule, dst *[MaxBranches]Point, omega *[MaxBranches]float64) int {
	n, kept := m.At(float64(guide.Gas.Density), energy, dst), 0
	for i := range n {
		w, ok := Solve(guide, m.bench.omega, dst[i].Kappa, dst[i].Omega)
		if !ok {
			continue
		}
		dst[kept], omega[kept] = dst[i], w
		kept++
	}
	return kept
}
