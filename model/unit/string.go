package unit

import (
	"math"
	"strconv"
)

// step is one unit that a quantity may be written in, used from least up.
type step struct {
	least  float64 // SI
	factor float64 // SI value of one such unit
	name   string
}

// write prints v in the first step whose least it reaches, or in the last one.
// Zero is written in the first. A value that is not a number says so in words.
func write(v float64, digits int, steps ...step) string {
	if math.IsNaN(v) {
		return "no value"
	}
	s := steps[len(steps)-1]
	for _, t := range steps {
		if a := math.Abs(v); a >= t.least || a == 0 {
			s = t
			break
		}
	}
	return strconv.FormatFloat(v/s.factor, 'g', digits, 64) + " " + s.name
}

// The String methods write a quantity with its unit, so that the text can be
// read back by the parser of the same quantity. Six digits are kept, four
// where no instrument of the bench gives more.

// String writes p in bar from one bar up, below in mbar, and in Pa below 1 Pa.
func (p Pascal) String() string {
	return write(float64(p), 6, step{1e5, 1e5, "bar"}, step{1, 1e2, "mbar"}, step{0, 1, "Pa"})
}

// String writes k in degrees Celsius.
func (k Kelvin) String() string { return write(k.Celsius(), 6, step{0, 1, "degC"}) }

// String writes d in kelvins.
func (d KelvinDifference) String() string { return write(float64(d), 6, step{0, 1, "K"}) }

// String writes m in metres, centimetres, micrometres or nanometres; a
// wavelength below 2 µm is in nanometres.
func (m Metre) String() string {
	return write(float64(m), 6, step{1, 1, "m"}, step{1e-3, 1e-2, "cm"}, step{2e-6, 1e-6, "um"}, step{0, 1e-9, "nm"})
}

// String writes r in bar per second.
func (r PascalPerSecond) String() string {
	return write(float64(r), 4, step{1e2, 1e5, "bar/s"}, step{1, 1e2, "mbar/s"}, step{0, 1, "Pa/s"})
}

// String writes s from femtoseconds to seconds; nothing is written in minutes.
func (s Second) String() string {
	return write(float64(s), 6, step{1, 1, "s"}, step{1e-3, 1e-3, "ms"}, step{1e-6, 1e-6, "us"},
		step{1e-9, 1e-9, "ns"}, step{1e-12, 1e-12, "ps"}, step{0, 1e-15, "fs"})
}

// String writes g in fs2.
func (g SecondSquared) String() string { return write(float64(g), 6, step{0, 1e-30, "fs2"}) }

// String writes j from nanojoules to joules.
func (j Joule) String() string {
	return write(float64(j), 6, step{1, 1, "J"}, step{1e-3, 1e-3, "mJ"}, step{1e-6, 1e-6, "uJ"}, step{0, 1e-9, "nJ"})
}

// String writes w from microwatts to megawatts.
func (w Watt) String() string {
	return write(float64(w), 4, step{1e6, 1e6, "MW"}, step{1e3, 1e3, "kW"}, step{1, 1, "W"}, step{1e-3, 1e-3, "mW"}, step{0, 1e-6, "uW"})
}

// String writes h in Hz, kHz or MHz.
func (h Hertz) String() string {
	return write(float64(h), 6, step{1e6, 1e6, "MHz"}, step{1e3, 1e3, "kHz"}, step{0, 1, "Hz"})
}

// String writes v in cubic metres, litres or cubic centimetres.
func (v CubicMetre) String() string {
	return write(float64(v), 6, step{1, 1, "m3"}, step{1e-3, 1e-3, "L"}, step{0, 1e-6, "cm3"})
}

// String writes d in dB/m.
func (d DecibelPerMetre) String() string { return write(float64(d), 4, step{0, 1, "dB/m"}) }

// String writes n in m2/W.
func (n SquareMetrePerWatt) String() string { return write(float64(n), 4, step{0, 1, "m2/W"}) }

// String writes q in mbar L/s, the customary unit of leak rates.
func (q PascalCubicMetrePerSecond) String() string {
	return write(float64(q), 4, step{0, 0.1, "mbar L/s"})
}

// String writes s in L/s.
func (s CubicMetrePerSecond) String() string { return write(float64(s), 4, step{0, 1e-3, "L/s"}) }

// String writes c in dm3/(s bar), as data sheets of valves do.
func (c SonicConductance) String() string { return write(float64(c), 4, step{0, 1e-8, "dm3/(s bar)"}) }

// String writes n in mol/m3.
func (n MolePerCubicMetre) String() string { return write(float64(n), 6, step{0, 1, "mol/m3"}) }

// String writes f in per cent, or in ppm below 0.01 %.
func (f Fraction) String() string {
	return write(float64(f), 4, step{1e-4, 1e-2, "%"}, step{0, 1e-6, "ppm"})
}
