package flow

import (
	"fmt"
	"math"
	"time"

	"barline/model/unit"
)

// MaxCells is the finest grid of a Core.
const MaxCells = 256

// Spec describes a channel between two cells.
type Spec struct {
	Radius      unit.Metre // of the bore
	Length      unit.Metre
	Gas         Medium
	Temperature unit.Kelvin // of the fibre, until Advance says otherwise
	Cells       int         // of the grid, 4 to MaxCells; 0 is 128
	SealedB     bool        // the far end is closed: cell B does not act on it
}

// Core is the gas in one channel of the fibre: a line of finite volumes that
// carry molar density, joined to cell A at z = 0 and to cell B at z = Length.
// The gas has the fibre's temperature everywhere: in a bore of tens of
// micrometres it takes the wall's within microseconds.
//
// A Core owns scratch memory: it is not safe for concurrent use. Its State is
// a value.
type Core struct {
	spec  Spec
	n     int
	h     float64 // m, length of a volume
	table *vTable

	gas   atTemperature
	state State

	// Densities: the iterate, the result of one whole and of one half step, and
	// the steady state between the present ends.
	rho, whole, half, settled [MaxCells]float64
	// Values at the nodes, end A at 0 and end B at n+1: Ψ, dΨ/dρ, 1/Z, d(1/Z)/dρ.
	psi, dpsi, iz, diz [MaxCells + 2]float64
	// Fluxes through the faces, in mol/(m² s), and their derivatives with
	// respect to the density left and right of the face.
	flux, left, right [MaxCells + 1]float64
	up, rhs           [MaxCells]float64 // of the tridiagonal system

	probe             *Core // a coarse one that runs ahead, see TimeToSettle
	substeps, newtons int   // since the last Advance
}

// State is everything that a Core remembers: a value to keep, compare and give
// back. The arrays beyond the grid of the core are zero.
type State struct {
	Temperature unit.Kelvin
	A, B        unit.Pascal // at the ends
	// Density is the molar density of each volume from A to B, in mol/m³.
	Density [MaxCells]float64
	// EnteredA and EnteredB are the moles that came in through each end. Their
	// sum is what the channel gained, to rounding.
	EnteredA, EnteredB float64
}

// atTemperature is what the gas is at the temperature of the state.
type atTemperature struct {
	t     unit.Kelvin
	rt    float64 // J/mol
	b, c  float64 // virial coefficients
	kappa float64 // Pa, p·Kn
	g     float64 // mol/(m s) per unit of Ψ
}

// NewCore returns the channel evacuated, both ends at zero pressure.
func NewCore(s Spec) (*Core, error) {
	if s.Cells == 0 {
		s.Cells = 128
	}
	if s.Cells < 4 || s.Cells > MaxCells {
		return nil, fmt.Errorf("core of %d volumes: %w: wanted 4 to %d", s.Cells, ErrRange, MaxCells)
	}
	if !(s.Radius > 0) || !(s.Length > 0) || math.IsInf(float64(s.Radius), 0) || math.IsInf(float64(s.Length), 0) {
		return nil, fmt.Errorf("core of radius %v, length %v: %w: wanted both above zero",
			float64(s.Radius), float64(s.Length), ErrRange)
	}
	if err := s.Gas.check(); err != nil {
		return nil, err
	}
	if err := checkState(0, s.Temperature); err != nil {
		return nil, err
	}
	c, err := newCore(s)
	if err != nil {
		return nil, err
	}
	s.Cells = min(s.Cells, probeCells)
	c.probe, err = newCore(s)
	return c, err
}

func newCore(s Spec) (*Core, error) {
	c := &Core{spec: s, n: s.Cells, h: float64(s.Length) / float64(s.Cells), table: potentials()}
	gas, err := c.at(s.Temperature)
	if err != nil {
		return nil, err
	}
	c.gas, c.state.Temperature = gas, s.Temperature
	return c, nil
}

// at returns the properties of the gas at t.
func (c *Core) at(t unit.Kelvin) (atTemperature, error) {
	m := c.spec.Gas
	eta, a := m.Viscosity(t), float64(c.spec.Radius)
	b, cc, err := m.virial(t)
	if err != nil {
		return atTemperature{}, fmt.Errorf("%s at %v: %w: %w", m.Name, t, ErrRange, err)
	}
	rt := GasConstant * float64(t)
	kappa := rarefied(m, eta, a, t)
	g := a * a * kappa * kappa / (8 * eta * rt)
	if !(eta > 0) || !(g > 0) || math.IsInf(g, 0) || math.IsNaN(b+cc) {
		return atTemperature{}, fmt.Errorf("%s at %v: %w: viscosity %v Pa s", m.Name, t, ErrRange, eta)
	}
	return atTemperature{t, rt, b, cc, kappa, g}, nil
}

// State returns a copy of what the core remembers.
func (c *Core) State() State { return c.state }

// Restore sets what State returned, from this core or one of the same Spec.
func (c *Core) Restore(s State) error {
	gas, err := c.ends(s.A, s.B, s.Temperature)
	if err != nil {
		return err
	}
	for i := range c.n {
		if !(s.Density[i] >= 0) || math.IsInf(s.Density[i], 0) {
			return fmt.Errorf("core density %v mol/m³: %w", s.Density[i], ErrRange)
		}
	}
	if c.n < MaxCells && s.Density[c.n] != 0 {
		return fmt.Errorf("state of a finer core: %w: wanted one of %d volumes", ErrRange, c.n)
	}
	c.gas, c.state = gas, s
	return nil
}

