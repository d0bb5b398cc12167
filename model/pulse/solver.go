package pulse

import (
	"errors"
	"fmt"
	"math"

	"barline/model/pulse/fourier"
)

// Solver carries one field through one medium in the interaction picture: the
// linear part is exact, the slope of the rest is integrated by an embedded
// Runge–Kutta pair. It allocates at its making only and serves one goroutine.
type Solver struct {
	grid   Grid
	medium Medium
	real   *fourier.Real

	pol      polarisation
	spectrum []complex128 // all bins, V/m; the scratch of a stage
	response []complex128 // all bins, C/m² times points
	detuning [3][]float64 // Beta less ω/v, 1/m
	factor   []float64    // coupling/points with soft edges, m/F

	start  []complex128 // the field at z, kept bins
	trial  []complex128 // the field at z+h
	slopes []slopes
	turns  [stages - 2]turn // of the stages behind the first
	uses   turnKey

	z           float64
	step        float64 // to try next, m
	before      float64 // error of the last accepted step over the tolerance
	tolerance   float64
	evaluations int
	steps       int
	rejected    int
	first       float64 // J at the input
	absorbed    float64 // J given to the plasma so far
	attenuated  float64 // J lost by attenuation so far
	workAt      [stages]float64
}

// slopes holds the slopes of one bin at every stage, in the frame of the
// step's start. Keeping them together reads memory once per stage.
type slopes [stages]complex128

// turn is the linear propagation from the step's start to a stage.
type turn struct {
	forward []complex128 // exp(−i∫(β−ω/v)dz − ∫α/2 dz)
	back    []complex128 // its inverse
}

// turnKey says what the turns were computed for.
type turnKey struct{ z, h float64 }

// ErrStep is wrapped where the step became too short to go on.
var ErrStep = errors.New("step size vanished")

// NewSolver prepares the propagation of spectrum, which holds the kept bins of
// g as Grid.Launch gives them, at the relative tolerance of one step.
func NewSolver(g Grid, m Medium, spectrum []complex128, tolerance float64) (*Solver, error) {
	return newSolver(g, m, spectrum, tolerance, fourier.NewReal)
}

// newSolver takes how to plan the transforms, which tests compare.
func newSolver(g Grid, m Medium, spectrum []complex128, tolerance float64, planned func(int) (*fourier.Real, error)) (*Solver, error) {
	if err := m.check(g); err != nil {
		return nil, err
	}
	if len(spectrum) != g.Bins() {
		return nil, fmt.Errorf("solver: spectrum of %d bins, want %d", len(spectrum), g.Bins())
	}
	if !(tolerance >= 1e-12 && tolerance <= 0.1) {
		return nil, fmt.Errorf("solver: tolerance %g, want 1e-12 to 0.1", tolerance)
	}
	plan, err := planned(g.Points)
	if err != nil {
		return nil, err
	}
	n := g.Bins()
	s := &Solver{
		grid: g, medium: m, real: plan, tolerance: tolerance,
		spectrum: make([]complex128, g.Points/2+1),
		response: make([]complex128, g.Points/2+1),
		factor:   make([]float64, n),
		start:    append([]complex128(nil), spectrum...),
		trial:    make([]complex128, n),
		slopes:   make([]slopes, n),
		before:   1,
	}
	s.pol = newPolarisation(g, &s.medium)
	for i := range s.turns {
		s.turns[i] = turn{make([]complex128, n), make([]complex128, n)}
	}
	edges := softEnds(n, bandEdge)
	for j, b := range m.Beta {
		if b == nil {
			continue
		}
		s.detuning[j] = append([]float64(nil), b...)
	}
	for i := range n {
		omega := g.Omega(g.Lo + i)
		s.detuning[0][i] -= omega * m.Slowness
		c := omega * omega / (2 * vacuumPermit * lightSpeed * lightSpeed * m.beta(i, 1))
		if m.Coupling != nil {
			c = m.Coupling[i]
		}
		s.factor[i] = c * edges[i] / float64(g.Points)
	}
	s.slopeAt(0, s.start, 0)
	s.step = s.firstStep()
	s.first = s.Energy()
	return s, nil
}

// deepest bounds the attenuation within one step, whose inverse must stay a
// number: what falls by exp(−30) is gone.
const deepest = 30

const (
	timeEdge = 0.04 // share of the time window over which its ends are soft
	bandEdge = 0.02 // share of the band over which its edges are soft
)

