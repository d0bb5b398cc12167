package unit

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// ErrUnit is wrapped by every error of parsing a quantity.
var ErrUnit = errors.New("not a quantity")

// TextError says why a text is not a quantity. It wraps ErrUnit.
type TextError struct {
	Text   string // as written, cut to a length that fits a message
	Reason string // what was expected
}

// Error quotes the text and gives the reason.
func (e *TextError) Error() string { return fmt.Sprintf("%q is %v: %s", e.Text, ErrUnit, e.Reason) }

// Unwrap returns ErrUnit.
func (e *TextError) Unwrap() error { return ErrUnit }

func refuse(text, format string, args ...any) error {
	return &TextError{clip(text), fmt.Sprintf(format, args...)}
}

// scale says how a number in one written unit becomes SI: si = factor·x + offset.
// A factor that is a power of ten moves the decimal exponent of the text
// instead, so that 180 nm is the float64 nearest to 180e-9.
type scale struct {
	names  []string // the first is the one that messages and output use
	factor float64
	offset float64
}

// dimension is what a text may be read as.
type dimension struct {
	noun    string
	example string
	scales  []scale
}

// Pounds, inches and standard gravity are exact, so this is too
// (NIST SP 811 (2008), appendix B.8).
const pascalPerPSI = 0.45359237 * 9.80665 / (0.0254 * 0.0254)

var (
	pressureDim = dimension{"pressure", "9 bar", []scale{
		{[]string{"bar"}, 1e5, 0}, {[]string{"mbar"}, 1e2, 0}, {[]string{"ubar", "µbar"}, 1e-1, 0},
		{[]string{"Pa"}, 1, 0}, {[]string{"hPa"}, 1e2, 0}, {[]string{"kPa"}, 1e3, 0}, {[]string{"MPa"}, 1e6, 0},
		{[]string{"atm"}, 101325, 0}, {[]string{"psi"}, pascalPerPSI, 0}, {[]string{"Torr"}, 101325.0 / 760, 0},
	}}
	rateDim = dimension{"rate of pressure", "0.1 bar/s", []scale{
		{[]string{"bar/s"}, 1e5, 0}, {[]string{"mbar/s"}, 1e2, 0}, {[]string{"Pa/s"}, 1, 0}, {[]string{"kPa/s"}, 1e3, 0},
		{[]string{"bar/min"}, 1e5 / 60, 0}, {[]string{"mbar/min"}, 1e2 / 60.0, 0}, {[]string{"Pa/min"}, 1 / 60.0, 0},
		{[]string{"kPa/min"}, 1e3 / 60, 0},
	}}
	temperatureDim = dimension{"temperature", "22 degC", []scale{
		{[]string{"degC", "°C", "Cel"}, 1, 273.15}, {[]string{"K"}, 1, 0},
	}}
	differenceDim = dimension{"temperature difference", "0.1 K", []scale{
		{[]string{"K", "degC", "°C", "Cel"}, 1, 0}, {[]string{"mK"}, 1e-3, 0},
	}}
	lengthDim = dimension{"length", "34 um", []scale{
		{[]string{"m"}, 1, 0}, {[]string{"cm"}, 1e-2, 0}, {[]string{"mm"}, 1e-3, 0},
		{[]string{"um", "µm"}, 1e-6, 0}, {[]string{"nm"}, 1e-9, 0},
	}}
	secondDim = dimension{"duration", "35 fs", []scale{
		{[]string{"fs"}, 1e-15, 0}, {[]string{"ps"}, 1e-12, 0}, {[]string{"ns"}, 1e-9, 0},
		{[]string{"us", "µs"}, 1e-6, 0}, {[]string{"ms"}, 1e-3, 0}, {[]string{"s"}, 1, 0},
		{[]string{"min"}, 60, 0}, {[]string{"h"}, 3600, 0}, {[]string{"d"}, 86400, 0},
	}}
	gddDim = dimension{"group-delay dispersion", "-40 fs2", []scale{
		{[]string{"fs2", "fs^2", "fs²"}, 1e-30, 0}, {[]string{"ps2", "ps^2", "ps²"}, 1e-24, 0},
	}}
	energyDim = dimension{"energy", "1.5 uJ", []scale{
		{[]string{"uJ", "µJ"}, 1e-6, 0}, {[]string{"nJ"}, 1e-9, 0}, {[]string{"mJ"}, 1e-3, 0}, {[]string{"J"}, 1, 0},
	}}
	powerDim = dimension{"power", "100 mW", []scale{
		{[]string{"W"}, 1, 0}, {[]string{"mW"}, 1e-3, 0}, {[]string{"uW", "µW"}, 1e-6, 0}, {[]string{"kW"}, 1e3, 0},
		{[]string{"MW"}, 1e6, 0},
	}}
	frequencyDim = dimension{"repetition rate", "100 kHz", []scale{
		{[]string{"kHz"}, 1e3, 0}, {[]string{"Hz"}, 1, 0}, {[]string{"MHz"}, 1e6, 0},
	}}
	volumeDim = dimension{"volume", "60 cm3", []scale{
		{[]string{"cm3", "cm^3", "cm³", "mL", "ml"}, 1e-6, 0}, {[]string{"L", "l"}, 1e-3, 0}, {[]string{"m3", "m^3", "m³"}, 1, 0},
	}}
	attenuationDim = dimension{"attenuation", "1 dB/m", []scale{
		{[]string{"dB/m"}, 1, 0}, {[]string{"dB/km"}, 1e-3, 0}, {[]string{"dB/cm"}, 1e2, 0},
	}}
	kerrDim = dimension{"nonlinear index", "9.11e-24 m2/W", []scale{
		{[]string{"m2/W", "m^2/W", "m²/W"}, 1, 0}, {[]string{"cm2/W", "cm^2/W", "cm²/W"}, 1e-4, 0},
	}}
	throughputDim = dimension{"leak rate", "1e-6 mbar L/s", []scale{
		{[]string{"mbar L/s", "mbar·L/s", "mbar*L/s"}, 0.1, 0}, {[]string{"Pa m3/s", "Pa·m3/s", "Pa·m³/s", "Pa*m3/s"}, 1, 0},
	}}
	speedDim = dimension{"pump speed", "4 m3/h", []scale{
		{[]string{"m3/h", "m^3/h", "m³/h"}, 1.0 / 3600, 0}, {[]string{"L/s", "l/s"}, 1e-3, 0}, {[]string{"L/min", "l/min"}, 1e-3 / 60, 0},
		{[]string{"m3/s", "m^3/s", "m³/s"}, 1, 0},
	}}
	conductanceDim = dimension{"sonic conductance", "0.5 dm3/(s bar)", []scale{
		{[]string{"dm3/(s bar)", "dm3/(s·bar)", "dm³/(s·bar)", "L/(s bar)"}, 1e-8, 0}, {[]string{"m3/(s Pa)", "m3/(s·Pa)", "m³/(s·Pa)"}, 1, 0},
	}}
	fractionDim = dimension{"share", "2 %", []scale{
		{[]string{"%"}, 1e-2, 0}, {[]string{"ppm"}, 1e-6, 0},
	}}
)

