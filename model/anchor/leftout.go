package anchor

import (
	"math"

	"barline/model/fibre"
	"barline/model/unit"
)

// leaveOut predicts the strongest lobe of every inner node from the others and
// returns the rms error of its centroid. Nodes next to the end of a branch, and
// those where the strongest branch changes, are not inner ones.
func (m *Map) leaveOut() (rms unit.Metre, count int) {
	sum := 0.0
	for i := range m.branches {
		br := &m.branches[i]
		for r := range br.rows {
			knots := br.rows[r].knots
			for k := 1; k+1 < len(knots); k++ {
				without := row{energy: br.rows[r].energy, knots: make([]knot, 0, len(knots)-1)}
				without.knots = append(append(without.knots, knots[:k]...), knots[k+1:]...)
				v, ok := without.at(knots[k].density, 1)
				if !ok {
					continue
				}
				omega, ok := Solve(m.bench.Guide(knots[k].density), m.bench.omega, v.kappa, knots[k].omega)
				if !ok {
					continue
				}
				d := float64(apart(omega, knots[k].omega))
				sum += d * d
				count++
			}
		}
	}
	if count == 0 {
		return 0, 0
	}
	return unit.Metre(math.Sqrt(sum / float64(count))), count
}

// slopesOf compares the runs with a moved input with the central node.
func (b *Bench) slopesOf(m *Map, nodes []Node) (slopes [InputCount]Slope) {
	for _, n := range nodes {
		if n.Moved == Nothing || len(n.Lobes) == 0 {
			continue
		}
		var points [MaxBranches]Point
		if m.At(n.Density, n.Energy, &points) == 0 {
			continue
		}
		s, err := b.Setup(Task{n.Density, n.Energy, n.Moved})
		if err != nil {
			continue
		}
		moved := mismatchOf(fibre.Guide{Fibre: s.Fibre, Gas: s.Gas}, b.omega)
		best := 2 * float64(reach)
		for _, l := range n.Lobes {
			delta, slope, ok := moved.at(fibre.Frequency(l.Centroid))
			if !ok || !(slope > 0) {
				continue
			}
			off := math.Abs(delta-points[0].Kappa) / slope * float64(l.Centroid) / fibre.Frequency(l.Centroid)
			if off < best {
				best = off
				slopes[n.Moved] = Slope{(delta - points[0].Kappa) / change[n.Moved], true}
			}
		}
	}
	return slopes
}