// firstStep aims at a change of the field by the tolerance's fifth root.
func (s *Solver) firstStep() float64 {
	var size, slope float64
	for i := range s.start {
		size += norm2(s.start[i])
		slope += norm2(s.slopes[i][0])
	}
	h := s.medium.Length / 100
	if slope > 0 {
		h = min(h, 0.3*math.Pow(s.tolerance, 0.2)*math.Sqrt(size/slope))
	}
	return h
}

// slopeAt computes the raw slope of the given field at z into the stage's place.
func (s *Solver) slopeAt(stage int, field []complex128, z float64) {
	copy(s.spectrum[s.grid.Lo:], field)
	s.evaluate(stage, z)
	response := s.response[s.grid.Lo:][:len(s.slopes)]
	factor := s.factor[:len(s.slopes)]
	for i := range s.slopes {
		f, r := factor[i], response[i]
		s.slopes[i][stage] = complex(f*imag(r), -f*real(r)) // −i·f·r
	}
}

// evaluate turns the kept bins in spectrum into the response at z.
func (s *Solver) evaluate(stage int, z float64) {
	s.real.Inverse(s.pol.field, s.spectrum)
	s.pol.at(s.medium.Density.At(z))
	s.real.Forward(s.response, s.pol.p)
	s.workAt[stage] = s.pol.work
	s.evaluations++
}

// prepare computes the linear propagation to every stage of a step h from z.
// Where the density is uniform it depends on h alone.
func (s *Solver) prepare(h float64) {
	key := turnKey{0, h}
	if s.medium.Density != nil {
		key.z = s.z
	}
	if key == s.uses {
		return
	}
	s.uses = key
	for i := range s.turns {
		dz := h * stageAt[i+1]
		first, squared := s.medium.Density.Integrals(s.z, s.z+dz)
		s.fill(&s.turns[i], dz, first, squared)
	}
}

func (s *Solver) fill(t *turn, dz, first, squared float64) {
	d0, d1, d2, loss := s.detuning[0], s.detuning[1], s.detuning[2], s.medium.Loss
	for i := range d0 {
		angle := d0[i] * dz
		if d1 != nil {
			angle += d1[i] * first
		}
		if d2 != nil {
			angle += d2[i] * squared
		}
		sin, cos := math.Sincos(angle)
		forward, back := complex(cos, -sin), complex(cos, sin)
		if loss != nil {
			fall := math.Exp(-min(loss[i]*dz/2, deepest))
			forward = complex(real(forward)*fall, imag(forward)*fall)
			back = complex(real(back)/fall, imag(back)/fall)
		}
		t.forward[i], t.back[i] = forward, back
	}
}

// stage computes the slope of one stage behind the first from those before.
func (s *Solver) stage(k int, h float64) {
	t := &s.turns[min(k, stages-2)-1]
	w := &stageFrom[k]
	c0, c1, c2, c3, c4, c5 := h*w[0], h*w[1], h*w[2], h*w[3], h*w[4], h*w[5]
	all := s.slopes
	start, forward := s.start[:len(all)], t.forward[:len(all)]
	field := s.spectrum[s.grid.Lo:][:len(all)]
	for i := range all {
		f, y := &all[i], start[i]
		re := real(y) + c0*real(f[0]) + c1*real(f[1]) + c2*real(f[2]) + c3*real(f[3]) + c4*real(f[4]) + c5*real(f[5])
		im := imag(y) + c0*imag(f[0]) + c1*imag(f[1]) + c2*imag(f[2]) + c3*imag(f[3]) + c4*imag(f[4]) + c5*imag(f[5])
		field[i] = complex(re, im) * forward[i]
	}
	if k == stages-1 {
		copy(s.trial, field)
	}
	s.evaluate(k, s.z+h*stageAt[k])
	response, factor, back := s.response[s.grid.Lo:][:len(all)], s.factor[:len(all)], t.back[:len(all)]
	for i := range all {
		f, r := factor[i], response[i]
		all[i][k] = complex(f*imag(r), -f*real(r)) * back[i]
	}
}

// errorOf returns the estimated error of the step over the tolerance.
func (s *Solver) errorOf(h float64) float64 {
	e := &stageError
	var off, size float64
	start := s.start[:len(s.slopes)]
	for i := range s.slopes {
		f := &s.slopes[i]
		re := e[0]*real(f[0]) + e[2]*real(f[2]) + e[3]*real(f[3]) + e[4]*real(f[4]) + e[5]*real(f[5]) + e[6]*real(f[6])
		im := e[0]*imag(f[0]) + e[2]*imag(f[2]) + e[3]*imag(f[3]) + e[4]*imag(f[4]) + e[5]*imag(f[5]) + e[6]*imag(f[6])
		off += re*re + im*im
		size += norm2(start[i])
	}
	return h * math.Sqrt(off/size) / s.tolerance
}

