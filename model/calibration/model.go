package calibration

import (
	"errors"
	"fmt"
	"math"

	"barline/model/anchor"
	"barline/model/emission"
	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/unit"
)

// ErrOutside says that the nodes do not reach an input.
var ErrOutside = errors.New("outside the nodes")

// Model is the anchored prediction of a bench with corrections. It never
// changes and may be shared.
type Model struct {
	nodes  *anchor.Map
	fibre  *fibre.Fibre
	medium *gas.Medium
	pump   float64 // rad/s
}

// NewModel returns the model that stands on the nodes.
func NewModel(nodes *anchor.Map) (*Model, error) {
	if !nodes.Usable() {
		return nil, fmt.Errorf("%d full-field nodes are too few to calibrate on", nodes.Nodes())
	}
	s := nodes.Bench().Spec()
	f, err := fibre.New(s.Fibre)
	if err != nil {
		return nil, err
	}
	m, err := gas.New(s.Gas)
	if err != nil {
		return nil, err
	}
	return &Model{nodes, f, m, fibre.Frequency(s.Pulse.Wavelength)}, nil
}

// Nodes returns what the model stands on.
func (m *Model) Nodes() *anchor.Map { return m.nodes }

// Emission is one branch of the answer.
type Emission struct {
	Branch     int
	Wavelength unit.Metre // as the spectrometer would show it
	Conversion float64
}

// interpolation is the standard error of the answer between the nodes. To leave
// a node out doubles the spacing, which makes the error of a cubic 7 times as
// large where κ is smooth, and 1.7 times where the runs themselves scatter. Seen
// on 24 nodes of an argon fibre between 8 and 12 bar: a quarter.
func (m *Model) interpolation() unit.Metre {
	left, _ := m.nodes.LeftOut()
	return left / 4
}

// Answer appends the branches at the measured input to dst, strongest first.
// Without any it returns ErrOutside.
//
// The gas has the density of the corrected pressure; index-scale multiplies its
// n−1 only, so that κ, which is taken at the density, keeps its meaning. κ also
// moves with core, wall and nonlinear index where the nodes know how.
func (m *Model) Answer(dst []Emission, in emission.Input, c *Corrections) ([]Emission, error) {
	p := in.Pressure - unit.Pascal(c[GaugeZero])
	state, err := m.medium.At(p, in.Temperature, in.Air)
	if err != nil {
		return dst, err
	}
	density := float64(state.Density)
	s := m.fibre.Spec()
	f := m.fibre.WithSizes(float64(s.CoreDiameter)/2*(1+c[CoreDiameter]), float64(s.Wall)*(1+c[Wall]))
	guide := fibre.Guide{Fibre: &f, Gas: state.WithDensity(unit.MolePerCubicMetre(density * (1 + c[IndexScale])))}
	shift := 0.0
	for _, q := range []struct {
		input anchor.Input
		by    float64
	}{{anchor.CoreRadius, c[CoreDiameter]}, {anchor.Wall, c[Wall]}, {anchor.NonlinearIndex, c[NonlinearIndex]}} {
		if slope := m.nodes.Slope(q.input); slope.Known {
			shift += slope.Kappa * q.by
		}
	}
	var branches [anchor.MaxBranches]anchor.Point
	n := m.nodes.At(density, in.Energy*unit.Joule(1+c[Energy]), &branches)
	found := false
	for _, b := range branches[:n] {
		omega, ok := anchor.Solve(guide, m.pump, b.Kappa+shift, b.Omega)
		if !ok {
			continue
		}
		found = true
		dst = append(dst, Emission{b.Branch, fibre.Wavelength(omega) + unit.Metre(c[WavelengthOffset]), b.Conversion})
	}
	if !found {
		return dst, fmt.Errorf("%v, %v, %v: %w", in.Pressure, in.Temperature, in.Energy, ErrOutside)
	}
	return dst, nil
}

// on returns the emission on one branch.
func (m *Model) on(branch int, in emission.Input, c *Corrections) (unit.Metre, error) {
	var buf [anchor.MaxBranches]Emission
	all, err := m.Answer(buf[:0], in, c)
	if err != nil {
		return 0, err
	}
	for _, e := range all {
		if e.Branch == branch {
			return e.Wavelength, nil
		}
	}
	return 0, fmt.Errorf("branch %d does not reach %v, %v: %w", branch, in.Pressure, in.Energy, ErrOutside)
}

// nearest returns the branch that comes nearest to a measured emission.
func (m *Model) nearest(in emission.Input, c *Corrections, measured unit.Metre) (Emission, error) {
	var buf [anchor.MaxBranches]Emission
	all, err := m.Answer(buf[:0], in, c)
	if err != nil {
		return Emission{}, err
	}
	best := all[0]
	for _, e := range all[1:] {
		if math.Abs(float64(e.Wavelength-measured)) < math.Abs(float64(best.Wavelength-measured)) {
			best = e
		}
	}
	return best, nil
}

// sqrt is the square root of what rounding may have made a little negative.
func sqrt(v float64) float64 { return math.Sqrt(math.Max(v, 0)) }
