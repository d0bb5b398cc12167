package flow

import (
	"errors"
	"fmt"
	"math"
)

const (
	// accuracy is the difference between one implicit step and two of half
	// its length, root mean square along the channel and relative to the
	// largest density, at which a step is accepted. What is kept is the
	// extrapolation of both, which is better.
	accuracy = 1e-3
	// newtonTolerance is the last change, relative to the largest density,
	// at which an iteration ends. It converges quadratically: what is left
	// after that change is some 1e-11.
	newtonTolerance = 3e-6
	newtonMost      = 40
	substepsMost    = 10000
)

// errRetry says that a step was not taken and wants to be shorter.
var errRetry = errors.New("step too long")

// run carries the state on by total seconds in steps of its own choice, the
// ends going in straight lines from a0 to a1 and from b0 to b1. On an error
// the state is somewhere between.
func (c *Core) run(total, a0, a1, b0, b1, tolerance float64) error {
	done, dt := 0.0, total
	for done < total {
		if c.substeps++; c.substeps > substepsMost {
			return fmt.Errorf("core: no end after %d steps", substepsMost)
		}
		dt = min(dt, total-done)
		end, mid := min(1, (done+dt)/total), min(1, (done+dt/2)/total)
		next, err := c.step(dt, tolerance, a0+(a1-a0)*mid, a0+(a1-a0)*end, b0+(b1-b0)*mid, b0+(b1-b0)*end)
		if err == nil {
			if done+dt == done {
				return nil
			}
			done += dt
		}
		if dt = next; !(dt > total*1e-13) {
			return fmt.Errorf("core: no solution at steps of %.3g s", dt)
		}
	}
	return nil
}

// step tries one step of dt seconds, the ends being at aMid, bMid halfway, and
// returns the length that the next should have. One implicit Euler step of dt
// and two of dt/2 stay between the start and the ends; their extrapolation is
// of second order and is kept where it does not fall below zero.
func (c *Core) step(dt, tolerance, aMid, a, bMid, b float64) (next float64, err error) {
	n := c.n
	rho, whole, half, start := c.rho[:n], c.whole[:n], c.half[:n], c.state.Density[:n]
	copy(rho, start)
	wholeA, wholeB, err := c.euler(dt, start, a, b)
	if err != nil {
		return dt / 8, err
	}
	copy(whole, rho)
	for i, r := range whole {
		rho[i] = 0.5 * (start[i] + r)
	}
	firstA, firstB, err := c.euler(dt/2, start, aMid, bMid)
	if err != nil {
		return dt / 8, err
	}
	copy(half, rho)
	copy(rho, whole)
	secondA, secondB, err := c.euler(dt/2, half, a, b)
	if err != nil {
		return dt / 8, err
	}
	differ, most, negative := 0.0, max(a, b)/c.gas.rt, false
	for i, r := range rho {
		differ += (r - whole[i]) * (r - whole[i])
		most = max(most, r, start[i])
		negative = negative || 2*r < whole[i]
	}
	ratio := 0.0
	if most > 0 {
		ratio = math.Sqrt(differ/float64(n)) / (tolerance * most)
	}
	grow := min(8, max(0.2, 0.9/math.Sqrt(max(ratio, 1e-9))))
	if ratio > 1 {
		return dt * min(grow, 0.7), errRetry
	}
	enteredA, enteredB := firstA+secondA, firstB+secondB
	if negative {
		copy(start, rho)
	} else {
		for i, r := range rho {
			start[i] = 2*r - whole[i]
		}
		enteredA, enteredB = 2*enteredA-wholeA, 2*enteredB-wholeB
	}
	c.state.EnteredA += enteredA
	c.state.EnteredB += enteredB
	return dt * grow, nil
}

