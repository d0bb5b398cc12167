package calibration

import (
	"fmt"

	"barline/model/unit"
)

// Parameter is one correction that may be fitted.
type Parameter uint8

const (
	IndexScale       Parameter = iota // n−1 of the gas, relative
	CoreDiameter                      // relative
	Wall                              // relative
	Energy                            // in the fibre, relative
	NonlinearIndex                    // relative
	GaugeZero                         // Pa that the gauges read too high
	WavelengthOffset                  // m that the spectrometer reads too high
	parameterCount
)

// ParameterCount is the number of parameters, for arrays indexed by them.
const ParameterCount = int(parameterCount)

var parameterText = [ParameterCount]string{
	"index-scale", "core-diameter", "wall", "energy", "nonlinear-index", "gauge-zero", "wavelength-offset",
}

// String returns the parameter as commands spell it.
func (p Parameter) String() string {
	if int(p) < ParameterCount {
		return parameterText[p]
	}
	return fmt.Sprintf("parameter %d", uint8(p))
}

// ParseParameter returns the parameter that text spells.
func ParseParameter(text string) (Parameter, error) {
	for i, t := range parameterText {
		if t == text {
			return Parameter(i), nil
		}
	}
	return 0, fmt.Errorf("correction %q: expected one of %q", text, parameterText)
}

// Unit returns the unit of the parameter's values; "1" for a relative one.
func (p Parameter) Unit() string {
	switch p {
	case GaugeZero:
		return "Pa"
	case WavelengthOffset:
		return "m"
	}
	return "1"
}

// Format writes a value of the parameter with its unit.
func (p Parameter) Format(v float64) string {
	switch p {
	case GaugeZero:
		return fmt.Sprintf("%+.1f mbar", v/float64(unit.Millibar))
	case WavelengthOffset:
		return fmt.Sprintf("%+.2f nm", unit.Metre(v).Nanometres())
	}
	return fmt.Sprintf("%+.2f %%", 100*v)
}

// Corrections say by how much a bench differs from its bench file. The zero
// value is the bench file.
type Corrections [ParameterCount]float64

// DefaultPrior is the standard uncertainty of each correction on a careful
// bench before calibration (common practice, no source); the nonlinear index
// is that of a gas whose sources differ by a tenth.
func DefaultPrior() [ParameterCount]float64 {
	return [ParameterCount]float64{
		IndexScale: 0.01, CoreDiameter: 0.01, Wall: 0.02, Energy: 0.05, NonlinearIndex: 0.1,
		GaugeZero: 10 * float64(unit.Millibar), WavelengthOffset: 0.2e-9,
	}
}
