package unit

import (
	"errors"
	"math"
	"strings"
	"testing"
)

func TestPressureUnitsAgreeWithPublishedFactors(t *testing.T) {
	for _, c := range []struct {
		text   string
		want   float64
		rel    float64
		source string
	}{
		{"1 psi", 6894.757, 1e-7, "NIST SP 811 (2008), App. B.8, printed to 7 digits"},
		{"1 Torr", 133.3224, 1e-6, "NIST SP 811 (2008), App. B.8, printed to 7 digits"},
		{"1 atm", 101325, 0, "10th CGPM (1954), exact"},
		{"1 mbar", 100, 0, "SI Brochure, 9th ed., bar = 100 kPa exact"},
		{"2.385bar", 238500, 0, "SI Brochure, 9th ed."},
		{"900 kPa", 9e5, 0, "SI prefixes"},
	} {
		got, err := ParsePressure(c.text)
		if err != nil {
			t.Errorf("%s: %v", c.text, err)
			continue
		}
		if diff := math.Abs(float64(got)-c.want) / c.want; diff > c.rel {
			t.Errorf("%s = %v Pa, want %v (%s)", c.text, float64(got), c.want, c.source)
		}
	}
}

func TestLengthsAreTheNearestFloat(t *testing.T) {
	for text, want := range map[string]float64{"34 um": 34e-6, "34 µm": 34e-6, "1030nm": 1030e-9, "30 cm": 0.3, "180 nm": 180e-9} {
		got, err := ParseLength(text)
		if err != nil || float64(got) != want {
			t.Errorf("%s = %v, %v; want %v", text, float64(got), err, want)
		}
	}
}

func TestTemperature(t *testing.T) {
	for text, want := range map[string]Kelvin{"22.5 degC": 295.65, "295 K": 295, "-5 °C": 268.15, "\u22125 degC": 268.15} {
		got, err := ParseTemperature(text)
		if err != nil || math.Abs(float64(got-want)) > 1e-9 {
			t.Errorf("%s = %v, %v; want %v", text, float64(got), err, float64(want))
		}
	}
}

func TestNumberWithoutUnitSaysWhichUnitWasExpected(t *testing.T) {
	_, err := ParsePressure("9")
	if !errors.Is(err, ErrUnit) {
		t.Fatalf("9: error %v does not wrap ErrUnit", err)
	}
	for _, want := range []string{`"9"`, "no unit", "9 bar", "mbar"} {
		if !strings.Contains(err.Error(), want) {
			t.Errorf("error %q does not say %s", err, want)
		}
	}
}

func TestRefused(t *testing.T) {
	for _, text := range []string{"", "bar", "nine bar", "9 bars", "9 nm", "NaN bar", "Inf bar", "1e999 bar", "9 BAR", "9 bar(g)", "--9 bar", "9,5 bar"} {
		if got, err := ParsePressure(text); err == nil {
			t.Errorf("%q was read as %v", text, got)
		}
	}
}

func TestGaugeNeedsAmbient(t *testing.T) {
	for _, text := range []string{"3 bar(g)", "3 bar gauge", "3bar_g"} {
		g, err := ParseGauge(text)
		if err != nil || math.Abs(float64(g.Absolute(1.013*Bar)-4.013*Bar)) > 1e-6 {
			t.Errorf("%s: %v, %v", text, float64(g), err)
		}
	}
	if _, err := ParseGauge("3 bar"); err == nil {
		t.Error("an absolute pressure was read as gauge")
	}
}

func FuzzParsePressure(f *testing.F) {
	for _, s := range []string{"9 bar", "1e5 Pa", "-1.5e-3 mbar", "9bar(g)", "1e bar", "µ"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, text string) {
		p, err := ParsePressure(text)
		if err == nil && (math.IsNaN(float64(p)) || math.IsInf(float64(p), 0)) {
			t.Fatalf("%q read as %v", text, float64(p))
		}
	})
}
