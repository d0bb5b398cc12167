package flow

import (
	"math"
	"time"

	"barline/model/unit"
)

const (
	// probeCells is the grid that TimeToSettle runs on: against the finest
	// grid its times differ by 0.1 % (settle_test.go).
	probeCells = 32
	// settleHorizon is the longest wait that TimeToSettle answers with.
	settleHorizon = 30 * 24 * time.Hour
)

// settle puts the steady state between the present ends into c.settled, from
// the present profile as a guess. It reports whether there is one.
func (c *Core) settle() bool {
	n := c.n
	if c.spec.SealedB || c.state.A == c.state.B {
		rho, ok := virialDensity(float64(c.state.A), c.gas.rt, c.gas.b, c.gas.c)
		for i := range n {
			c.settled[i] = rho
		}
		return ok
	}
	a, b := float64(c.state.A), float64(c.state.B)
	copy(c.rho[:n], c.state.Density[:n])
	if _, _, err := c.euler(math.Inf(1), c.state.Density[:n], a, b); err != nil {
		// From far off: a uniform guess at the higher end always comes down.
		rho, _ := virialDensity(max(a, b), c.gas.rt, c.gas.b, c.gas.c)
		for i := range n {
			c.rho[i] = rho
		}
		if _, _, err := c.euler(math.Inf(1), c.state.Density[:n], a, b); err != nil {
			return false
		}
	}
	copy(c.settled[:n], c.rho[:n])
	return true
}

// gap returns how far the profile is from c.settled where it is farthest, in
// Pa, positive where gas has yet to come in.
func (c *Core) gap() (worst float64) {
	for i := range c.n {
		d := c.gas.pressure(c.settled[i]) - c.gas.pressure(c.state.Density[i])
		if math.Abs(d) > math.Abs(worst) {
			worst = d
		}
	}
	return worst
}

// Lag returns how far the gas is from the steady state between the present
// ends, where it is farthest: positive where it has yet to rise, zero where no
// steady state is found.
func (c *Core) Lag() unit.Pascal {
	if !c.settle() {
		return 0
	}
	return unit.Pascal(c.gap())
}

// TimeToSettle returns how long it takes until the pressure is within
// tolerance of the steady state everywhere, if the ends and the fibre stay as
// they are. It runs ahead on a coarse grid and leaves the state alone. ok is
// false for a tolerance that is not above zero and for waits beyond 30 days.
func (c *Core) TimeToSettle(tolerance unit.Pascal) (wait time.Duration, ok bool) {
	if !(tolerance > 0) || !c.settle() {
		return 0, false
	}
	if math.Abs(c.gap()) <= float64(tolerance) {
		return 0, true
	}
	p := c.probe
	p.gas = c.gas
	p.state = State{Temperature: c.state.Temperature, A: c.state.A, B: c.state.B}
	coarsen(p.state.Density[:p.n], c.state.Density[:c.n])
	if !p.settle() {
		return 0, false
	}
	p.substeps = 0
	a, b := float64(p.state.A), float64(p.state.B)
	bound, gap := float64(tolerance), math.Abs(p.gap())
	var t float64
	// A thousandth of the time that the core would take at its present
	// pressure; the step control finds its own way from there.
	dt := 1e-3 * p.relaxation()
	for gap > bound {
		if p.substeps++; p.substeps > substepsMost || t > settleHorizon.Seconds() {
			return 0, false
		}
		most := 0.0
		for i := range p.n {
			most = max(most, p.gas.pressure(p.state.Density[i]))
		}
		next, err := p.step(dt, 0.02*gap/max(most, bound), a, a, b, b)
		if err == nil {
			was := gap
			gap = math.Abs(p.gap())
			if gap <= bound {
				// Tails are exponential or slower: interpolate the logarithm.
				f := 1.0
				if gap > 0 && gap < was {
					f = math.Log(was/bound) / math.Log(was/gap)
				}
				t += dt * f
				break
			}
			t += dt
		}
		dt = next
	}
	return time.Duration(t * 1e9), true
}

// relaxation returns the slowest time constant in s of small deviations from
// the present mean pressure.
func (c *Core) relaxation() float64 {
	mean := 0.0
	for i := range c.n {
		mean += c.state.Density[i]
	}
	c.node(0, max(mean/float64(c.n), 0))
	k := math.Pi / float64(c.spec.Length)
	if c.spec.SealedB {
		k /= 2
	}
	return 1 / (c.gas.g * c.iz[0] * c.dpsi[0] * k * k)
}

// coarsen writes the means of fine over the volumes of dst, which has as many
// values or fewer. The amount of gas is the same.
func coarsen(dst, fine []float64) {
	ratio := float64(len(fine)) / float64(len(dst))
	for i := range dst {
		from, to := float64(i)*ratio, float64(i+1)*ratio
		sum := 0.0
		for j := int(from); j < len(fine) && float64(j) < to; j++ {
			sum += fine[j] * (min(to, float64(j+1)) - max(from, float64(j)))
		}
		dst[i] = sum / ratio
	}
}
