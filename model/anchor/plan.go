package anchor

import (
	"math"

	"barline/model/fibre"
	"barline/model/unit"
)

// Nodes stand on a lattice that is the same for every range, so that a range
// that moves or grows keeps those it has: densities in ratios of 1 + densityStep
// from 1 mol/m³, energies in steps of energyStep round the one used most.
const (
	densityStep = 0.07
	energyStep  = 0.1
	coarsest    = 4 // steps between the densities of the first level
)

// levels of the lattice, from coarse to fine: every so many densities on the
// energies so many steps from the one used most.
var levels = [...]struct {
	every int
	steps []int
}{
	{coarsest, []int{0}}, {2, []int{0}}, {2, []int{-2, 2}}, {1, []int{0, -2, 2}}, {1, []int{-1, 1}},
}

// spanning is the level after which the runs for the slopes over uncertain
// inputs come.
const spanning = 2

// Range is a range of density in mol/m³.
type Range struct{ From, To float64 }

// Round returns the range of densities within a good quarter of one, over
// which a bench that stands there is anchored.
func Round(density float64) Range { return Range{density / 1.27, density * 1.27} }

// Holds reports whether the density lies in the range.
func (r Range) Holds(density float64) bool { return density >= r.From && density <= r.To }

// Plan returns the tasks that a range needs, the coarse ones first; those of
// have are left out. No range is refused: an empty one needs nothing.
func (b *Bench) Plan(have []Node, r Range) []Task {
	if !(r.From > 0 && r.To >= r.From && r.To < 1e6) {
		return nil
	}
	done := make(map[Task]bool)
	for _, n := range have {
		done[Task{n.Density, n.Energy, n.Moved}] = true
	}
	var tasks []Task
	add := func(t Task) {
		if !done[t] {
			done[t] = true
			tasks = append(tasks, t)
		}
	}
	first := 2 * int(math.Floor(place(r.From)/2+1e-9))
	last := 2 * int(math.Ceil(place(r.To)/2-1e-9))
	last = max(last, first+2*coarsest) // three nodes carry a first answer
	for i, l := range levels {
		for _, e := range l.steps {
			for k := first; k <= last; k += l.every {
				add(Task{density(k), b.energy(e), Nothing})
			}
			add(Task{density(last), b.energy(e), Nothing})
		}
		if i == spanning {
			b.moved(have, density((first+last)/4*2), add)
		}
	}
	return tasks
}

// Quick returns the part of the plan that a first good answer needs: half the
// lattice's densities on three energies, and the slopes.
func (b *Bench) Quick(have []Node, r Range) []Task {
	all := b.Plan(have, r)
	for i, t := range all {
		if k := place(t.Density); t.Moved == Nothing && int(math.Round(k))%2 != 0 {
			return all[:i]
		}
	}
	return all
}

// place returns where on the lattice a density stands; whole numbers are nodes.
func place(density float64) float64 { return math.Log(density) / math.Log1p(densityStep) }

// density returns the density of a place.
func density(k int) float64 { return math.Pow(1+densityStep, float64(k)) }

func (b *Bench) energy(step int) unit.Joule {
	return b.spec.Pulse.Energy * unit.Joule(1+energyStep*float64(step))
}

// holds reports whether the node stands on the lattice.
func (b *Bench) holds(n Node) bool {
	k, e := place(n.Density), (float64(n.Energy/b.spec.Pulse.Energy)-1)/energyStep
	return math.Abs(k-math.Round(k)) < 1e-6 && math.Abs(e-math.Round(e)) < 1e-6
}

// moved adds one task for every input that κ depends on, at a central node,
// unless have holds one at any.
func (b *Bench) moved(have []Node, at float64, add func(Task)) {
	known := [InputCount]bool{}
	for _, n := range have {
		known[n.Moved] = true
	}
	for i := Duration; i < InputCount; i++ {
		if known[i] || i == Wall && b.spec.Fibre.Kind == fibre.Capillary {
			continue
		}
		add(Task{at, b.spec.Pulse.Energy, i})
	}
}
