package spectrum

import (
	"fmt"
	"math"

	"barline/model/unit"
)

// Bins are wavelength bins for showing spectra: of equal ratio, so that they
// are fine where an emission is and coarse where the pump is.
type Bins struct {
	edges []unit.Metre // ascending, one more than bins
}

// NewBins returns count bins from one wavelength to another.
func NewBins(from, to unit.Metre, count int) (Bins, error) {
	if !(from > 0 && to > from) || math.IsInf(float64(to), 0) || count < 1 || count > mostSamples {
		return Bins{}, fmt.Errorf("%d bins from %v to %v: expected 1 to %d between ascending wavelengths above 0", count, from, to, mostSamples)
	}
	b := Bins{edges: make([]unit.Metre, count+1)}
	for i := range b.edges {
		b.edges[i] = from * unit.Metre(math.Pow(float64(to/from), float64(i)/float64(count)))
	}
	return b, nil
}

// Middles returns the middle of every bin, ascending.
func (b Bins) Middles() []unit.Metre {
	m := make([]unit.Metre, len(b.edges)-1)
	for i := range m {
		m[i] = (b.edges[i] + b.edges[i+1]) / 2
	}
	return m
}

// Of returns the energy per wavelength of d in every bin: its energy over its
// width, so that none is lost between samples. Beyond the spectrum it is zero.
// The unit is that of d's Energy times rad/(s m).
func (b Bins) Of(d Density) []float64 {
	out := make([]float64, len(b.edges)-1)
	if len(d.Energy) < 2 || !(d.Spacing > 0) {
		return out
	}
	whole := make([]float64, len(d.Energy)) // energy below the frequency of each sample
	for i := 1; i < len(whole); i++ {
		whole[i] = whole[i-1] + (d.Energy[i-1]+d.Energy[i])/2*d.Spacing
	}
	below := func(lambda unit.Metre) float64 {
		x := (2*math.Pi*lightSpeed/float64(lambda) - d.First) / d.Spacing
		last := len(whole) - 1
		switch {
		case !(x > 0):
			return 0
		case x >= float64(last):
			return whole[last]
		}
		i := int(x)
		f := x - float64(i)
		a, c := d.Energy[i], d.Energy[i+1]
		return whole[i] + f*(a+(c-a)*f/2)*d.Spacing
	}
	high := below(b.edges[0])
	for i := range out {
		low := below(b.edges[i+1])
		out[i] = (high - low) / float64(b.edges[i+1]-b.edges[i])
		high = low
	}
	return out
}
