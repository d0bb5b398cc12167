package spectrum

import (
	"fmt"
	"math"

	"barline/model/unit"
)

const lightSpeed = 299792458.0 // m/s, exact

// Density is energy per angular frequency on equally spaced frequencies.
type Density struct {
	First   float64   // rad/s, the lowest frequency
	Spacing float64   // rad/s
	Energy  []float64 // J s, or any unit in proportion
}

// Omega returns the angular frequency of sample i in rad/s.
func (d Density) Omega(i int) float64 { return d.First + float64(i)*d.Spacing }

// Wavelength returns the vacuum wavelength of sample i.
func (d Density) Wavelength(i int) unit.Metre {
	return unit.Metre(2 * math.Pi * lightSpeed / d.Omega(i))
}

// PerWavelength returns the energy per wavelength at sample i, in the unit of
// Energy times rad/(s m).
func (d Density) PerWavelength(i int) float64 {
	w := d.Omega(i)
	return d.Energy[i] * w * w / (2 * math.Pi * lightSpeed)
}

// Total returns the energy of the whole spectrum.
func (d Density) Total() float64 {
	sum := 0.0
	for _, e := range d.Energy {
		sum += e
	}
	return sum * d.Spacing
}

// FromWavelengths returns the density of a spectrum that was measured over
// ascending vacuum wavelengths as energy per wavelength, in straight lines
// between the points. Energies below zero, which noise makes, stay.
func FromWavelengths(lambda []unit.Metre, perWavelength []float64) (Density, error) {
	n := len(lambda)
	if n < 8 || len(perWavelength) != n {
		return Density{}, fmt.Errorf("spectrum of %d wavelengths and %d energies: want the same number, at least 8", n, len(perWavelength))
	}
	for i := range lambda {
		if !(lambda[i] > 0) || i > 0 && !(lambda[i] > lambda[i-1]) {
			return Density{}, fmt.Errorf("spectrum: wavelength %g nm after %g nm: want ascending ones above 0",
				lambda[i].Nanometres(), lambda[max(i-1, 0)].Nanometres())
		}
		if e := perWavelength[i]; math.IsNaN(e) || math.IsInf(e, 0) {
			return Density{}, fmt.Errorf("spectrum: energy at %g nm is not a number", lambda[i].Nanometres())
		}
	}
	low := 2 * math.Pi * lightSpeed / float64(lambda[n-1])
	high := 2 * math.Pi * lightSpeed / float64(lambda[0])
	spacing := min(finest(lambda), smoothing/4)
	count := min(int((high-low)/spacing), mostSamples)
	d := Density{First: low, Spacing: (high - low) / float64(count), Energy: make([]float64, count+1)}
	j := n - 2
	for i := range d.Energy {
		w := d.Omega(i)
		at := min(max(2*math.Pi*lightSpeed/w, float64(lambda[0])), float64(lambda[n-1]))
		for j > 0 && float64(lambda[j]) > at {
			j--
		}
		f := (at - float64(lambda[j])) / float64(lambda[j+1]-lambda[j])
		perLambda := perWavelength[j] + f*(perWavelength[j+1]-perWavelength[j])
		d.Energy[i] = perLambda * 2 * math.Pi * lightSpeed / (w * w)
	}
	return d, nil
}

const mostSamples = 1 << 15

// finest returns the smallest distance in rad/s between two wavelengths.
func finest(lambda []unit.Metre) float64 {
	least := math.Inf(1)
	for i := 1; i < len(lambda); i++ {
		a, b := float64(lambda[i-1]), float64(lambda[i])
		least = min(least, 2*math.Pi*lightSpeed*(b-a)/(a*b))
	}
	return least
}

// smoothed returns the density convolved with the Gaussian of the definition.
func (d Density) smoothed() Density {
	reach := int(math.Ceil(5 * smoothing / d.Spacing))
	kernel := make([]float64, reach+1)
	sum := 0.0
	for k := range kernel {
		x := float64(k) * d.Spacing / smoothing
		kernel[k] = math.Exp(-x * x / 2)
		sum += 2 * kernel[k]
	}
	sum -= kernel[0]
	out := Density{First: d.First, Spacing: d.Spacing, Energy: make([]float64, len(d.Energy))}
	for i := range out.Energy {
		for k := max(-reach, -i); k <= min(reach, len(d.Energy)-1-i); k++ {
			out.Energy[i] += d.Energy[i+k] * kernel[max(k, -k)]
		}
		out.Energy[i] /= sum
	}
	return out
}
