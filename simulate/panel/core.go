package panel

import (
	"errors"
	"math"
)

// Core is the gas in the hollow core between two ends whose state is given.
// It is isothermal: gas in a core of tens of micrometres takes the glass's
// temperature within microseconds.
//
// Flow between two cross-sections is the viscous one of Poiseuille plus
// Knudsen's molecular one with his interpolation between them,
//
//	ṅ = (πa²/RT) [a²/(16η) Δ(p²) + Z D_K Δp]/Δz,  D_K = (2/3) a v̄,
//	Z = (1 + 2.507 s)/(1 + 3.095 s),  s = a/ℓ,  ℓ = (η/p) √(πRT/2M)
//
// M. Knudsen, Ann. Phys. 333, 75 (1909), doi:10.1002/andp.19093330106. The
// numbers of Z hold for air and are taken for every gas.
type Core struct {
	radius, length float64 // m
	molarMass      float64 // kg/mol
	t              float64 // K

	volume float64   // m³, of one finite volume
	across float64   // πa²/(RTΔz)
	moles  []float64 // mol, both species together
	air    []float64 // mol

	// Scratch.
	p, old, target, residual []float64
	face, faceStage          []float64 // mol/s, towards the second end
	lower, diag, upper       []float64
	coefficient              []float64 // Z D_K at each face
}

// NewCore returns a core of radius and length in m, cut into cells finite
// volumes, filled with the working gas g at s.
func NewCore(g Gas, radius, length float64, cells int, s State) (*Core, error) {
	if !(radius > 0) || !(length > 0) || cells < 2 || !(s.T > 0) || !(s.P >= 0) {
		return nil, errors.New("panel: a core needs a radius, a length, two finite volumes and a state")
	}
	c := &Core{radius: radius, length: length, molarMass: g.MolarMass, t: s.T}
	c.volume = math.Pi * radius * radius * length / float64(cells)
	for _, v := range []*[]float64{&c.moles, &c.air, &c.p, &c.old, &c.target, &c.residual, &c.lower, &c.diag, &c.upper} {
		*v = make([]float64, cells)
	}
	for _, v := range []*[]float64{&c.face, &c.faceStage, &c.coefficient} {
		*v = make([]float64, cells+1)
	}
	for i := range c.moles {
		c.moles[i] = s.P * c.volume / (R * s.T)
		c.air[i] = c.moles[i] * s.Air
	}
	return c, nil
}

// viscosity of argon in Pa s: Lemmon & Jacobsen, Int. J. Thermophys. 25, 21
// (2004), dilute gas. The density term, +0.8 % at 10 bar, is left out.
func viscosity(t, molarMass float64) float64 {
	const sigma, eps = 0.335, 143.2 // nm, K
	x := math.Log(t / eps)
	omega := math.Exp(0.431 + x*(-0.4623+x*(0.08406+x*(0.005341-x*0.00331))))
	return 1e-6 * 0.0266958 * math.Sqrt(molarMass*1e3*t) / (sigma * sigma * omega)
}

// Moles returns what the core holds, in mol.
func (c *Core) Moles() (gas, air float64) {
	for i := range c.moles {
		gas += c.moles[i] - c.air[i]
		air += c.air[i]
	}
	return gas, air
}

// At returns the state of the gas at a fraction of the length, 0 to 1.
func (c *Core) At(fraction float64) State {
	x := min(max(fraction, 0), 1)*float64(len(c.moles)) - 0.5
	i := min(max(int(math.Floor(x)), 0), len(c.moles)-2)
	w := min(max(x-float64(i), 0), 1)
	moles := c.moles[i]*(1-w) + c.moles[i+1]*w
	airMoles := c.air[i]*(1-w) + c.air[i+1]*w
	return State{P: moles * R * c.t / c.volume, T: c.t, Air: airMoles / max(moles, 1e-30)}
}

// Exchange is what left the core at its two ends, in mol; negative where gas
// went in.
type Exchange struct {
	Gas, Air [2]float64
}

