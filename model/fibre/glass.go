package fibre

import (
	"math"

	"barline/model/taylor"
)

// glass returns n²−1 of fused silica at 20 °C about q = 1/λ² in µm⁻². It holds
// from 0.21 to 3.71 µm and is used from 0.16 to 6 µm.
//
// Source: I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965),
// doi:10.1364/JOSA.55.001205; C. Z. Tan, J. Non-Cryst. Solids 223, 158 (1998)
// checks it to 6.7 µm.
func glass(q float64) taylor.Number {
	nu := taylor.Square(q)
	sum := taylor.Number{}
	for _, p := range malitson {
		sum = sum.Add(nu.Times(-p.c).Plus(1).Inverse().Times(p.b))
	}
	return sum
}

// malitson holds B and C of n²−1 = Σ Bλ²/(λ²−C), λ in µm.
var malitson = [...]struct{ b, c float64 }{
	{0.6961663, 0.0684043 * 0.0684043},
	{0.4079426, 0.1162414 * 0.1162414},
	{0.8974794, 9.896161 * 9.896161},
}

const (
	glassFrom, glassTo = 0.16e-6, 6e-6 // m, where the formula is used at all
)

// glassIndex returns the index of fused silica at a wavelength in metres.
func glassIndex(lambda float64) float64 {
	return math.Sqrt(1 + glass(1e-12/(lambda*lambda)).C0)
}
