package air

import (
	"math"
	"testing"

	"barline/model/unit"
)

// Two formulas that Ciddor's was not made from.
func TestAgreesWithOtherPublishedFormulas(t *testing.T) {
	birchDowns := func(nm float64) float64 { // Birch and Downs, Metrologia 31, 315 (1994), standard air
		s2 := 1e6 / (nm * nm)
		return 8.34254e-5 + 2.406147e-2/(130-s2) + 1.5998e-4/(38.9-s2)
	}
	peckReeder := func(nm float64) float64 { // Peck and Reeder, J. Opt. Soc. Am. 62, 958 (1972), 185 to 1700 nm
		s2 := 1e6 / (nm * nm)
		return 1e-8 * (8060.51 + 2480990/(132.274-s2) + 17455.7/(39.32957-s2))
	}
	for _, nm := range []float64{235, 265.3, 312, 404.77, 546.23, 632.99, 1030} {
		got := RefractivityAt(unit.Metre(nm * 1e-9))
		if want := birchDowns(nm); math.Abs(got-want) > 3e-8 {
			t.Errorf("%v nm: %.4e, Birch and Downs %.4e", nm, got, want)
		}
		if want := peckReeder(nm); math.Abs(got-want) > 3e-8 {
			t.Errorf("%v nm: %.4e, Peck and Reeder %.4e", nm, got, want)
		}
	}
}

func TestBelowThePublishedRange(t *testing.T) {
	s2 := 25.0 // at 200 nm
	if want := 1e-8 * (8060.51 + 2480990/(132.274-s2) + 17455.7/(39.32957-s2)); math.Abs(RefractivityAt(200e-9)-want) > 4e-7 {
		t.Errorf("200 nm: %.4e, Peck and Reeder %.4e", RefractivityAt(200e-9), want)
	}
}

// Air and vacuum wavelengths of the same lines, printed to 0.1 pm: forbidden
// lines of [O II] and [O III] (NIST Atomic Spectra Database; from memory).
func TestKnownLines(t *testing.T) {
	for _, c := range []struct{ air, vacuum float64 }{{372.8815, 372.9875}, {500.6843, 500.8240}} {
		if got := Vacuum(unit.Metre(c.air * 1e-9)).Nanometres(); math.Abs(got-c.vacuum) > 2e-4 {
			t.Errorf("%v nm in air is %.4f nm, want %v", c.air, got, c.vacuum)
		}
	}
}

func TestThereAndBack(t *testing.T) {
	for _, nm := range []float64{200, 265.3, 633, 1030} {
		v := unit.Metre(nm * 1e-9)
		if got := Vacuum(InAir(v)); math.Abs(float64(got/v)-1) > 1e-15*4 {
			t.Errorf("%v nm came back as %v", nm, got.Nanometres())
		}
	}
}