// Advance integrates over dt seconds at temperature t while the states at the
// ends move linearly from the first to the second pair. The method is the
// L-stable singly diagonal implicit Runge–Kutta one of order 2 (Alexander,
// SIAM J. Numer. Anal. 14, 1006 (1977)), and backward Euler, which never
// undershoots, where that would pass through vacuum. Composition follows with
// implicit upwind differences and binary diffusion.
func (c *Core) Advance(dt, t float64, before, after [2]State) (Exchange, error) {
	c.t = t
	c.across = math.Pi * c.radius * c.radius * float64(len(c.moles)) / (R * t * c.length)
	copy(c.old, c.moles)
	inflow, err := c.second(dt, before, after)
	if err != nil {
		copy(c.moles, c.old)
		copy(c.target, c.old)
		if err := c.solve(dt, [2]float64{after[0].P, after[1].P}); err != nil {
			return Exchange{}, err
		}
		inflow = c.faceStage[0]
	}
	// The flow through the other faces is what the volumes between kept back,
	// so that moles agree to rounding however stiff the step was.
	c.face[0] = inflow
	for i := range c.moles {
		c.face[i+1] = c.face[i] - (c.moles[i]-c.old[i])/dt
	}
	return c.carryAir(dt, after), nil
}

var errUndershoot = errors.New("panel: the step would pass through vacuum")

// second tries a step of order 2 and returns the mean flow in at the first end.
func (c *Core) second(dt float64, before, after [2]State) (float64, error) {
	const gamma = 1 - math.Sqrt2/2
	copy(c.target, c.old)
	inflow := 0.0
	for stage, w := range [2]float64{gamma, 1} {
		ends := [2]float64{
			before[0].P + w*(after[0].P-before[0].P),
			before[1].P + w*(after[1].P-before[1].P),
		}
		if err := c.solve(gamma*dt, ends); err != nil {
			return 0, err
		}
		if stage == 1 {
			return inflow + gamma*c.faceStage[0], nil
		}
		inflow = (1 - gamma) * c.faceStage[0]
		for i := range c.target {
			c.target[i] = c.old[i] + (1-gamma)*dt*(c.faceStage[i]-c.faceStage[i+1])
			if c.target[i] < 0 {
				return 0, errUndershoot
			}
		}
	}
	return inflow, nil
}

// conductance is the factor before the bracket of Core: to the ends it is half
// a finite volume only.
func (c *Core) conductance(face int) float64 {
	if face == 0 || face == len(c.moles) {
		return 2 * c.across
	}
	return c.across
}

// flows writes the flow through every face from the pressures p and ends.
func (c *Core) flows(ends [2]float64, eta float64) {
	viscous := c.radius * c.radius / (16 * eta)
	left := ends[0]
	for i := range c.faceStage {
		right := ends[1]
		if i < len(c.p) {
			right = c.p[i]
		}
		c.faceStage[i] = c.conductance(i) * (viscous*(left*left-right*right) + c.coefficient[i]*(left-right))
		left = right
	}
}

