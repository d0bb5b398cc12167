package panel

import "math"

// The integrator is RODAS3, an L-stable, stiffly accurate Rosenbrock method
// of four stages and order 3 with an embedded solution of order 2: Sandu,
// Verwer, Blom, Spee, Carmichael & Potra, Atmos. Environ. 31, 3459 (1997),
// doi:10.1016/S1352-2310(97)83212-8, in the form that needs no product with
// the Jacobian (Hairer & Wanner, Solving Ordinary Differential Equations II,
// 2nd ed. (1996), section IV.7).
const (
	rosGamma = 0.5
	relative = 1e-5
	// Moles and joules below these count as nothing: about 1e-3 Pa in a
	// volume of 10 cm³.
	absoluteMoles = 4e-12
	absoluteJoule = 1e-8
	// Mole fractions below this count as nothing.
	trace = 1e-7
)

// workspace is the integrator's scratch, allocated once.
type workspace struct {
	jac           []float64 // all × inner
	lu            []float64 // inner × inner
	pivot         []int
	busy          []int // rows behind the inner ones in which jac is not zero
	f, yn, k1, k2 []float64
	k3, k4, rhs   []float64
}

func (w *workspace) size(all, inner int) {
	w.jac = make([]float64, all*inner)
	w.lu = make([]float64, inner*inner)
	w.pivot = make([]int, inner)
	for _, p := range []*[]float64{&w.f, &w.yn, &w.k1, &w.k2, &w.k3, &w.k4, &w.rhs} {
		*p = make([]float64, all)
	}
}

// integrate carries y over dt.
func (n *Network) integrate(dt float64) error {
	left := dt
	if n.h <= 0 {
		n.h = 1e-4
	}
	for left > 0 {
		n.upwind()
		n.jacobian(n.y)
		n.rates(n.y, n.ws.f)
		for {
			h := min(n.h, left)
			if h < 1e-12*(1+dt) {
				return errStep
			}
			bad := n.step(h)
			if bad <= 1 {
				copy(n.y, n.ws.yn)
				// A step cut short by the end says nothing against the longer one.
				if grown := h * growth(bad); grown > n.h || h == n.h {
					n.h = grown
				}
				left -= h
				break
			}
			n.h = h * growth(bad)
		}
	}
	return nil
}

// growth returns the factor on the step after an error bad times the allowed.
func growth(bad float64) float64 {
	if !(bad < math.Inf(1)) {
		return 0.1
	}
	return min(5, max(0.1, 0.9*math.Pow(max(bad, 1e-9), -1.0/3)))
}

// step tries one step of h from y, leaves the result in ws.yn and returns the
// estimated error as a multiple of the allowed one, +Inf where moles or
// energy would turn negative.
func (n *Network) step(h float64) float64 {
	ws := &n.ws
	shift := 1 / (h * rosGamma)
	if !n.factor(shift) {
		return math.Inf(1)
	}
	y := n.y
	for i := range y {
		ws.rhs[i] = ws.f[i]
	}
	n.solve(shift, ws.rhs, ws.k1)
	for i := range y {
		ws.rhs[i] = ws.f[i] + 4/h*ws.k1[i]
	}
	n.solve(shift, ws.rhs, ws.k2)
	for i := range y {
		ws.yn[i] = y[i] + 2*ws.k1[i]
	}
	if !n.sound(ws.yn) {
		return math.Inf(1)
	}
	n.rates(ws.yn, ws.rhs)
	for i := range y {
		ws.rhs[i] += (ws.k1[i] - ws.k2[i]) / h
	}
	n.solve(shift, ws.rhs, ws.k3)
	for i := range y {
		ws.yn[i] += ws.k3[i]
	}
	if !n.sound(ws.yn) {
		return math.Inf(1)
	}
	n.rates(ws.yn, ws.rhs)
	for i := range y {
		ws.rhs[i] += (ws.k1[i] - ws.k2[i] - 8.0/3*ws.k3[i]) / h
	}
	n.solve(shift, ws.rhs, ws.k4)
	worst := 0.0
	for i := range y {
		ws.yn[i] += ws.k4[i]
		if i < n.inner() {
			worst = max(worst, math.Abs(ws.k4[i])/(n.floor(i)+relative*math.Abs(y[i])))
		}
	}
	if !n.sound(ws.yn) || math.IsNaN(worst) {
		return math.Inf(1)
	}
	return worst
}

func (n *Network) floor(i int) float64 {
	if i%perNode == 2 {
		return absoluteJoule
	}
	v := i / perNode * perNode
	return absoluteMoles + trace*(n.y[v]+n.y[v+1])
}

// sound reports whether every volume holds gas and energy, and no species less
// than nothing by more than errors within the tolerance add up to.
func (n *Network) sound(y []float64) bool {
	const below = -10 * trace
	for v := range n.volumes {
		i := v * perNode
		total := y[i] + y[i+1]
		least := below*total - absoluteMoles
		if !(total > 0 && y[i+2] > 0 && y[i] > least && y[i+1] > least) {
			return false
		}
	}
	return true
}

// factor makes the LU factors of shift·1 − J on the inner components, with
// partial pivoting.
func (n *Network) factor(shift float64) bool {
	m := n.inner()
	lu := n.ws.lu
	for i, v := range n.ws.jac[:m*m] {
		lu[i] = -v
	}
	for i := range m {
		lu[i*m+i] += shift
	}
	for c := range m {
		p, big := c, math.Abs(lu[c*m+c])
		for r := c + 1; r < m; r++ {
			if a := math.Abs(lu[r*m+c]); a > big {
				p, big = r, a
			}
		}
		if !(big > 0) {
			return false
		}
		n.ws.pivot[c] = p
		rowC := lu[c*m : c*m+m]
		if p != c {
			rowP := lu[p*m : p*m+m]
			for k := range rowC {
				rowC[k], rowP[k] = rowP[k], rowC[k]
			}
		}
		inv := 1 / rowC[c]
		for r := c + 1; r < m; r++ {
			row := lu[r*m : r*m+m]
			if row[c] == 0 {
				continue
			}
			f := row[c] * inv
			row[c] = f
			for k := c + 1; k < m; k++ {
				row[k] -= f * rowC[k]
			}
		}
	}
	return true
}

// solve finds k with (shift·1 − J) k = rhs. The components behind the inner
// ones follow by substitution, because nothing depends on them.
func (n *Network) solve(shift float64, rhs, k []float64) {
	m := n.inner()
	lu := n.ws.lu
	copy(k, rhs)
	for c := range m {
		if p := n.ws.pivot[c]; p != c {
			k[c], k[p] = k[p], k[c]
		}
	}
	for r := 1; r < m; r++ {
		s := k[r]
		for c, l := range lu[r*m : r*m+r] {
			s -= l * k[c]
		}
		k[r] = s
	}
	for r := m - 1; r >= 0; r-- {
		s := k[r]
		for c := r + 1; c < m; c++ {
			s -= lu[r*m+c] * k[c]
		}
		k[r] = s / lu[r*m+r]
	}
	for r := m; r < len(rhs); r++ {
		k[r] = rhs[r] / shift
	}
	for _, r := range n.ws.busy {
		s := rhs[r]
		for c, v := range n.ws.jac[r*m : r*m+m] {
			s += v * k[c]
		}
		k[r] = s / shift
	}
}