// euler solves (ρ − from)·h/dt + ∂J = 0 for ρ with the ends at a and b Pa,
// from the guess in c.rho, and leaves ρ there. It returns the moles that
// entered at each end. dt = +Inf gives the steady state, where they have no
// meaning.
func (c *Core) euler(dt float64, from []float64, a, b float64) (enteredA, enteredB float64, err error) {
	n := c.n
	rhoA, okA := virialDensity(a, c.gas.rt, c.gas.b, c.gas.c)
	rhoB, okB := virialDensity(b, c.gas.rt, c.gas.b, c.gas.c)
	if !okA || !okB {
		return 0, 0, errRetry
	}
	c.node(0, rhoA)
	c.node(n+1, rhoB)
	rho, scale := c.rho[:n], max(rhoA, rhoB)
	for _, r := range from {
		scale = max(scale, r)
	}
	if scale == 0 {
		clear(rho)
		return 0, 0, nil
	}
	storage := c.h / dt
	change := math.Inf(1)
	for k := 0; k < newtonMost && !(change <= newtonTolerance*scale); k++ {
		for i, r := range rho {
			// The result lies between what was and the ends. A guess far off
			// may not, and the virial equation ends not far above.
			rho[i] = min(max(r, 0), scale)
			c.node(i+1, rho[i])
		}
		if change = c.newton(storage, from); math.IsNaN(change) {
			return 0, 0, errRetry
		}
	}
	if !(change <= newtonTolerance*scale) {
		return 0, 0, errRetry
	}
	gained := 0.0
	for i, r := range rho {
		rho[i] = max(r, 0) // an empty volume may be left just below, by rounding
		gained += rho[i] - from[i]
	}
	enteredA, enteredB = c.flux[0]*dt, -c.flux[n]*dt
	// Fluxes over long steps are differences of large numbers. What came in is
	// what the volumes gained; the fluxes say through which end.
	if rest := gained*c.h - enteredA - enteredB; math.Abs(enteredA) >= math.Abs(enteredB) {
		enteredA += rest
	} else {
		enteredB += rest
	}
	radius := float64(c.spec.Radius)
	area := math.Pi * radius * radius
	return enteredA * area, enteredB * area, nil
}

// node sets the values at node i, counted with end A as 0, for density rho.
func (c *Core) node(i int, rho float64) {
	g := &c.gas
	br, cr := g.b*rho, g.c*rho*rho
	z := 1 + br + cr
	psi, h := c.table.potential(g.rt * rho * z / g.kappa)
	c.psi[i], c.dpsi[i] = psi, h*g.rt*(1+2*br+3*cr)/g.kappa
	c.iz[i] = 1 / z
	c.diz[i] = -(g.b + 2*g.c*rho) * c.iz[i] * c.iz[i]
}

// face sets the flux from node i to node i+1 and its derivatives; k is G over
// the distance between them.
func (c *Core) face(i int, k float64) {
	mean := 0.5 * (c.iz[i] + c.iz[i+1]) * k
	rise := c.psi[i+1] - c.psi[i]
	c.flux[i] = -mean * rise
	c.left[i] = mean*c.dpsi[i] - 0.5*k*rise*c.diz[i]
	c.right[i] = -mean*c.dpsi[i+1] - 0.5*k*rise*c.diz[i+1]
}

// newton does one iteration on c.rho: it linearises the fluxes, solves the
// tridiagonal system, updates c.rho and c.flux, and returns the largest change
// of a density, NaN where there is none.
func (c *Core) newton(storage float64, from []float64) (change float64) {
	c.newtons++
	n := c.n
	k := c.gas.g / c.h
	c.face(0, 2*k) // the end is half a volume from the first middle
	for i := 1; i < n; i++ {
		c.face(i, k)
	}
	if c.spec.SealedB {
		c.flux[n], c.left[n], c.right[n] = 0, 0, 0
	} else {
		c.face(n, 2*k)
	}
	// Row i: storage·(ρ−from) + J(i+1) − J(i) = 0, by Thomas elimination.
	rho, up, rhs := c.rho[:n], c.up[:n], c.rhs[:n]
	u, v := 0.0, 0.0
	for i := range rho {
		r := c.flux[i] - c.flux[i+1] - storage*(rho[i]-from[i])
		lower := 0.0
		if i > 0 {
			lower = -c.left[i]
		}
		inverse := 1 / (storage + c.left[i+1] - c.right[i] - lower*u)
		u, v = c.right[i+1]*inverse, (r-lower*v)*inverse
		up[i], rhs[i] = u, v
	}
	// Back, carrying each flux along its linearisation.
	delta, next := 0.0, 0.0
	for i := n - 1; i >= 0; i-- {
		next = delta
		delta = rhs[i]
		if i < n-1 {
			delta -= up[i] * next
		}
		c.flux[i+1] += c.left[i+1]*delta + c.right[i+1]*next
		rho[i] += delta
		if delta != delta {
			return delta
		}
		change = max(change, math.Abs(delta))
	}
	c.flux[0] += c.right[0] * delta
	return change
}
