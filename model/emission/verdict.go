package emission

import (
	"math"

	"barline/model/fibre"
	"barline/model/unit"
)

// Bounds of the limits. Marked (practice): common practice, no source.
const (
	solitonBound     = 15.0            // incoherent above (practice)
	ionisedBound     = 2e-4            // above it the estimate was 10 to 24 nm off in full-field runs
	attenuationBound = 3.0             // dB over the fibre (practice)
	heatingBound     = 1.0             // K (practice)
	resonanceBound   = 0.05            // relative distance in wavelength
	decibel          = 10 / math.Ln10  // dB per 1/m of power
	compression      = 7.0             // rough peak power of the compressed pulse over P₀
	electronvolt     = 1.602176634e-19 // J, exact (SI 2019)
	avogadro         = 6.02214076e23   // 1/mol, exact (SI 2019)
	permittivity     = 8.8541878128e-12
)

// judge fills in the limits beside a prediction.
func (p *Predictor) judge(m *mismatch, out *Prediction) {
	add := func(v Verdict) {
		if out.VerdictCount < MaxVerdicts {
			out.Verdicts[out.VerdictCount] = v
			out.VerdictCount++
		}
	}
	spec := p.fibre.Spec()
	length := float64(spec.Length)
	add(Verdict{
		Name: "dispersion at the pump", Value: out.Beta2 * 1e30, Bound: 0, Unit: "fs2/m", OK: out.Beta2 < 0,
		Consequence: "normal dispersion: no soliton forms and nothing is emitted; lower the pressure",
	})
	add(Verdict{
		Name: "soliton order", Value: out.SolitonOrder, Bound: solitonBound, OK: out.SolitonOrder <= solitonBound,
		Consequence: "the pulse breaks up from noise: an unstable spectrum",
	})
	switch {
	case !(out.Beta2 < 0):
	case out.SolitonOrder > 1:
		// Compression near L_fiss(0.58 + 1.55/N), this project's own fit to
		// full-field runs.
		at := float64(out.FissionLength) * (0.58 + 1.55/out.SolitonOrder)
		add(Verdict{
			Name: "length to compression", Value: at, Bound: length, Unit: "m", OK: at <= length,
			Consequence: "the pulse leaves the fibre before it is compressed: little or no emission",
		})
	default:
		add(Verdict{
			Name: "least soliton order", Value: out.SolitonOrder, Bound: 1, OK: false,
			Consequence: "too weak a pulse: it spreads instead of compressing, and nothing is emitted",
		})
	}
	add(Verdict{
		Name: "ionised fraction (rough)", Value: 100 * float64(out.IonisedFraction), Bound: 100 * ionisedBound, Unit: "%",
		OK: out.IonisedFraction <= ionisedBound, Consequence: "strong ionisation: the estimate may be off by 25 nm",
	})
	critical := criticalPower(p.setup.Pulse.Wavelength, out)
	add(Verdict{
		Name: "peak power", Value: float64(out.PeakPower) * 1e-6, Bound: critical * 1e-6, Unit: "MW", OK: float64(out.PeakPower) <= critical,
		Consequence: "above the critical power the beam focuses itself: the mode is lost",
	})
	if d, ok := p.resonanceDistance(m, out); ok {
		add(Verdict{
			Name: "distance from a wall resonance", Value: 100 * d, Bound: 100 * resonanceBound, Unit: "%", OK: d >= resonanceBound,
			Consequence: "near a resonance of the wall loss is high and the dispersion uncertain",
		})
	}
	loss := m.guide.Decibel(p.omega) * length
	add(Verdict{
		Name: "attenuation of the pump", Value: loss, Bound: attenuationBound, Unit: "dB", OK: loss <= attenuationBound,
		Consequence: "the pump is lost before it is compressed",
	})
	if spec.Kind == fibre.Capillary {
		least := m.guide.Bore(p.omega) * decibel * length
		add(Verdict{
			Name: "least attenuation of such a bore", Value: least, Bound: attenuationBound, Unit: "dB", OK: least <= attenuationBound,
			Consequence: "a bore this narrow leaks more than its file says: a thin-walled fibre is meant",
		})
	}
	if out.Emission > 0 {
		p.judgeEmission(out, add)
	}
	if plain, _ := p.fibre.KagomeReach(); !math.IsInf(float64(plain), 0) {
		add(Verdict{
			Name: "pump wavelength", Value: p.setup.Pulse.Wavelength.Nanometres(), Bound: plain.Nanometres(), Unit: "nm",
			OK: p.setup.Pulse.Wavelength <= plain, Consequence: "here the dispersion of a kagome fibre rests on a fitted correction of 15 % and more",
		})
	}
	if p.setup.Rating > 0 {
		add(Verdict{
			Name: "pressure", Value: out.Input.Pressure.Bar(), Bound: p.setup.Rating.Bar(), Unit: "bar",
			OK: out.Input.Pressure <= p.setup.Rating, Consequence: "above the lowest pressure rating of the bench",
		})
	}
	if p.setup.RepetitionRate > 0 {
		rise := p.heating(out)
		add(Verdict{
			Name: "heating by ionisation (rough)", Value: rise, Bound: heatingBound, Unit: "K", OK: rise <= heatingBound,
			Consequence: "the gas warms between pulses: density falls where the light is",
		})
	}
}