// gaugeMarks end a unit of pressure that counts from ambient.
var gaugeMarks = []string{"(g)", "_g", " gauge"}

// Cut separates the leading number of s from the unit behind it. It checks
// neither.
func Cut(s string) (number, name string) {
	s = strings.TrimSpace(s)
	s = strings.Replace(s, "\u2212", "-", 1) // the typographic minus sign that pasted text carries
	end := 0
	for end < len(s) {
		c := s[end]
		isExp := (c == 'e' || c == 'E') && end > 0 && end+1 < len(s) &&
			(s[end+1] >= '0' && s[end+1] <= '9' || (s[end+1] == '-' || s[end+1] == '+') && end+2 < len(s) && s[end+2] >= '0' && s[end+2] <= '9')
		isSign := (c == '-' || c == '+') && (end == 0 || s[end-1] == 'e' || s[end-1] == 'E')
		if c >= '0' && c <= '9' || c == '.' || isExp || isSign {
			end++
			continue
		}
		break
	}
	return s[:end], strings.TrimSpace(s[end:])
}

// si scales the written number to SI; ok is false where it is not a number or
// too large to be one.
func (sc scale) si(number string) (v float64, ok bool) {
	factor := sc.factor
	if exp := math.Round(math.Log10(factor)); math.Abs(math.Log10(factor)-exp) < 1e-12 {
		mantissa, own, found := strings.Cut(strings.ToLower(number), "e")
		shift := 0
		if found {
			var err error
			if shift, err = strconv.Atoi(own); err != nil {
				return 0, false
			}
		}
		number, factor = mantissa+"e"+strconv.Itoa(shift+int(exp)), 1
	}
	v, err := strconv.ParseFloat(number, 64)
	v = v*factor + sc.offset
	return v, err == nil && !math.IsInf(v, 0) && !math.IsNaN(v)
}

// parse reads text as a quantity of dimension d, in SI units.
func (d dimension) parse(text string) (float64, error) {
	number, name := Cut(text)
	if _, ok := (scale{factor: 1}).si(number); !ok {
		return 0, refuse(text, "expected a %s such as %q", d.noun, d.example)
	}
	if name == "" {
		_, common := Cut(d.example)
		return 0, refuse(text, "it has no unit; expected a %s such as %q (%s)", d.noun, clip(number)+" "+common, d.list())
	}
	for _, sc := range d.scales {
		for _, n := range sc.names {
			if n == name {
				v, ok := sc.si(number)
				if !ok {
					return 0, refuse(text, "too large a %s", d.noun)
				}
				return v, nil
			}
		}
	}
	return 0, refuse(text, "unit %q is not one of a %s (%s)", clip(name), d.noun, d.list())
}

func (d dimension) list() string {
	names := make([]string, len(d.scales))
	for i, sc := range d.scales {
		names[i] = sc.names[0]
	}
	return strings.Join(names, ", ")
}

