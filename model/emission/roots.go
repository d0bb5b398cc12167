package emission

import (
	"math"

	"barline/model/anchor"
	"barline/model/fibre"
	"barline/model/unit"
)

// found is what a search along the bands turns up, in angular frequency.
type found struct {
	zeros [MaxZeroDispersion]float64 // of β₂, descending in ω
	count int
	root  float64 // phase matching; 0 where there is none
	// branch is where the root was taken from, for the anchored answer.
	branch anchor.Point
}

// samples per band of a cold search. They crowd towards the ends of a band,
// where the wall bends the dispersion.
const samples = 32

// grid holds the places of n samples in a band, 0 to 1.
func grid(n int) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = 0.5 * (1 - math.Cos(math.Pi*float64(i)/float64(n-1)))
	}
	return x
}

// places are those of every cold search; never written to.
var places = grid(samples)

// search looks through all bands. It reports every zero of β₂, and the highest
// root of Δβ − κ that passes from negative to positive on the short-wave side
// of the first zero above the pump, far enough from the pump to be emission.
func (m *mismatch) search(bands []fibre.Band, places []float64) (f found) {
	var zeros [2 * MaxZeroDispersion]float64 // ascending in ω
	count := 0
	first := math.Inf(1)
	for b := range bands {
		from, to := fibre.Frequency(bands[b].To), fibre.Frequency(bands[b].From)
		// A hair inside, where the region is the band's own.
		from, to = from*(1+1e-9), to*(1-1e-9)
		var before point
		var at float64
		for i, x := range places {
			omega := from + (to-from)*x
			now := m.at(omega)
			if now.region != fibre.Guided {
				before = point{region: fibre.Dark}
				continue
			}
			if i > 0 && before.region == fibre.Guided {
				if (before.beta2 > 0) != (now.beta2 > 0) && count < len(zeros) {
					zero := m.polish(at, omega, zeroOfBeta2)
					zeros[count] = zero
					count++
					if zero > m.omega && zero < first {
						first = zero
					}
				}
				if before.excess() < 0 && now.excess() >= 0 && omega > first && omega > nearest*m.omega {
					if root := m.polish(at, omega, phaseMatch); root > max(first, nearest*m.omega) {
						f.root = root // bands and samples rise in ω: the last is the highest
					}
				}
			}
			before, at = now, omega
		}
	}
	// Where there are more than fit, those beyond the pump's own come last.
	f.count = min(count, MaxZeroDispersion)
	for i := range f.count {
		f.zeros[i] = zeros[f.count-1-i]
	}
	return f
}

// nearest is the lowest frequency, over that of the pump, at which light counts
// as emission: package spectrum looks for none below.
const nearest = 1.6

// goal names the function that polish and follow bring to zero.
type goal uint8

const (
	zeroOfBeta2 goal = iota
	phaseMatch
)

func (p point) value(g goal) (f, slope float64) {
	if g == zeroOfBeta2 {
		return p.beta2, p.beta3
	}
	return p.excess(), p.rise()
}

// polish refines a root between two frequencies of opposite sign: Newton steps,
// halved where they would leave the bracket.
func (m *mismatch) polish(lo, hi float64, g goal) float64 {
	f, _ := m.at(lo).value(g)
	rising := f < 0
	x := 0.5 * (lo + hi)
	for range 60 {
		f, slope := m.at(x).value(g)
		if (f < 0) == rising {
			lo = x
		} else {
			hi = x
		}
		next := x - f/slope
		if !(next > lo && next < hi) {
			next = 0.5 * (lo + hi)
		}
		if math.Abs(next-x) <= 1e-13*x {
			return next
		}
		x = next
	}
	return x
}

// follow refines a root from where it was at the reading before. It gives up
// where the root has moved by more than reach (relative) or left the band.
func (m *mismatch) follow(from float64, g goal, reach float64) (float64, bool) {
	x := from
	for range 8 {
		p := m.at(x)
		if p.region != fibre.Guided {
			return 0, false
		}
		f, slope := p.value(g)
		step := f / slope
		x -= step
		if !(math.Abs(x-from) <= reach*from) {
			return 0, false
		}
		if math.Abs(step) <= 1e-7*x { // the next step would be its square
			return x, g == zeroOfBeta2 || slope > 0
		}
	}
	return 0, false
}

// reach is how far, relative, a root may move between two predictions.
const reach = 0.03

// trackZeros follows the zeros of β₂ of the prediction before.
func (m *mismatch) trackZeros(before *Prediction, f *found) (ok bool) {
	f.count = before.ZeroDispersionCount
	for i := range f.count {
		f.zeros[i], ok = m.follow(fibre.Frequency(before.ZeroDispersion[i]), zeroOfBeta2, reach)
		if !ok || i > 0 && !(f.zeros[i] < f.zeros[i-1]) {
			return false
		}
	}
	return true
}

// track follows everything that the prediction before had found. It gives up,
// for a cold search, where anything was lost.
func (m *mismatch) track(before *Prediction) (f found, ok bool) {
	if !m.trackZeros(before, &f) {
		return found{}, false
	}
	f.root, ok = m.follow(fibre.Frequency(before.Emission), phaseMatch, reach)
	return f, ok && m.beyondZero(&f)
}

// beyondZero reports whether the root lies above the first zero of β₂ above
// the pump, and far enough from the pump.
func (m *mismatch) beyondZero(f *found) bool {
	if f.root < nearest*m.omega {
		return false
	}
	for i := f.count - 1; i >= 0; i-- {
		if f.zeros[i] > m.omega {
			return f.root > f.zeros[i]
		}
	}
	return false
}

func wavelength(omega float64) unit.Metre { return fibre.Wavelength(omega) }
