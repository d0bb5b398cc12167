package fibre

import (
	"math"
	"testing"

	"barline/model/taylor"
	"barline/model/unit"
)

// Linear phase matching in a 34 µm core with a 180 nm wall, argon, 1030 nm: an
// independent calculation gives 234.6 nm at 7 bar and 266.2 nm at 9 bar, and no
// other root. It took borzsonyi-2008 with n²−1 proportional to the density of
// an ideal gas at 293.15 K, so the gas here is made that way too.
func TestLinearRootsOfAThinWall(t *testing.T) {
	f, err := New(thin)
	if err != nil {
		t.Fatal(err)
	}
	susceptibility := func(omega, bar float64) taylor.Number {
		v := omega / (2 * math.Pi * c) * 1e-6
		nu := taylor.Square(v * v)
		sum := taylor.Number{}
		for _, p := range [...][2]float64{{20332.29e-8, 206.12e-6}, {34458.31e-8, 8.066e-3}} {
			sum = sum.Add(nu.Times(-p[1]).Plus(1).Inverse().Times(p[0]))
		}
		return sum.Times(bar * 273.15 / 293.15)
	}
	for _, want := range []struct{ bar, nm float64 }{{7, 234.6}, {9, 266.2}} {
		pumpOmega := Frequency(1030e-9)
		pump, _ := f.indexMinusOne(pumpOmega, susceptibility(pumpOmega, want.bar))
		delta := func(lambda float64) (float64, Region) {
			omega := Frequency(unit.Metre(lambda))
			n, region := f.indexMinusOne(omega, susceptibility(omega, want.bar))
			return (n.C0*omega - pump.C0*pumpOmega - (pump.C0+pump.C1)*(omega-pumpOmega)) / c, region
		}
		var roots []float64
		for lambda := 165e-9; lambda < 580e-9; lambda += 0.05e-9 {
			a, ra := delta(lambda)
			b, rb := delta(lambda + 0.05e-9)
			if ra == Guided && rb == Guided && a > 0 && b <= 0 {
				roots = append(roots, lambda*1e9+0.05*a/(a-b))
			}
		}
		if len(roots) != 1 || math.Abs(roots[0]-want.nm) > 0.06 {
			t.Errorf("%g bar: roots at %.3f nm, want %.1f nm alone", want.bar, roots, want.nm)
		}
	}
}
