package emission

import (
	"fmt"
	"math"
	"reflect"

	"barline/model/anchor"
	"barline/model/unit"
)

// AnchorBench returns the bench whose full-field runs anchor predictions of the
// setup. The setup's pulse energy is the one used most.
func (s Setup) AnchorBench() (*anchor.Bench, error) {
	return anchor.New(anchor.Spec{Gas: s.Gas, Fibre: s.Fibre, Pulse: s.Pulse, Plasma: s.Plasma})
}

// Anchored returns a predictor of the same setup that gives the anchored answer
// on nodes. Where they do not reach it answers as the receiver does, and each
// prediction says which answer it is. It refuses nodes of another bench, and too few of them. The
// receiver stays as it is.
func (p *Predictor) Anchored(nodes *anchor.Map) (*Predictor, error) {
	if nodes == nil || !nodes.Usable() {
		return nil, fmt.Errorf("anchored emission: too few full-field runs yet")
	}
	theirs, mine := nodes.Bench().Spec(), &p.setup
	pulse := theirs.Pulse
	pulse.Energy = mine.Pulse.Energy
	if theirs.Gas != mine.Gas || !reflect.DeepEqual(theirs.Fibre, mine.Fibre) || pulse != mine.Pulse || theirs.Plasma != mine.Plasma {
		return nil, fmt.Errorf("anchored emission: the full-field runs belong to another gas, fibre or pulse")
	}
	q := p.Clone()
	q.beyond = p.Clone()
	if p.beyond != nil { // more nodes of a bench that was anchored already
		q.beyond = p.beyond.Clone()
	}
	q.nodes = nodes
	q.setup.Answer = Anchored
	return q, nil
}

// Nodes returns the full-field runs behind an anchored predictor; nil for the
// other answers.
func (p *Predictor) Nodes() *anchor.Map { return p.nodes }

// answerAnchored solves Δβ(ω) = κ on every branch that reaches the density and
// energy, with the exact dispersion of the gas that is in the core now. The
// strongest branch is the answer.
func (p *Predictor) answerAnchored(m *mismatch, f *found, out *Prediction) {
	f.root = 0
	var points [anchor.MaxBranches]anchor.Point
	n := p.nodes.At(float64(out.Density), out.Input.Energy, &points)
	for i := range n {
		m.fixed = points[i].Kappa
		// The nodes' own wavelength is a start from within a few nanometres.
		root, ok := m.follow(points[i].Omega, phaseMatch, 3*reach)
		if !ok {
			continue
		}
		if f.root == 0 {
			f.root, f.branch = root, points[i]
		}
		if out.BranchCount < MaxBranches {
			out.Branches[out.BranchCount] = Branch{wavelength(root), unit.Fraction(points[i].Conversion)}
			out.BranchCount++
		}
	}
	m.fixed = f.branch.Kappa
}

// Spreads that full-field runs leave, before a calibration.
const (
	coarseSpread = 3e-9 // interpolation between the first few nodes
	// Averaging the rate over the mode or not moved the emission by 10 nm at a
	// rough ionised fraction of 1.6e-4, and as its 0.4th power from 5e-6 to
	// 6e-4, in ten full-field runs of this project; the rate itself is not
	// known better than that.
	plasmaSpread   = 10e-9
	plasmaFraction = 1.6e-4
	plasmaPower    = 0.4
)

// weighNodes fills in what the nodes know of κ, and what they leave open.
func (p *Predictor) weighNodes(m *mismatch, f *found, turn float64, out *Prediction, e *effects) {
	if e.known[NonlinearIndex] == 0 {
		e.known[NonlinearIndex] = p.medium.KerrSpread()
	}
	// Density moves κ too: all that acts through density turns by as much more.
	if e.slope[Pressure] != 0 {
		more := 1 - turn*f.branch.OverDens*m.guide.Gas.DensitySlope/e.slope[Pressure]
		e.slope[Pressure] *= more
		e.slope[Temperature] *= more
	}
	e.slope[PulseEnergy] = -turn * f.branch.OverEnergy * float64(out.Input.Energy)
	for _, x := range [...]struct {
		q Quantity
		i anchor.Input
	}{
		{PulseDuration, anchor.Duration}, {PulseGDD, anchor.GDD}, {NonlinearIndex, anchor.NonlinearIndex},
		{CoreRadius, anchor.CoreRadius}, {Wall, anchor.Wall},
	} {
		s := p.nodes.Slope(x.i)
		if !s.Known {
			e.unknown[x.q] = true
			continue
		}
		e.slope[x.q] -= turn * s.Kappa
	}
	if e.unknown[NonlinearIndex] { // until its run is done, as the estimate has it
		k := -turn * estimateLead * out.Gamma * float64(out.PeakPower) * math.Pow(f.root*p.launch.t0, 2.0/3)
		e.slope[NonlinearIndex], e.slope[PulseDuration] = k, k*p.slopes.duration
	}
	e.rest = coarseSpread
	if left, tested := p.nodes.LeftOut(); tested > 0 {
		e.rest = float64(left)
	}
	if out.IonisedFraction > 0 {
		e.plasma = plasmaSpread * math.Pow(float64(out.IonisedFraction)/plasmaFraction, plasmaPower)
	}
}
