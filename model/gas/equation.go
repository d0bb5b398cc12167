package gas

import "math"

// equation is a reference equation of state: the residual Helmholtz energy
// over RT as a function of δ = ρ/rhoRed and τ = tRed/T,
//
//	αr = Σ n δ^d τ^t exp(−δ^l)                    (exp = 1 for l = 0)
//	   + Σ n δ^d τ^t exp(−η(δ−ε)² − β(τ−γ)²)
//
// so that p = ρRT(1 + δ ∂αr/∂δ). R is the one each equation was made with.
// The form is that of R. Span, Multiparameter Equations of State, Springer
// (2000), section 3.1.
type equation struct {
	source       string
	r            float64 // J/(mol K)
	tRed, rhoRed float64 // K, mol/m³
	power        []powerTerm
	bell         []bellTerm
}

type powerTerm struct {
	n, t float64
	d, l int
}

type bellTerm struct {
	n, t float64
	d    int
	eta, epsilon,
	beta, gamma float64
}

const (
	mostExponent = 5  // l runs from 0 to 4
	mostDegree   = 12 // d runs from 1 to 11
	mostBells    = 11
)

// fluid is an equation of state at one temperature: polynomials in δ, one for
// each exponential, and the bells with their temperature factors.
type fluid struct {
	of     *equation
	t      float64 // K
	poly   [mostExponent][mostDegree]float64
	degree [mostExponent]int // of each polynomial, −1 where it is absent
	bell   [mostBells]float64
}

// set moves the fluid to temperature t.
func (f *fluid) set(e *equation, t float64) {
	f.of, f.t = e, t
	tau := e.tRed / t
	logTau := math.Log(tau)
	f.poly = [mostExponent][mostDegree]float64{}
	f.degree = [mostExponent]int{-1, -1, -1, -1, -1}
	for i := range e.power {
		term := &e.power[i]
		f.poly[term.l][term.d] += term.n * math.Exp(term.t*logTau)
		f.degree[term.l] = max(f.degree[term.l], term.d)
	}
	for i := range e.bell {
		term := &e.bell[i]
		dt := tau - term.gamma
		f.bell[i] = term.n * math.Exp(term.t*logTau-term.beta*dt*dt)
	}
}

// residual returns αr and δ·∂αr/∂δ, δ²·∂²αr/∂δ² at the molar density rho.
func (f *fluid) residual(rho float64) (a, da, dda float64) {
	delta := rho / f.of.rhoRed
	power := 1.0 // δ^l
	for l := range mostExponent {
		top := f.degree[l]
		if l > 0 {
			power *= delta
		}
		if top < 0 {
			continue
		}
		// Horner's scheme with its derivatives: Σ c δ^d, and what δ∂/∂δ and
		// δ²∂²/∂δ² make of it.
		row := &f.poly[l]
		var p, dp, ddp float64
		for d := top; d >= 0; d-- {
			ddp = ddp*delta + dp
			dp = dp*delta + p
			p = p*delta + row[d]
		}
		dp, ddp = dp*delta, 2*ddp*delta*delta
		if l > 0 {
			e := math.Exp(-power)
			lp := float64(l) * power // l δ^l
			// (P e^{−δ^l}): each derivative brings −lδ^l down.
			dda += e * (ddp - 2*lp*dp + (lp*lp-float64(l-1)*lp)*p)
			da += e * (dp - lp*p)
			a += e * p
			continue
		}
		a, da, dda = a+p, da+dp, dda+ddp
	}
	for i := range f.of.bell {
		term := &f.of.bell[i]
		x := delta - term.epsilon
		d := float64(term.d)
		v := f.bell[i] * integerPower(delta, term.d) * math.Exp(-term.eta*x*x)
		q := d - 2*term.eta*x*delta // δ ∂ln/∂δ
		a += v
		da += v * q
		dda += v * (q*q - d - 2*term.eta*delta*delta)
	}
	return a, da, dda
}

func integerPower(x float64, n int) float64 {
	v := x
	for range n - 1 {
		v *= x
	}
	return v
}

// pressure returns p and ∂p/∂ρ at the molar density rho.
func (f *fluid) pressure(rho float64) (p, slope float64) {
	_, da, dda := f.residual(rho)
	rt := f.of.r * f.t
	return rho * rt * (1 + da), rt * (1 + 2*da + dda)
}

// virials returns B in m³/mol and C in m⁶/mol² of Z = 1 + Bρ + Cρ²: the first
// two coefficients of ∂αr/∂δ at zero density.
func (f *fluid) virials() (b, c float64) {
	var a1, a2 float64 // αr = a1 δ + a2 δ² + …
	for l := range mostExponent {
		a1 += f.poly[l][1]
		a2 += f.poly[l][2]
		if l == 1 { // e^{−δ} brings −δ down
			a2 -= f.poly[l][1]
		}
	}
	for i := range f.of.bell {
		term := &f.of.bell[i]
		v := f.bell[i] * math.Exp(-term.eta*term.epsilon*term.epsilon)
		switch term.d {
		case 1:
			a1 += v
			a2 += v * 2 * term.eta * term.epsilon
		case 2:
			a2 += v
		}
	}
	return a1 / f.of.rhoRed, 2 * a2 / (f.of.rhoRed * f.of.rhoRed)
}
