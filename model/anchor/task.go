package anchor

import (
	"context"

	"barline/model/fibre"
	"barline/model/pulse"
	"barline/model/spectrum"
	"barline/model/unit"
)

// Input is one uncertain input of the bench, other than density and energy,
// that κ depends on.
type Input uint8

const (
	Nothing        Input = iota // the bench as it is
	Duration                    // relative
	GDD                         // s²
	NonlinearIndex              // relative
	CoreRadius                  // relative
	Wall                        // relative
	Loss                        // dB/m
	InputCount     = iota
)

var inputText = [InputCount]string{"", "pulse duration", "group-delay dispersion", "nonlinear index", "core radius", "wall", "loss"}

// String names the input.
func (i Input) String() string { return inputText[i] }

// change is by how much the extra run moves each input: enough to stand clear
// of the run's own error, little enough to be a slope.
var change = [InputCount]float64{Duration: 0.04, GDD: 60e-30, NonlinearIndex: 0.04, CoreRadius: 0.01, Wall: 0.02, Loss: 1}

// Task is one full-field run.
type Task struct {
	Density float64 // mol/m³
	Energy  unit.Joule
	Moved   Input // by its change; Nothing for a node proper
}

// Setup returns the propagation that the task asks for.
func (b *Bench) Setup(t Task) (pulse.Setup, error) {
	s := pulse.Setup{Fibre: b.fibre, Gas: b.Guide(t.Density).Gas, Pulse: b.spec.Pulse, Plasma: b.spec.Plasma, Rates: b.rates}
	s.Pulse.Energy = t.Energy
	by := change[t.Moved]
	spec := b.spec.Fibre
	switch t.Moved {
	case Duration:
		s.Pulse.Duration *= unit.Second(1 + by)
	case GDD:
		s.Pulse.GDD += unit.SecondSquared(by)
	case NonlinearIndex:
		s.KerrScale = 1 + by
	case CoreRadius:
		spec.CoreDiameter *= unit.Metre(1 + by)
	case Wall:
		spec.Wall *= unit.Metre(1 + by)
	case Loss:
		spec.Loss = spec.Loss.Raised(unit.DecibelPerMetre(by))
	}
	if t.Moved < CoreRadius {
		return s, nil
	}
	var err error
	s.Fibre, err = fibre.New(spec)
	return s, err
}

// Compute carries out a task; it takes about a second of one core. It returns
// the context's error as soon as that ends.
func (b *Bench) Compute(ctx context.Context, t Task, progress func(share float64)) (Node, error) {
	s, err := b.Setup(t)
	if err != nil {
		return Node{}, err
	}
	r, err := s.Run(ctx, pulse.Options{Progress: progress})
	if err != nil {
		return Node{}, err
	}
	n := Node{Density: t.Density, Energy: t.Energy, Moved: t.Moved, Ionised: r.Ionised,
		Compression: r.Compression, Compressed: r.CompressedPower, Reasons: r.Reasons}
	for _, l := range r.Lobes[:min(len(r.Lobes), MaxBranches)] {
		n.Lobes = append(n.Lobes, lobeOf(l))
	}
	return n, nil
}

func lobeOf(l spectrum.Lobe) Lobe { return Lobe{l.Centroid, l.Peak, l.Width, l.Conversion} }
