package emission

import (
	"math"

	"barline/model/fibre"
	"barline/model/pulse"
	"barline/model/unit"
)

// effects is how one prediction follows its inputs, and the spread between
// models, all in metres of emission wavelength.
//
// First order: JCGM 100:2008 (GUM), section 5. Across a jump from one branch to
// another it says nothing.
type effects struct {
	slope  [QuantityCount]float64 // m per unit of the quantity
	known  [QuantityCount]float64 // standard uncertainty of each quantity
	index  float64                // spread between index sources, m
	rest   float64                // the nonlinear term, or the interpolation between nodes, m
	plasma float64                // the ionisation model of the nodes, m
	agreed int                    // index sources compared
	// unknown are quantities whose part in κ no run has measured yet.
	unknown [QuantityCount]bool
}

// launchSlopes says how κ of the estimate follows the pulse.
type launchSlopes struct {
	duration float64 // ∂ ln κ/∂ ln τ
	gdd      float64 // ∂ ln κ/∂ GDD, 1/s²
}

func launchSlopesOf(p pulse.Pulse) launchSlopes {
	lead := func(q pulse.Pulse) float64 {
		l := launch(q)
		return math.Log(l.peak) + 2.0/3*math.Log(l.t0)
	}
	const h = 1e-3
	longer, shorter := p, p
	longer.Duration *= 1 + h
	shorter.Duration *= 1 - h
	more, less := p, p
	step := unit.SecondSquared(0.02 * float64(p.Duration) * float64(p.Duration))
	more.GDD += step
	less.GDD -= step
	return launchSlopes{
		duration: (lead(longer) - lead(shorter)) / (2 * h),
		gdd:      (lead(more) - lead(less)) / (2 * float64(step)),
	}
}

// weigh fills e at the root omega. The linear part of phase matching is turned
// with κ held: a slope that the estimate's κ would add is known to be wrong.
// What moves κ is weighed by the estimate all the same, as the best guess there
// is, but Steadiness does not offer it.
func (p *Predictor) weigh(m *mismatch, f *found, at point, out *Prediction, e *effects) {
	omega := f.root
	// At Δβ(ω, x) = κ: dω = −(∂Δβ/∂x)/(∂Δβ/∂ω) dx and dλ = −(λ/ω) dω.
	turn := float64(wavelength(omega)) / omega / at.slope
	base := m.delta(omega)

	// Density, and through it pressure, temperature and air.
	const h = 1e-5
	denser := fibre.Guide{Fibre: m.guide.Fibre, Gas: m.guide.Gas.WithDensity(out.Density * (1 + h))}
	other := m.with(&denser)
	perDensity := (other.delta(omega) - base) / h // for ln ρ
	rho := float64(out.Density)
	e.slope[Pressure] = turn * perDensity * m.guide.Gas.DensitySlope / rho
	e.slope[Temperature] = turn * perDensity * p.densityOverTemperature(out)
	e.known = p.setup.Uncertainty.Standard
	if e.known[Air] > 0 {
		e.slope[Air] = turn * p.airSlope(m, omega, base, out)
	}

	// Sizes of the fibre.
	spec := m.guide.Fibre.Spec()
	radius, wall := m.guide.Fibre.Radius(), float64(spec.Wall)
	sized := m.guide.Fibre.WithSizes(radius*(1+h), wall)
	other = m.with(&fibre.Guide{Fibre: &sized, Gas: m.guide.Gas})
	e.slope[CoreRadius] = turn * (other.delta(omega) - base) / h
	if wall > 0 && e.known[Wall] > 0 {
		sized = m.guide.Fibre.WithSizes(radius, wall*(1+h))
		other = m.with(&fibre.Guide{Fibre: &sized, Gas: m.guide.Gas})
		e.slope[Wall] = turn * (other.delta(omega) - base) / h
	}

	// Pump: ∂Δβ/∂ω₀ = −β₂(ω₀)(ω−ω₀), and dω₀ = −(ω₀/λ₀) dλ₀.
	pump := float64(p.setup.Pulse.Wavelength)
	e.slope[PumpWavelength] = turn * out.Beta2 * (omega - m.omega) * m.omega / pump

	if p.nodes != nil {
		p.weighNodes(m, f, turn, out, e)
	} else {
		p.weighPulse(at, turn, e)
		p.weighTerm(omega, turn, out, e)
	}
	p.weighIndex(m, omega, base, turn, out, e)
}