func clip(s string) string {
	const most = 40
	r := []rune(s)
	if len(r) <= most {
		return s
	}
	return string(r[:most]) + "…"
}

// ParsePressure reads an absolute pressure such as "9 bar". A gauge pressure
// is refused here: it needs an ambient pressure, see ParseGauge.
func ParsePressure(text string) (Pascal, error) {
	if IsGauge(text) {
		return 0, refuse(text, "it is a gauge pressure; expected an absolute one such as %q", pressureDim.example)
	}
	v, err := pressureDim.parse(text)
	return Pascal(v), err
}

// IsGauge reports whether text is written as a pressure above ambient:
// "3 bar(g)", "3 bar_g" or "3 bar gauge".
func IsGauge(text string) bool {
	for _, m := range gaugeMarks {
		if strings.HasSuffix(strings.TrimSpace(text), m) {
			return true
		}
	}
	return false
}

// ParseGauge reads a pressure above ambient such as "3 bar(g)".
func ParseGauge(text string) (GaugePascal, error) {
	trimmed := strings.TrimSpace(text)
	for _, m := range gaugeMarks {
		if rest, ok := strings.CutSuffix(trimmed, m); ok {
			v, err := pressureDim.parse(rest)
			return GaugePascal(v), err
		}
	}
	return 0, refuse(text, "expected a gauge pressure such as %q", "3 bar(g)")
}

// The parsers of the other quantities read text such as the example of each
// dimension and return the value in the unit of the type.

// ParsePressureRate reads a rate of pressure such as "0.1 bar/s".
func ParsePressureRate(text string) (PascalPerSecond, error) {
	v, err := rateDim.parse(text)
	return PascalPerSecond(v), err
}

// ParseTemperature reads a temperature such as "22 degC" or "295 K".
func ParseTemperature(text string) (Kelvin, error) {
	v, err := temperatureDim.parse(text)
	return Kelvin(v), err
}

// ParseKelvinDifference reads a difference of temperatures such as "0.1 K";
// a degree Celsius is a kelvin here.
func ParseKelvinDifference(text string) (KelvinDifference, error) {
	v, err := differenceDim.parse(text)
	return KelvinDifference(v), err
}

// ParseLength reads a length or wavelength such as "34 um" or "1030 nm".
func ParseLength(text string) (Metre, error) {
	v, err := lengthDim.parse(text)
	return Metre(v), err
}

// ParseSecond reads a physical duration such as "35 fs".
func ParseSecond(text string) (Second, error) {
	v, err := secondDim.parse(text)
	return Second(v), err
}

// ParseGDD reads a group-delay dispersion such as "-40 fs2".
func ParseGDD(text string) (SecondSquared, error) {
	v, err := gddDim.parse(text)
	return SecondSquared(v), err
}

// ParseEnergy reads an energy such as "1.5 uJ".
func ParseEnergy(text string) (Joule, error) {
	v, err := energyDim.parse(text)
	return Joule(v), err
}

// ParsePower reads a power such as "100 mW".
func ParsePower(text string) (Watt, error) {
	v, err := powerDim.parse(text)
	return Watt(v), err
}

// ParseFrequency reads a repetition rate such as "100 kHz".
func ParseFrequency(text string) (Hertz, error) {
	v, err := frequencyDim.parse(text)
	return Hertz(v), err
}

// ParseVolume reads a volume such as "60 cm3".
func ParseVolume(text string) (CubicMetre, error) {
	v, err := volumeDim.parse(text)
	return CubicMetre(v), err
}

// ParseAttenuation reads an attenuation such as "1 dB/m".
func ParseAttenuation(text string) (DecibelPerMetre, error) {
	v, err := attenuationDim.parse(text)
	return DecibelPerMetre(v), err
}

// ParseNonlinearIndex reads a nonlinear index such as "9.11e-24 m2/W".
func ParseNonlinearIndex(text string) (SquareMetrePerWatt, error) {
	v, err := kerrDim.parse(text)
	return SquareMetrePerWatt(v), err
}

// ParsePumpSpeed reads a pump speed such as "4 m3/h".
func ParsePumpSpeed(text string) (CubicMetrePerSecond, error) {
	v, err := speedDim.parse(text)
	return CubicMetrePerSecond(v), err
}

// ParseSonicConductance reads the conductance of a valve such as
// "0.5 dm3/(s bar)".
func ParseSonicConductance(text string) (SonicConductance, error) {
	v, err := conductanceDim.parse(text)
	return SonicConductance(v), err
}

// ParseThroughput reads a leak rate such as "1e-6 mbar L/s".
func ParseThroughput(text string) (PascalCubicMetrePerSecond, error) {
	v, err := throughputDim.parse(text)
	return PascalCubicMetrePerSecond(v), err
}

// ParseFraction reads a share such as "2 %" or "20 ppm".
func ParseFraction(text string) (Fraction, error) {
	v, err := fractionDim.parse(text)
	return Fraction(v), err
}
