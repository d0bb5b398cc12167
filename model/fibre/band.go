package fibre

import (
	"math"

	"barline/model/unit"
)

// Band is a stretch of wavelengths that the fibre transmits, margins taken off.
type Band struct{ From, To unit.Metre }

// MaxBands bounds the bands of one fibre.
const MaxBands = 16

// Resonance returns the vacuum wavelength λ_m = (2t/m)√(n_glass²−n²) of the
// wall's m-th resonance (m = 1 is the longest) for a gas of index n, and
// whether it lies in the range of the glass. A capillary has none.
//
// Source: N. M. Litchinitser et al., Opt. Lett. 27, 1592 (2002) (from memory).
func (g *Guide) Resonance(m int) (unit.Metre, bool) {
	if g.Fibre.spec.Kind == Capillary || m < 1 {
		return 0, false
	}
	lambda, ok := g.resonance(m)
	return lambda, ok && float64(lambda) >= glassFrom
}

// justBelow is how far below the range of the glass a resonance is still
// looked for, since its margin may reach into the range.
const justBelow = 0.94

func (g *Guide) resonance(m int) (unit.Metre, bool) {
	t := float64(g.Fibre.spec.Wall)
	floor := justBelow * math.Max(glassFrom, float64(g.Gas.Usable().From))
	lambda := 2 * t / float64(m)
	for range 80 {
		lambda = math.Min(math.Max(lambda, floor), glassTo)
		v := 1e-6 / lambda
		step := glass(v*v).C0 - g.Gas.Susceptibility(2*math.Pi*c/lambda).C0
		next := 2 * t / float64(m) * math.Sqrt(step)
		if math.Abs(next-lambda) < 1e-13*lambda {
			return unit.Metre(next), next > floor
		}
		if !(next > floor) && lambda == floor || next > glassTo && lambda == glassTo {
			return 0, false // it lies outside
		}
		lambda = 0.5 * (lambda + next)
	}
	return unit.Metre(lambda), lambda > floor
}

// hair widens the margins of Bands so that a band's ends are inside by the
// first-order measure that tells a region at one frequency.
const hair = 5e-4

// Bands fills dst with the transmission bands, longest wavelengths first, and
// returns how many there are. The long end is the cut-off or the range of the
// formulas, the short end the range of the glass and of the gas's index.
func (g *Guide) Bands(dst *[MaxBands]Band) int {
	usable := g.Gas.Usable()
	short, long := float64(usable.From), math.Min(float64(usable.To), float64(g.CutOff()))
	if g.Fibre.spec.Kind == Antiresonant {
		short, long = math.Max(short, glassFrom), math.Min(long, glassTo)
	}
	if _, reach := g.Fibre.KagomeReach(); long > float64(reach) {
		long = float64(reach)
	}
	n := 0
	for m := 1; n < MaxBands-1 && g.Fibre.spec.Kind == Antiresonant; m++ {
		lambda, ok := g.resonance(m)
		if !ok {
			break
		}
		margin := (float64(g.Fibre.spec.Margin) + hair) * float64(lambda)
		if from := float64(lambda) + margin; from < long {
			dst[n] = Band{unit.Metre(from), unit.Metre(long)}
			n++
		}
		long = math.Min(long, float64(lambda)-margin)
	}
	if short < long {
		dst[n] = Band{unit.Metre(short), unit.Metre(long)}
		n++
	}
	return n
}

// Gaps returns the stretches in which a resonance of the wall keeps the fibre
// from guiding, margins included, longest wavelengths first. A capillary has
// none.
func (g *Guide) Gaps() []Band {
	if g.Fibre.spec.Kind != Antiresonant {
		return nil
	}
	var gaps []Band
	for m := 1; m < MaxBands; m++ {
		lambda, ok := g.resonance(m)
		if !ok {
			break
		}
		margin := unit.Metre(g.Fibre.spec.Margin) * lambda
		gaps = append(gaps, Band{lambda - margin, lambda + margin})
	}
	return gaps
}

// CutOff returns the vacuum wavelength beyond which the fibre guides nothing:
// n_eff² of the plain capillary form falls below zero.
func (g *Guide) CutOff() unit.Metre {
	return unit.Metre(2 * math.Pi * g.Fibre.radius / g.Fibre.u) // n ≈ 1 there
}