// Advance takes one accepted step, which does not pass the end of the fibre,
// and reports whether the end is reached.
func (s *Solver) Advance() (done bool, err error) {
	for {
		left := s.medium.Length - s.z
		h, last := s.step, false
		if h >= left*(1-1e-9) {
			h, last = left, true
		}
		s.prepare(h)
		for k := 1; k < stages; k++ {
			s.stage(k, h)
		}
		e := s.errorOf(h)
		if e <= 1 {
			s.accept(h)
			if last {
				s.z = s.medium.Length
			} else {
				s.step = h * s.grow(e)
			}
			s.before = max(e, 1e-3)
			return last, nil
		}
		s.rejected++
		s.step = h * s.shrink(e)
		if s.step < 1e-9*s.medium.Length {
			return false, fmt.Errorf("%w at %.4g m: the field changes too fast for the grid", ErrStep, s.z)
		}
	}
}

// grow returns the factor of the next step after an error e of at most 1: a
// proportional-integral controller after Gustafsson, ACM Trans. Math. Softw.
// 17, 533 (1991). Small changes are not worth new turns.
func (s *Solver) grow(e float64) float64 {
	f := 0.9 * math.Pow(max(e, 1e-6), -0.7/5) * math.Pow(s.before, 0.4/5)
	if f > 0.95 && f < 1.1 {
		return 1
	}
	return min(max(f, 0.3), 3)
}

func (s *Solver) shrink(e float64) float64 {
	if math.IsNaN(e) || math.IsInf(e, 0) {
		for i := range s.slopes {
			s.slopes[i] = slopes{s.slopes[i][0]} // a slope without a number would stay in every sum
		}
		return 0.1
	}
	return max(0.9*math.Pow(e, -1.0/5), 0.1)
}

// accept moves on by h. The last stage stands at the new point: its slope is
// the first of the next step, in that step's frame.
func (s *Solver) accept(h float64) {
	last := s.turns[len(s.turns)-1].forward[:len(s.slopes)]
	for i := range s.slopes {
		f := &s.slopes[i]
		f[0] = f[stages-1] * last[i]
	}
	s.start, s.trial = s.trial, s.start
	for k, b := range stageFrom[stages-1] {
		s.absorbed += h * b * s.workAt[k]
	}
	if s.medium.Loss != nil {
		s.attenuated += h / 2 * (s.attenuation(s.trial) + s.attenuation(s.start))
	}
	s.workAt[0] = s.workAt[stages-1]
	s.z += h
	s.steps++
}

// Position returns how far along the fibre the field is, in m.
func (s *Solver) Position() float64 { return s.z }

// Spectrum returns the field at Position in the kept bins. It is valid until
// the next Advance.
func (s *Solver) Spectrum() []complex128 { return s.start }

// Field returns the field in V/m at Position over the instants of the grid.
// It is valid until the next Advance.
func (s *Solver) Field() []float64 { return s.pol.field }

// Energy returns the energy in J of the field at Position.
func (s *Solver) Energy() float64 { return s.medium.energy(s.grid, s.start) }

// energy sums 2 ε₀ c A T Σ (cβ/ω) |E|², which the equation conserves where
// nothing is lost.
func (m *Medium) energy(g Grid, spectrum []complex128) float64 {
	sum := 0.0
	for i, v := range spectrum {
		sum += norm2(v) * m.beta(i, 1) / g.Omega(g.Lo+i)
	}
	return sum * m.joules(g)
}

// joules returns the factor of (β/ω)|E|² of one bin in J.
func (m *Medium) joules(g Grid) float64 {
	return 2 * vacuumPermit * lightSpeed * lightSpeed * m.Area * float64(g.Window())
}

// attenuation returns the energy in J that the spectrum loses per metre.
func (s *Solver) attenuation(spectrum []complex128) float64 {
	sum := 0.0
	for i, v := range spectrum {
		sum += norm2(v) * s.medium.Loss[i] * s.medium.beta(i, 1) / s.grid.Omega(s.grid.Lo+i)
	}
	return sum * s.medium.joules(s.grid)
}

// energies returns the energy in J per rad/s of the kept bins.
func (s *Solver) energies() []float64 {
	dst := make([]float64, len(s.start))
	scale := s.medium.joules(s.grid) / s.grid.Spacing()
	for i, v := range s.start {
		dst[i] = norm2(v) * s.medium.beta(i, 1) / s.grid.Omega(s.grid.Lo+i) * scale
	}
	return dst
}

func norm2(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }
