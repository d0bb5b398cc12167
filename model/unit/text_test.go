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

func TestTextIsReadBack(t *testing.T) {
	near := func(got, want float64, err error) bool {
		return err == nil && math.Abs(got-want) <= 1e-3*math.Abs(want)
	}
	for _, v := range []float64{0, 3.7e-30, 4.13e-15, 2.385e-9, 7.1e-6, 1.234e-3, 0.5, 3.1, 99999.4, 1.6e6, -12.5} {
		for name, ok := range map[string]bool{
			"pressure": func() bool { g, e := ParsePressure(Pascal(v).String()); return near(float64(g), v, e) }(),
			"rate":     func() bool { g, e := ParsePressureRate(PascalPerSecond(v).String()); return near(float64(g), v, e) }(),
			"difference": func() bool {
				g, e := ParseKelvinDifference(KelvinDifference(v).String())
				return near(float64(g), v, e)
			}(),
			"length":    func() bool { g, e := ParseLength(Metre(v).String()); return near(float64(g), v, e) }(),
			"duration":  func() bool { g, e := ParseSecond(Second(v).String()); return near(float64(g), v, e) }(),
			"gdd":       func() bool { g, e := ParseGDD(SecondSquared(v).String()); return near(float64(g), v, e) }(),
			"energy":    func() bool { g, e := ParseEnergy(Joule(v).String()); return near(float64(g), v, e) }(),
			"power":     func() bool { g, e := ParsePower(Watt(v).String()); return near(float64(g), v, e) }(),
			"frequency": func() bool { g, e := ParseFrequency(Hertz(v).String()); return near(float64(g), v, e) }(),
			"volume":    func() bool { g, e := ParseVolume(CubicMetre(v).String()); return near(float64(g), v, e) }(),
			"loss":      func() bool { g, e := ParseAttenuation(DecibelPerMetre(v).String()); return near(float64(g), v, e) }(),
			"n2": func() bool {
				g, e := ParseNonlinearIndex(SquareMetrePerWatt(v).String())
				return near(float64(g), v, e)
			}(),
			"leak": func() bool {
				g, e := ParseThroughput(PascalCubicMetrePerSecond(v).String())
				return near(float64(g), v, e)
			}(),
			"speed": func() bool {
				g, e := ParsePumpSpeed(CubicMetrePerSecond(v).String())
				return near(float64(g), v, e)
			}(),
			"conductance": func() bool {
				g, e := ParseSonicConductance(SonicConductance(v).String())
				return near(float64(g), v, e)
			}(),
			"share": func() bool { g, e := ParseFraction(Fraction(v).String()); return near(float64(g), v, e) }(),
			"celsius": func() bool {
				g, e := ParseTemperature(Celsius(v).String())
				return near(float64(g), float64(Celsius(v)), e)
			}(),
		} {
			if !ok {
				t.Errorf("%s of %v SI is not read back from its own text", name, v)
			}
		}
	}
}

func TestNoNumberIsSaidInWords(t *testing.T) {
	if got := Pascal(math.NaN()).String(); got != "no value" {
		t.Errorf("NaN is written %q", got)
	}
}

func TestADegreeOfDifferenceIsAKelvin(t *testing.T) {
	for text, want := range map[string]float64{"0.1 K": 0.1, "0.1 degC": 0.1, "50 mK": 0.05} {
		if got, err := ParseKelvinDifference(text); err != nil || float64(got) != want {
			t.Errorf("%s = %v K, %v; want %v K", text, float64(got), err, want)
		}
	}
}

func TestTheNumberWrittenComesBackInTheAdvice(t *testing.T) {
	var e *TextError
	if _, err := ParsePressure("16"); !errors.As(err, &e) || !strings.Contains(e.Reason, `such as "16 bar"`) {
		t.Errorf("advice for 16 is %q", e.Reason)
	}
}
