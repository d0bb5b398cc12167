package unit

import (
	"math"
	"time"
)

// Quantities, each in the SI unit that its comment names.
type (
	// Pascal is an absolute pressure.
	Pascal float64
	// GaugePascal is a pressure above ambient, which is what many transducers
	// report. It has no String method: convert it, so no screen shows it bare.
	GaugePascal float64
	// PascalPerSecond is a rate of change of pressure.
	PascalPerSecond float64
	// Kelvin is a thermodynamic temperature.
	Kelvin float64
	// KelvinDifference is a difference of temperatures.
	KelvinDifference float64
	// Metre is a length or a vacuum wavelength.
	Metre float64
	// Second is a duration as a person writes it, from a pulse to a day.
	// Durations of the program are time.Duration, see Second.Duration.
	Second float64
	// SecondSquared is a group-delay dispersion.
	SecondSquared float64
	// Joule is an energy.
	Joule float64
	// Watt is a power.
	Watt float64
	// Hertz is a repetition rate.
	Hertz float64
	// CubicMetre is a volume.
	CubicMetre float64
	// DecibelPerMetre is an attenuation of power per length.
	DecibelPerMetre float64
	// SquareMetrePerWatt is a nonlinear refractive index.
	SquareMetrePerWatt float64
	// PascalCubicMetrePerSecond is a gas throughput or a leak rate.
	PascalCubicMetrePerSecond float64
	// CubicMetrePerSecond is the speed of a pump at its inlet.
	CubicMetrePerSecond float64
	// SonicConductance is the conductance C of a valve by ISO 6358-1 in
	// m³/(s Pa): volume of air at 20 °C and 100 kPa that passes when choked,
	// per upstream pressure.
	SonicConductance float64
	// MolePerCubicMetre is a molar density.
	MolePerCubicMetre float64
	// Fraction is a dimensionless share of one.
	Fraction float64
)

// Absolute adds the ambient pressure, measured or entered by the user.
func (g GaugePascal) Absolute(ambient Pascal) Pascal { return Pascal(g) + ambient }

// Multiples that code writes beside a number: 9 * unit.Bar.
const (
	Bar        Pascal = 1e5
	Millibar   Pascal = 1e2
	Atmosphere Pascal = 101325 // standard atmosphere, exact (10th CGPM, 1954)

	Micrometre Metre = 1e-6
	Nanometre  Metre = 1e-9
	Centimetre Metre = 1e-2

	Femtosecond        Second        = 1e-15
	FemtosecondSquared SecondSquared = 1e-30

	Microjoule Joule = 1e-6

	ZeroCelsius Kelvin = 273.15 // 0 °C, exact (SI Brochure, 9th ed., 2019, section 2.3.1)
)

// Celsius returns the temperature t in degrees Celsius as kelvins.
func Celsius(t float64) Kelvin { return Kelvin(t) + ZeroCelsius }

// Celsius returns k in degrees Celsius.
func (k Kelvin) Celsius() float64 { return float64(k - ZeroCelsius) }

// Bar returns p in bar.
func (p Pascal) Bar() float64 { return float64(p) / 1e5 }

// Nanometres returns m in nanometres.
func (m Metre) Nanometres() float64 { return float64(m) * 1e9 }

// Micrometres returns m in micrometres.
func (m Metre) Micrometres() float64 { return float64(m) * 1e6 }

// Duration returns s to the nanosecond, for timers and delays.
func (s Second) Duration() time.Duration { return time.Duration(math.Round(float64(s) * 1e9)) }

// Femtoseconds returns s in femtoseconds.
func (s Second) Femtoseconds() float64 { return float64(s) * 1e15 }

// Microjoules returns j in microjoules.
func (j Joule) Microjoules() float64 { return float64(j) * 1e6 }
