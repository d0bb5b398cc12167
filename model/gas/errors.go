package gas

import "errors"

var (
	// ErrUnknown is wrapped where a gas or a source of numbers is not known.
	ErrUnknown = errors.New("not known")
	// ErrState is wrapped where there is no gas to speak of: outside the range
	// of pressure and temperature, or condensed.
	ErrState = errors.New("no such gas")
)

// The refusals of an Isotherm are values made once, so that a stream of bad
// readings allocates nothing.
var (
	errTemperature error = stateError("the temperature is outside -23 degC to 127 degC, for which densities were checked")
	errNegative    error = stateError("the pressure is below zero or not a number")
	errPressure    error = stateError("the pressure is above the range in which this density was checked")
	errCondensed   error = stateError("the gas is liquid at this pressure and temperature")
	errAir         error = stateError("the share of air is outside 0 to 100 %")
	errSolve       error = stateError("no density fits this pressure and temperature")
)

type stateError string

func (e stateError) Error() string        { return string(e) }
func (e stateError) Is(target error) bool { return target == ErrState }
