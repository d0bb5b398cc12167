package pulse

import (
	"fmt"
	"math"

	"barline/model/unit"
)

// Grid is the sampling of the field: Points instants Step apart, Origin at time
// zero, and the bins of angular frequency from Lo up to but not
// including Hi that are kept. Bin k is at 2πk/(Points·Step).
type Grid struct {
	Points int
	Step   unit.Second
	Lo, Hi int
}

// NewGrid returns a grid whose kept band reaches from the shortest to the
// longest vacuum wavelength. Points is a power of two. The step must be short
// enough that the Nyquist frequency is at least twice the highest kept one:
// then the cube of the field does not fold back into the band.
func NewGrid(points int, step unit.Second, shortest, longest unit.Metre) (Grid, error) {
	if points < 64 || points&(points-1) != 0 {
		return Grid{}, fmt.Errorf("grid of %d points: want a power of two of at least 64", points)
	}
	if !(step > 0) || !(shortest > 0) || !(longest > shortest) {
		return Grid{}, fmt.Errorf("grid with step %g fs from %g nm to %g nm: want a positive step and ascending wavelengths",
			step.Femtoseconds(), shortest.Nanometres(), longest.Nanometres())
	}
	g := Grid{Points: points, Step: step}
	spacing := g.Spacing()
	g.Hi = int(math.Floor(2*math.Pi*lightSpeed/float64(shortest)/spacing)) + 1
	g.Lo = max(1, int(math.Ceil(2*math.Pi*lightSpeed/float64(longest)/spacing)))
	if 4*(g.Hi-1) > points {
		return Grid{}, fmt.Errorf("grid with step %g fs from %g nm: the step must be at most %.4g fs, or the third harmonic folds back",
			step.Femtoseconds(), shortest.Nanometres(), shortest.Nanometres()*1e-9/(4*lightSpeed)*1e15)
	}
	if g.Hi-g.Lo < 16 {
		return Grid{}, fmt.Errorf("grid from %g nm to %g nm keeps %d bins: want at least 16",
			shortest.Nanometres(), longest.Nanometres(), g.Hi-g.Lo)
	}
	return g, nil
}

// Spacing returns the distance between bins in rad/s.
func (g Grid) Spacing() float64 { return 2 * math.Pi / (float64(g.Points) * float64(g.Step)) }

// Omega returns the angular frequency of bin k in rad/s.
func (g Grid) Omega(k int) float64 { return float64(k) * g.Spacing() }

// Bins returns the number of kept bins.
func (g Grid) Bins() int { return g.Hi - g.Lo }

// Window returns the length of the time window.
func (g Grid) Window() unit.Second { return unit.Second(g.Points) * g.Step }

// Origin returns the instant at which the pulse is launched. It stands early in
// the window, since emission and shed light lag behind the pump.
func (g Grid) Origin() int { return g.Points * 5 / 16 }

// Frequencies returns the angular frequencies of the kept bins in rad/s,
// ascending.
func (g Grid) Frequencies() []float64 {
	omega := make([]float64, g.Bins())
	for i := range omega {
		omega[i] = g.Omega(g.Lo + i)
	}
	return omega
}

// Wavelengths returns the band that is kept, the shortest wavelength first.
func (g Grid) Wavelengths() (shortest, longest unit.Metre) {
	return unit.Metre(2 * math.Pi * lightSpeed / g.Omega(g.Hi-1)), unit.Metre(2 * math.Pi * lightSpeed / g.Omega(g.Lo))
}
