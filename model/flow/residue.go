package flow

import (
	"fmt"
	"math"
	"time"

	"barline/model/unit"
)

// Residue is the air that is left in the cells and along the core, as mole
// fractions: a value. NewResidue makes one.
type Residue struct {
	Cells unit.Fraction
	Core  [MaxCells]float64 // in each volume of the core, from A to B
	low   mark              // of the cells
	mixed bool              // the core is as the cells are
}

// mark is the lowest amount since gas last came in, as p/T in Pa/K.
type mark float64

// Mixing is how residual air comes and goes. Gas that leaves the cells takes
// air along in the share that it has and changes nothing; gas that comes in
// thins it, both cells mixed as one. Along the core air goes with the gas and
// by diffusion; what the core gives back to the cells is too little to count.
// Air that leaks in is not known here.
type Mixing struct {
	Core     Spec
	Cylinder unit.Fraction // air in the gas supplied
	// Lowest is what is taken for a pressure of the cells that reads lower:
	// below it a gauge tells its zero and not the gas. Zero is 1 mbar.
	Lowest unit.Pascal
}

// NewResidue returns gas with a share of air everywhere.
func NewResidue(air unit.Fraction) (Residue, error) {
	if !(air >= 0 && air <= 1) {
		return Residue{}, fmt.Errorf("share of air %v: %w: wanted 0 to 1", float64(air), ErrRange)
	}
	r := Residue{Cells: air, mixed: true}
	for i := range r.Core {
		r.Core[i] = float64(air)
	}
	return r, nil
}

// At returns the share of air at z in a core of m's length.
func (m Mixing) At(r *Residue, z unit.Metre) unit.Fraction {
	n := m.cells()
	if !(m.Core.Length > 0) {
		return unit.Fraction(r.Core[0])
	}
	i := int(float64(n) * float64(z/m.Core.Length))
	return unit.Fraction(r.Core[min(max(i, 0), n-1)])
}

func (m Mixing) cells() int {
	if m.Core.Cells == 0 {
		return 128
	}
	return min(max(m.Core.Cells, 1), MaxCells)
}

// Flicker of a gauge and small swings of temperature must not count as gas that
// comes and goes for ever: only a rise of more than this does.
const (
	riseShare = 0.005
	riseLeast = 2 * unit.Millibar
)

// Advance carries the air over dt, in which the core of m went from one state
// to the next. While room is true the cells are open to the room, and what
// comes in is air. States that are no gas change nothing.
func (m Mixing) Advance(r *Residue, dt time.Duration, before, after *State, room bool) {
	p, t := (after.A+after.B)/2, after.Temperature
	if !(t > 0) || math.IsInf(float64(t), 0) || !finite(p) || dt < 0 {
		return
	}
	lowest := m.Lowest
	if !(lowest > 0) {
		lowest = unit.Millibar
	}
	into := m.Cylinder
	if room {
		into = 1
	}
	was := r.Cells
	if r.Cells = r.low.thin(r.Cells, into, max(p, lowest), t); r.mixed && r.Cells == was {
		return
	}
	m.along(r, dt.Seconds(), before, after)
}