// ends checks what the cells and the fibre are said to be.
func (c *Core) ends(pA, pB unit.Pascal, t unit.Kelvin) (atTemperature, error) {
	for _, p := range [...]unit.Pascal{pA, pB} {
		if err := checkState(p, t); err != nil {
			return atTemperature{}, fmt.Errorf("end of the core: %w", err)
		}
	}
	gas := c.gas
	if t != gas.t {
		var err error
		if gas, err = c.at(t); err != nil {
			return gas, err
		}
	}
	if _, ok := virialDensity(float64(max(pA, pB)), gas.rt, gas.b, gas.c); !ok {
		return gas, fmt.Errorf("%s at %v and %v: %w: the virial equation has no gas there", c.spec.Gas.Name, max(pA, pB), t, ErrRange)
	}
	return gas, nil
}

// Fill sets the channel to the steady state between pA and pB at t, as after a
// long wait, and forgets what entered. With SealedB it is uniform at pA.
func (c *Core) Fill(pA, pB unit.Pascal, t unit.Kelvin) error {
	gas, err := c.ends(pA, pB, t)
	if err != nil {
		return err
	}
	was, wasGas := c.state, c.gas
	c.gas, c.state = gas, State{Temperature: t, A: pA, B: pB}
	rho, _ := virialDensity(float64(max(pA, pB)), gas.rt, gas.b, gas.c)
	for i := range c.n {
		c.state.Density[i] = rho
	}
	if !c.settle() {
		c.gas, c.state = wasGas, was
		return fmt.Errorf("core between %v and %v: no steady state found", pA, pB)
	}
	copy(c.state.Density[:c.n], c.settled[:c.n])
	return nil
}

// Advance carries the gas on by dt, in which the ends go in a straight line
// from where they were to pA and pB, and the fibre comes to t. With dt = 0 the
// ends jump. Steps inside are chosen so that pressures are within about 1e-4
// of the largest; there is no limit to dt.
//
// It refuses dt < 0 (a reading that jumps back in time), pressures below zero
// (a gauge with an offset), values that are not finite, and states without a
// gas phase; the state is then what it was. It allocates nothing but the error.
func (c *Core) Advance(dt time.Duration, pA, pB unit.Pascal, t unit.Kelvin) error {
	if dt < 0 {
		return fmt.Errorf("step of %v: %w: time runs backwards", dt, ErrRange)
	}
	gas, err := c.ends(pA, pB, t)
	if err != nil {
		return err
	}
	was, wasGas := c.state, c.gas
	c.gas, c.state.Temperature = gas, t
	c.substeps, c.newtons = 0, 0
	if dt > 0 {
		if err := c.run(dt.Seconds(), float64(was.A), float64(pA), float64(was.B), float64(pB), accuracy); err != nil {
			c.gas, c.state = wasGas, was
			return err
		}
	}
	c.state.A, c.state.B = pA, pB
	return nil
}

// pressure returns the pressure of density rho.
func (g *atTemperature) pressure(rho float64) float64 {
	return g.rt * rho * (1 + rho*(g.b+g.c*rho))
}

// Cells returns the number of volumes.
func (c *Core) Cells() int { return c.n }

// Profile writes the pressure of each volume from A to B into dst, which must
// hold Cells values, and returns it. Volume i lies at (i+½)·Length/Cells.
func (c *Core) Profile(dst []unit.Pascal) []unit.Pascal {
	dst = dst[:min(len(dst), c.n)]
	for i := range dst {
		dst[i] = unit.Pascal(c.gas.pressure(c.state.Density[i]))
	}
	return dst
}

// Mean returns the mean pressure along the channel.
func (c *Core) Mean() unit.Pascal {
	sum := 0.0
	for i := range c.n {
		sum += c.gas.pressure(c.state.Density[i])
	}
	return unit.Pascal(sum / float64(c.n))
}

// Amount returns the moles in the channel.
func (c *Core) Amount() float64 {
	sum := 0.0
	for i := range c.n {
		sum += c.state.Density[i]
	}
	a := float64(c.spec.Radius)
	return sum * c.h * math.Pi * a * a
}

// Length returns the length of the channel.
func (c *Core) Length() unit.Metre { return c.spec.Length }

// At returns the pressure at z, such as the point of compression, linear
// between the middles of the volumes and the ends. Beyond the ends it is that
// of the end.
func (c *Core) At(z unit.Metre) unit.Pascal {
	x := float64(z)/c.h - 0.5 // in volumes from the middle of the first
	first, last := c.gas.pressure(c.state.Density[0]), c.gas.pressure(c.state.Density[c.n-1])
	endB := float64(c.state.B)
	if c.spec.SealedB {
		endB = last
	}
	switch {
	case !(x > -0.5):
		return c.state.A
	case x < 0:
		return unit.Pascal(first + (float64(c.state.A)-first)*(-2*x))
	case x >= float64(c.n)-0.5:
		return unit.Pascal(endB)
	case x > float64(c.n-1):
		return unit.Pascal(last + (endB-last)*2*(x-float64(c.n-1)))
	}
	i := min(int(x), c.n-2)
	f := x - float64(i)
	return unit.Pascal(c.gas.pressure(c.state.Density[i])*(1-f) + c.gas.pressure(c.state.Density[i+1])*f)
}