// weighPulse fills in what acts through κ.
func (p *Predictor) weighPulse(at point, turn float64, e *effects) {
	if e.known[NonlinearIndex] == 0 {
		e.known[NonlinearIndex] = p.medium.KerrSpread()
	}
	k := -turn * at.kappa // Δβ − κ: κ counts the other way
	e.slope[PulseEnergy] = k
	e.slope[NonlinearIndex] = k
	e.slope[PulseDuration] = k * p.slopes.duration
	e.slope[PulseGDD] = k * p.slopes.gdd
}

// Spread of the estimate about full-field runs, m: standard, and where the gas
// is strongly ionised.
const (
	estimateSpread = 10e-9
	ionisedSpread  = 25e-9
)

// weighIndex fills in the spread between the index sources that were checked at
// both wavelengths.
func (p *Predictor) weighIndex(m *mismatch, omega, base, turn float64, out *Prediction, e *effects) {
	sum := 0.0
	for _, medium := range p.spread {
		checked := medium.Checked()
		if !checked.Holds(out.Emission) || !checked.Holds(p.setup.Pulse.Wavelength) {
			continue
		}
		guide := fibre.Guide{Fibre: m.guide.Fibre, Gas: m.guide.Gas.As(medium)}
		other := m.with(&guide)
		shift := turn * (other.delta(omega) - base)
		sum += shift * shift
		e.agreed++
	}
	if e.agreed > 0 {
		e.index = math.Sqrt(sum / float64(e.agreed))
	}
}

// weighTerm fills in how far the nonlinear term itself is to be trusted.
func (p *Predictor) weighTerm(omega, turn float64, out *Prediction, e *effects) {
	e.rest = estimateSpread
	if out.IonisedFraction > ionisedBound {
		e.rest = ionisedSpread
	}
	if p.setup.Answer == Linear { // the whole term is left out
		t0 := p.launch.t0
		kappa := estimateLead * out.Gamma * float64(out.PeakPower) * math.Cbrt(omega*t0*omega*t0)
		e.rest = math.Abs(turn * kappa)
	}
}

// sigma combines all effects, covariance included.
func (e *effects) sigma(u *Uncertainty) float64 {
	sum := e.index*e.index + e.rest*e.rest + e.plasma*e.plasma
	for i := range QuantityCount {
		a := e.slope[i] * e.known[i]
		sum += a * a
		for j := range i {
			if r := u.Correlation[i][j]; r != 0 {
				sum += 2 * r * a * e.slope[j] * e.known[j]
			}
		}
	}
	return math.Sqrt(math.Max(sum, 0))
}

// densityOverTemperature returns ∂ ln ρ/∂T in 1/K at constant pressure, by the
// secant to an isotherm a few kelvin away: 1 % or better off, which is enough
// for an uncertainty, and the far isotherm is made anew only when the
// temperature has moved by kelvins.
func (p *Predictor) densityOverTemperature(out *Prediction) float64 {
	const near, far, middle = 1.5, 4.5, 3
	t := out.Input.Temperature
	if d := math.Abs(float64(t - p.warmT)); !(d >= near && d <= far) {
		p.warmT = t + middle
		if p.warm.Set(p.warmT) != nil {
			p.warmT = t - middle
			if p.warm.Set(p.warmT) != nil {
				return -1 / float64(t)
			}
		}
	}
	state, err := p.warm.State(out.Input.Pressure, out.Input.Air)
	if err != nil || state.Density == 0 {
		return -1 / float64(t) // the ideal gas
	}
	return math.Log(float64(state.Density/out.Density)) / float64(p.warmT-t)
}

// airSlope returns ∂Δβ/∂x for a share x of air.
func (p *Predictor) airSlope(m *mismatch, omega, base float64, out *Prediction) float64 {
	const step = 0.01
	d := unit.Fraction(step)
	if out.Input.Air > 0.5 {
		d = -step
	}
	state, err := p.iso.State(out.Input.Pressure, out.Input.Air+d)
	if err != nil {
		return 0
	}
	other := m.with(&fibre.Guide{Fibre: m.guide.Fibre, Gas: state})
	return (other.delta(omega) - base) / float64(d)
}