// along carries the air in the core: implicit upwind differences in the flow
// that the change of density tells, and diffusion. On a grid of 64 the scheme
// smears a front about as much as diffusion at 1 bar does.
func (m Mixing) along(r *Residue, dt float64, before, after *State) {
	n := m.cells()
	h := float64(m.Core.Length) / float64(n)
	area := math.Pi * float64(m.Core.Radius) * float64(m.Core.Radius)
	if dt == 0 || !(h > 0) || !(area > 0) {
		return
	}
	// All per area, mol/m², over the step.
	spread := m.spread(after.Temperature)
	flow := (after.EnteredA - before.EnteredA) / area
	end := float64(r.Cells)
	var upper, rhs [MaxCells]float64
	for i := range n {
		gain := (after.Density[i] - before.Density[i]) * h
		out := flow - gain
		left, right := m.exchange(after, spread, i, h)*dt, m.exchange(after, spread, i+1, h)*dt
		a := -(max(flow, 0) + left)
		c := -(max(-out, 0) + right)
		d := after.Density[i]*h + max(-flow, 0) + left + max(out, 0) + right
		b := before.Density[i] * h * r.Core[i]
		if i == 0 {
			b -= a * end
			a = 0
		}
		if i == n-1 {
			b -= c * end
			c = 0
		}
		if i > 0 {
			d -= a * upper[i-1]
			b -= a * rhs[i-1]
		}
		if !(d > 0) { // no gas at all
			upper[i], rhs[i] = 0, end
		} else {
			upper[i], rhs[i] = c/d, b/d
		}
		flow = out
	}
	r.mixed = true
	for i := n - 1; i >= 0; i-- {
		x := rhs[i]
		if i < n-1 {
			x -= upper[i] * r.Core[i+1]
		}
		r.Core[i] = min(max(x, 0), 1)
		r.mixed = r.mixed && math.Abs(x-end) < mixedWithin
	}
}

func finite(p unit.Pascal) bool { return !math.IsNaN(float64(p)) && !math.IsInf(float64(p), 0) }

// thin returns the share of air in a volume that has come to pressure p.
func (k *mark) thin(air, into unit.Fraction, p unit.Pascal, t unit.Kelvin) unit.Fraction {
	n := float64(p) / float64(t)
	low := float64(*k)
	if low == 0 || n <= low {
		*k = mark(n)
		return air
	}
	if n-low <= max(riseShare*low, float64(riseLeast)/float64(t)) {
		return air
	}
	*k = mark(n)
	return into + (air-into)*unit.Fraction(low/n)
}

// airDiffusion is the binary diffusion coefficient of air in a noble gas at
// 1 bar and 293 K, m²/s. That in argon is 0.2 cm²/s (common practice, no
// source); in others it goes with the reduced mass and is good to a factor of
// two, which moves the time to even out and nothing else.
const (
	airDiffusion = 0.2e-4
	argonMass    = 39.95e-3
)

// spreading is how air diffuses in a core.
type spreading struct {
	binary  float64 // diffusion coefficient times density, mol/(m s)
	knudsen float64 // diffusion coefficient, m²/s
}

func (m Mixing) spread(t unit.Kelvin) spreading {
	if !(m.Core.Gas.MolarMass > 0) {
		return spreading{}
	}
	reduced := func(x float64) float64 { return x * airMolarMass / (x + airMolarMass) }
	return spreading{
		// At 1 bar there are 1 bar/RT moles.
		binary: airDiffusion * math.Sqrt(reduced(argonMass)/reduced(m.Core.Gas.MolarMass)) *
			math.Pow(float64(t)/293, 1.75) * float64(unit.Bar) / (GasConstant * float64(t)),
		// Knudsen: 2a/3 times the mean speed of air.
		knudsen: 2 * float64(m.Core.Radius) / 3 * math.Sqrt(8*GasConstant*float64(t)/(math.Pi*airMolarMass)),
	}
}

// exchange returns how many moles change places through face i of the core, per
// area and second and share of difference. The resistances of binary and
// Knudsen diffusion add up (Bosanquet).
func (m Mixing) exchange(s *State, d spreading, i int, h float64) float64 {
	n := m.cells()
	density := s.Density[min(i, n-1)]
	if i > 0 && i < n {
		density = (density + s.Density[i-1]) / 2
	}
	switch {
	case i == n && m.Core.SealedB || !(density > 0) || d.knudsen == 0:
		return 0
	case i == 0 || i == n: // from the middle of the volume to the end
		h /= 2
	}
	return 1 / (1/d.binary + 1/(d.knudsen*density)) / h
}

// mixedWithin is how near in share of air the core may be to the cells to count
// as mixed.
const mixedWithin = 1e-9
