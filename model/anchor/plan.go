package anchor

import (
	"barline/model/fibre"
	"barline/model/unit"
)

// The grid of nodes, from coarse to fine: how many densities over the range on
// how many energies.
var levels = [...]struct{ densities, energies int }{{3, 1}, {5, 1}, {5, 3}, {9, 3}, {9, 5}}

// Plan returns all tasks, the coarse ones first; those of have are left out.
// The tasks for the slopes over uncertain inputs come behind the first level
// that spans the energies.
func (b *Bench) Plan(have []Node) []Task {
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
	for i, l := range levels {
		for e := range l.energies {
			for d := range l.densities {
				add(Task{b.density(d, l.densities), b.energy(e, l.energies), Nothing})
			}
		}
		if i == 2 {
			b.moved(add)
		}
	}
	return tasks
}

// moved adds one task for every input that κ depends on, at the central node.
func (b *Bench) moved(add func(Task)) {
	for i := Duration; i < InputCount; i++ {
		if i == Wall && b.spec.Fibre.Kind == fibre.Capillary {
			continue
		}
		add(Task{b.density(1, 3), b.spec.Pulse.Energy, i})
	}
}

// density returns the i-th of n densities over the range.
func (b *Bench) density(i, n int) float64 {
	return b.low + (b.high-b.low)*float64(i)/float64(n-1)
}

// energy returns the i-th of n energies. The middle one is the one used most;
// on either side they are equally spaced to the end of the range.
func (b *Bench) energy(i, n int) unit.Joule {
	middle, half := b.spec.Pulse.Energy, n/2
	switch {
	case i < half:
		return b.spec.Energy[0] + (middle-b.spec.Energy[0])*unit.Joule(i)/unit.Joule(half)
	case i > half:
		return middle + (b.spec.Energy[1]-middle)*unit.Joule(i-half)/unit.Joule(half)
	}
	return middle
}
