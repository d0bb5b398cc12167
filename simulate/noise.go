package simulate

import "math"

// noise gives numbers that depend on the seed, a source and a frame alone, so
// that asking twice gives the same and asking elsewhere disturbs nothing.
type noise uint64

// source tells one stream of noise from another.
type source uint64

const (
	ofTruth source = iota + 1
	ofGaugeA
	ofGaugeB
	ofController
	ofFibreThermometer
	ofRoomThermometer
	ofRoom
	ofEnergy
	ofEnergyDrift
	ofWavelength
	ofWidth
	ofStrength
	ofGarbage
	ofPixels
)

// bits mixes seed, source and count (Steele, Lea & Flood, OOPSLA 2014,
// doi:10.1145/2660193.2660195: the finaliser of SplitMix64).
func (n noise) bits(s source, count int64) uint64 {
	z := uint64(n) + uint64(s)*0x9E3779B97F4A7C15
	for _, v := range [2]uint64{uint64(count), 0} {
		z += v + 0x9E3779B97F4A7C15
		z = (z ^ z>>30) * 0xBF58476D1CE4E5B9
		z = (z ^ z>>27) * 0x94D049BB133111EB
		z ^= z >> 31
	}
	return z
}

// uniform returns a number of 0 < u < 1.
func (n noise) uniform(s source, count int64) float64 {
	return (float64(n.bits(s, count)>>11) + 0.5) / (1 << 53)
}

// normal returns a number of mean 0 and standard deviation 1 (Box & Muller,
// Ann. Math. Stat. 29, 610 (1958)).
func (n noise) normal(s source, count int64) float64 {
	r := math.Sqrt(-2 * math.Log(n.uniform(s, 2*count)))
	return r * math.Cos(2*math.Pi*n.uniform(s, 2*count+1))
}

// bounded returns a normal number no further than 2.5 from zero.
func (n noise) bounded(s source, count int64) float64 {
	return min(max(n.normal(s, count), -2.5), 2.5)
}
