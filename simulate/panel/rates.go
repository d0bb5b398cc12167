package panel

import (
	"math"
	"slices"
)

// flux is what a passage carries from its first to its second node per
// second: moles of gas, moles of air, enthalpy.
type flux [perNode]float64

func (n *Network) end(y []float64, v Node) State {
	if v < 0 {
		return n.reservoirs[-v-1]
	}
	return n.stateOf(y, v)
}

func (n *Network) flow(p *passage, a, b State) flux {
	if p.opening == 0 {
		return flux{}
	}
	f := p.opening * p.law.Flow(a, b)
	up := a
	if p.backward {
		up = b
	}
	g := f * (1 - up.Air)
	x := f * up.Air
	return flux{g, x, (g*n.cp[0] + x*n.cp[1]) * up.T}
}

func (c *contact) conductance(p float64) float64 {
	const convection, molecular = 10e5, 50.0 // Pa
	p = max(p, 0)
	return (c.still + c.moving*math.Sqrt(p/convection)) * p / (p + molecular)
}

// heat is the power from the gas at s into the wall at t.
func (c *contact) heat(s State, t float64) float64 { return c.conductance(s.P) * (s.T - t) }

// upwind settles, for one step, from which side each passage takes composition
// and temperature. Were that to change within a step, the linearised method
// would take from a volume a species that it does not hold.
func (n *Network) upwind() {
	for i := range n.passages {
		p := &n.passages[i]
		if p.opening == 0 {
			continue
		}
		if f := p.law.Flow(n.end(n.y, p.from), n.end(n.y, p.to)); f != 0 {
			p.backward = f < 0
		}
	}
}

// rates writes dy/dt.
func (n *Network) rates(y, dydt []float64) {
	clear(dydt)
	for i := range n.passages {
		p := &n.passages[i]
		if p.opening == 0 {
			continue
		}
		f := n.flow(p, n.end(y, p.from), n.end(y, p.to))
		from, to := n.at(p.from), n.at(p.to)
		for k, v := range f {
			dydt[from+k] -= v
			dydt[to+k] += v
		}
	}
	for i := range n.contacts {
		c := &n.contacts[i]
		w := n.wallAt(c.wall)
		q := c.heat(n.stateOf(y, c.volume), n.walls[c.wall].t)
		dydt[n.at(c.volume)+2] -= q
		dydt[w] += q
	}
	for i := range n.walls {
		w := &n.walls[i]
		at := n.wallAt(Wall(i))
		q := w.to * (w.t - w.room)
		dydt[at] -= q
		dydt[n.roomAt()] += q
	}
}

// jacobian writes ∂(dy/dt)/∂y, rows of all components by columns of the inner
// ones, from one-sided differences of every passage by itself. What one end
// gains the other loses in the same number, so that the columns of moles sum
// to zero and the integrator keeps them to rounding.
func (n *Network) jacobian(y []float64) {
	m := n.inner()
	j := n.ws.jac
	clear(j)
	for i := range n.passages {
		p := &n.passages[i]
		if p.opening == 0 {
			continue
		}
		a, b := n.end(y, p.from), n.end(y, p.to)
		base := n.flow(p, a, b)
		from, to := n.at(p.from), n.at(p.to)
		for side, v := range [2]Node{p.from, p.to} {
			if v < 0 {
				continue
			}
			for k := range perNode {
				col := n.at(v) + k
				d := n.nudge(y, col)
				old := y[col]
				y[col] += d
				s := n.stateOf(y, v)
				d = y[col] - old
				y[col] = old
				var f flux
				if side == 0 {
					f = n.flow(p, s, b)
				} else {
					f = n.flow(p, a, s)
				}
				for q := range f {
					slope := (f[q] - base[q]) / d
					j[(from+q)*m+col] -= slope
					j[(to+q)*m+col] += slope
				}
			}
		}
	}
	for i := range n.contacts {
		c := &n.contacts[i]
		w := n.wallAt(c.wall)
		e := n.at(c.volume) + 2
		t := n.walls[c.wall].t
		base := c.heat(n.stateOf(y, c.volume), t)
		for k := range perNode {
			col := n.at(c.volume) + k
			old := y[col]
			y[col] += n.nudge(y, col)
			d := y[col] - old
			slope := (c.heat(n.stateOf(y, c.volume), t) - base) / d
			y[col] = old
			j[e*m+col] -= slope
			j[w*m+col] += slope
		}
	}
	n.ws.busy = n.ws.busy[:0]
	for r := m; r < len(y); r++ {
		if slices.ContainsFunc(j[r*m:r*m+m], func(v float64) bool { return v != 0 }) {
			n.ws.busy = append(n.ws.busy, r)
		}
	}
}

// nudge returns a step of component i for a difference quotient.
func (n *Network) nudge(y []float64, i int) float64 {
	v := i / perNode * perNode
	if i%perNode == 2 {
		return 1e-7 * y[i]
	}
	return 1e-7 * (y[v] + y[v+1])
}