// judgeEmission adds the limits that only an emission has.
func (p *Predictor) judgeEmission(out *Prediction, add func(Verdict)) {
	checked := p.medium.Checked()
	bound := checked.From
	if out.Emission > checked.To {
		bound = checked.To
	}
	add(Verdict{
		Name: "range of the index source", Value: out.Emission.Nanometres(), Bound: bound.Nanometres(), Unit: "nm",
		OK: !out.Extrapolated, Consequence: "the index is extrapolated beyond the range it was checked in",
	})
	if s := p.setup.Spectrometer; s.To > 0 {
		bound := s.From
		if out.Emission > s.To {
			bound = s.To
		}
		add(Verdict{
			Name: "range of the spectrometer", Value: out.Emission.Nanometres(), Bound: bound.Nanometres(), Unit: "nm",
			OK: s.Holds(out.Emission), Consequence: "the spectrometer does not see this wavelength",
		})
	}
}

// criticalPower returns the critical power of self-focusing in W, of a mode in
// a hollow fibre as of a Gaussian beam: 1.86225 λ²/(4π n n₂).
//
// Source: G. Fibich, A. L. Gaeta, Opt. Lett. 25, 335 (2000) (from memory).
func criticalPower(lambda unit.Metre, out *Prediction) float64 {
	const never = 1e15
	if out.N2 == 0 {
		return never // an empty fibre
	}
	l := float64(lambda)
	return math.Min(never, 1.86225*l*l/(4*math.Pi*(1+out.IndexMinusOne)*float64(out.N2)))
}

// resonanceDistance returns the relative distance in wavelength of pump and
// emission, whichever is nearer, from the nearest resonance of the wall.
func (p *Predictor) resonanceDistance(m *mismatch, out *Prediction) (float64, bool) {
	nearest := math.Inf(1)
	for _, lambda := range [...]unit.Metre{p.setup.Pulse.Wavelength, out.Emission} {
		if lambda == 0 {
			continue
		}
		if d, ok := m.guide.ResonanceDistance(fibre.Frequency(lambda)); ok {
			nearest = math.Min(nearest, d)
		}
	}
	return nearest, !math.IsInf(nearest, 0)
}

// field returns the amplitude in V/m that belongs to a power in the mode.
func field(power, area float64) float64 { return math.Sqrt(2 * power / (permittivity * c * area)) }

// ionised returns a rough ionised fraction at the compressed pulse, averaged
// over the mode: a sech² pulse of 7 P₀ that holds half the energy, its rate
// integrated over the cycles. In ten full-field runs of this project (argon,
// 34 µm, 7 to 12 bar, 0.8 to 1.6 µJ) it was within a factor of three of the
// largest share along the fibre.
func (p *Predictor) ionised(out *Prediction) unit.Fraction {
	peak := compression * float64(out.PeakPower)
	if !(peak > 0) || out.Density == 0 {
		return 0
	}
	most := field(peak, out.EffectiveArea)
	if most < p.electron.Threshold() {
		return 0
	}
	width := 0.25 * float64(out.Input.Energy) / peak // T₀ of sech²: ∫ = 2 T₀ peak
	const steps = 24
	end := 1.5 * width
	sum := 0.0
	for i := range steps {
		t := end * (float64(i) + 0.5) / steps
		sum += p.electron.Rate(most * math.Cos(p.omega*t) / math.Cosh(t/width))
	}
	return unit.Fraction(-math.Expm1(-2 * sum * end / steps))
}

// heating returns a rough rise of temperature on the axis in K. The energy that
// the rough ionised fraction would take is held to a fifth of the pulse, left
// over half the fibre: full-field runs lose no more.
func (p *Predictor) heating(out *Prediction) float64 {
	main := p.medium.Main()
	perMetre := float64(out.IonisedFraction) * float64(out.Density) * avogadro * out.EffectiveArea * main.IonisationEnergy * electronvolt
	most := 0.2 * float64(out.Input.Energy) / (0.5 * float64(p.fibre.Spec().Length))
	return warming(math.Min(perMetre, most), p.setup.RepetitionRate, main.ThermalConductivity)
}

// warming returns the rise of temperature in K on the axis of a gas of thermal
// conductivity k in W/(m K), for an energy in J/m left there by each pulse: the
// power per length over 4πk, up to a logarithm of radii that is near one.
func warming(perMetre float64, rate unit.Hertz, k float64) float64 {
	return perMetre * float64(rate) / (4 * math.Pi * k)
}