// solve finds the moles for which moles = target + step·(inflow − outflow),
// by Newton on the pressures. It leaves the flows in faceStage.
func (c *Core) solve(step float64, ends [2]float64) error {
	n := len(c.moles)
	perMole := R * c.t / c.volume
	for i := range c.p {
		c.p[i] = c.moles[i] * perMole
	}
	eta := viscosity(c.t, c.molarMass)
	mean := math.Sqrt(8 * R * c.t / (math.Pi * c.molarMass))
	slip := eta * math.Sqrt(math.Pi*R*c.t/(2*c.molarMass)) // p·ℓ
	viscous := c.radius * c.radius / (8 * eta)
	for iteration := 0; ; iteration++ {
		left := ends[0]
		for i := range c.coefficient {
			right := ends[1]
			if i < n {
				right = c.p[i]
			}
			s := c.radius * max(left+right, 0) / 2 / slip
			c.coefficient[i] = (1 + 2.507*s) / (1 + 3.095*s) * 2.0 / 3 * c.radius * mean
			left = right
		}
		c.flows(ends, eta)
		worst := 0.0
		for i := range c.p {
			c.residual[i] = c.p[i]/perMole - c.target[i] - step*(c.faceStage[i]-c.faceStage[i+1])
			in, out := c.conductance(i)*step, c.conductance(i+1)*step
			c.diag[i] = 1/perMole + in*(viscous*c.p[i]+c.coefficient[i]) + out*(viscous*c.p[i]+c.coefficient[i+1])
			c.lower[i], c.upper[i] = 0, 0
			if i > 0 {
				c.lower[i] = -in * (viscous*c.p[i-1] + c.coefficient[i])
			}
			if i < n-1 {
				c.upper[i] = -out * (viscous*c.p[i+1] + c.coefficient[i+1])
			}
		}
		tridiagonal(c.lower, c.diag, c.upper, c.residual)
		for i := range c.p {
			d := c.residual[i]
			if c.p[i]-d < 0 { // no step through vacuum
				d = 0.9 * c.p[i]
			}
			c.p[i] -= d
			worst = max(worst, math.Abs(d)/(c.p[i]+1e-6))
		}
		if worst < 1e-6 { // what is left is of the order of its square
			break
		}
		if iteration == 50 || math.IsNaN(worst) {
			return errors.New("panel: flow through the core found no solution")
		}
	}
	c.flows(ends, eta)
	for i := range c.p {
		c.moles[i] = c.p[i] / perMole
	}
	return nil
}

// carryAir moves air with the mean flow of the step and by diffusion.
func (c *Core) carryAir(dt float64, ends [2]State) Exchange {
	n := len(c.moles)
	dz := c.length / float64(n)
	// Binary diffusion of air in argon, 0.2 cm²/s at 1 bar: order of
	// magnitude, common practice, no source.
	exchange := 0.2e-4 * 1e5 / (R * c.t) * math.Pi * c.radius * c.radius / dz // mol/s
	for i := range n {
		in, out := c.face[i], c.face[i+1]
		c.diag[i] = c.moles[i]/dt + max(out, 0) + max(-in, 0) + 2*exchange
		c.lower[i], c.upper[i] = 0, 0
		c.residual[i] = c.air[i] / dt
		into, back := max(in, 0)+exchange, max(-out, 0)+exchange
		if i > 0 {
			c.lower[i] = -into
		} else {
			c.residual[i] += into * ends[0].Air
		}
		if i < n-1 {
			c.upper[i] = -back
		} else {
			c.residual[i] += back * ends[1].Air
		}
	}
	tridiagonal(c.lower, c.diag, c.upper, c.residual)
	x := c.residual
	var e Exchange
	for i := range n + 1 {
		left, right := ends[0].Air, ends[1].Air
		if i > 0 {
			left = x[i-1]
		}
		if i < n {
			right = x[i]
		}
		up := left
		if c.face[i] < 0 {
			up = right
		}
		moved := dt * (c.face[i]*up + exchange*(left-right))
		if i > 0 {
			c.air[i-1] -= moved
		}
		if i < n {
			c.air[i] += moved
		}
		switch i {
		case 0:
			e.Air[0] = -moved
			e.Gas[0] = -dt*c.face[i] + moved
		case n:
			e.Air[1] = moved
			e.Gas[1] = dt*c.face[i] - moved
		}
	}
	return e
}

// tridiagonal solves in place; the solution replaces rhs. No pivoting: the
// matrices here are dominated by their diagonal.
func tridiagonal(lower, diag, upper, rhs []float64) {
	for i := 1; i < len(rhs); i++ {
		f := lower[i] / diag[i-1]
		diag[i] -= f * upper[i-1]
		rhs[i] -= f * rhs[i-1]
	}
	last := len(rhs) - 1
	rhs[last] /= diag[last]
	for i := last - 1; i >= 0; i-- {
		rhs[i] = (rhs[i] - upper[i]*rhs[i+1]) / diag[i]
	}
}
