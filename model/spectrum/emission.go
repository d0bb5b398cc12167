package spectrum

import (
	"errors"
	"math"
	"sort"

	"barline/model/unit"
)

// The numbers of the definition of emission.
const (
	smoothing     = 0.08e15 // rad/s, rms of the Gaussian
	lowestRatio   = 1.6     // lobes lie above this multiple of the pump frequency
	dip           = 0.5     // of the maximum, reached on the long-wave side
	harmonicReach = 0.04    // relative distance that still counts as a harmonic
	harmonicShare = 0.01    // of the energy, above which a lobe is no mere harmonic
	leastShare    = 1e-3    // of the energy, below which there is no emission
)

// Lobe is one lobe of a spectrum.
type Lobe struct {
	Centroid   unit.Metre // energy-weighted, of the part above half the maximum
	Peak       unit.Metre
	Width      unit.Metre // full width at half the maximum
	Conversion float64    // energy of the lobe over the energy of the spectrum
}

// ErrEmpty is returned for a spectrum without energy.
var ErrEmpty = errors.New("spectrum holds no energy")

// Lobes returns the lobes of a spectrum made with light of the pump wavelength,
// the one with most energy first; none where nothing is emitted. The first is
// the emission.
func Lobes(d Density, pump unit.Metre) ([]Lobe, error) {
	total := d.Total()
	if !(total > 0) || math.IsInf(total, 0) {
		return nil, ErrEmpty
	}
	s := d.smoothed()
	omega0 := 2 * math.Pi * lightSpeed / float64(pump)
	from := max(1, int(math.Ceil((lowestRatio*omega0-s.First)/s.Spacing)))
	curve := make([]float64, len(s.Energy))
	for i := range curve {
		curve[i] = s.PerWavelength(i)
	}
	peaks := summits(curve, from)
	var lobes []Lobe
	for n, p := range peaks {
		low, high := foot(curve, p, -1, 0), foot(curve, p, 1, len(curve)-1)
		if n > 0 {
			low = lowest(curve, peaks[n-1], p)
		}
		if n+1 < len(peaks) {
			high = lowest(curve, p, peaks[n+1])
		}
		l := s.lobe(curve, p, low, high)
		l.Conversion /= total
		if l.Conversion < leastShare || l.Conversion < harmonicShare && harmonic(s.Omega(p)/omega0) {
			continue
		}
		lobes = append(lobes, l)
	}
	sort.SliceStable(lobes, func(i, j int) bool { return lobes[i].Conversion > lobes[j].Conversion })
	return lobes, nil
}

func harmonic(ratio float64) bool {
	return math.Abs(ratio/2-1) < harmonicReach || math.Abs(ratio/3-1) < harmonicReach
}

// summits returns the maxima at or above index from that have fallen below the
// dip on their long-wave side (towards lower indices) before anything higher,
// ascending. Of neighbours without such a dip between them the higher stands.
func summits(curve []float64, from int) []int {
	var found []int
	for i := from; i < len(curve)-1; i++ {
		if !(curve[i] > curve[i-1] && curve[i] >= curve[i+1]) {
			continue
		}
		j := i - 1
		for j > 0 && curve[j] > dip*curve[i] && curve[j] <= curve[i] {
			j--
		}
		if curve[j] > dip*curve[i] {
			continue
		}
		if n := len(found); n > 0 && lowestValue(curve, found[n-1], i) > dip*curve[found[n-1]] {
			found[n-1] = i // a shoulder of this one, with no dip between
			continue
		}
		found = append(found, i)
	}
	return found
}

// foot returns the minimum next to the summit p in the direction step: the
// lowest place before the curve has risen from it by the dip's factor, or above
// the summit, or ended.
func foot(curve []float64, p, step, end int) int {
	least := p
	for i := p; i != end+step; i += step {
		if curve[i] < curve[least] {
			least = i
		}
		if curve[i] > curve[p] || dip*curve[i] > curve[least] {
			break
		}
	}
	return least
}

// lowest returns the index of the smallest value between a and b.
func lowest(curve []float64, a, b int) int {
	least := a
	for i := a; i <= b; i++ {
		if curve[i] < curve[least] {
			least = i
		}
	}
	return least
}

func lowestValue(curve []float64, a, b int) float64 { return curve[lowest(curve, a, b)] }

// lobe measures the summit p with its feet; Conversion is left as energy.
func (d Density) lobe(curve []float64, p, low, high int) Lobe {
	l := Lobe{Peak: d.vertex(curve, p)}
	half := curve[p] / 2
	a, b := p, p
	for a > low && curve[a-1] >= half {
		a--
	}
	for b < high && curve[b+1] >= half {
		b++
	}
	// The ends of the part above half lie between two samples each.
	left, right := cross(curve, a, a-1, half), cross(curve, b, b+1, half)
	var weight, moment float64
	for i := a; i <= b; i++ {
		share := 1.0 // of the interval round sample i that lies inside
		if i == a {
			share = min(float64(i)-left, 0.5) + 0.5
		}
		if i == b {
			share += min(right-float64(i), 0.5) - 0.5
		}
		weight += share * d.Energy[i]
		moment += share * d.Energy[i] * float64(d.Wavelength(i))
	}
	l.Centroid = unit.Metre(moment / weight)
	l.Width = d.at(left) - d.at(right)
	for i := low; i <= high; i++ {
		l.Conversion += d.Energy[i] * d.Spacing
	}
	return l
}

// cross returns where between sample i, above the level, and its neighbour j
// the curve meets the level, as a fractional index.
func cross(curve []float64, i, j int, level float64) float64 {
	if j < 0 || j >= len(curve) || curve[j] >= level {
		return float64(i)
	}
	return float64(i) + float64(j-i)*(curve[i]-level)/(curve[i]-curve[j])
}

// at returns the wavelength at a fractional index.
func (d Density) at(x float64) unit.Metre {
	return unit.Metre(2 * math.Pi * lightSpeed / (d.First + x*d.Spacing))
}

// vertex returns the wavelength of the maximum by a parabola through three samples.
func (d Density) vertex(curve []float64, p int) unit.Metre {
	if p < 1 || p > len(curve)-2 {
		return d.Wavelength(p)
	}
	a, b, c := curve[p-1], curve[p], curve[p+1]
	if bend := a - 2*b + c; bend < 0 {
		return d.at(float64(p) + (a-c)/(2*bend))
	}
	return d.Wavelength(p)
}
