package gas

import (
	"fmt"
	"math"
	"strings"
)

// Density names how molar density follows from pressure and temperature.
type Density uint8

const (
	// Reference is the gas's reference equation of state.
	Reference Density = iota
	// Virial is Z = 1 + Bρ + Cρ² with the B and C of that equation.
	Virial
	// Ideal is p = ρRT. It is there to show how much the others matter:
	// argon at 30 bar is 2 % denser, xenon 24 %.
	Ideal
)

var densityText = [...]string{"reference", "virial", "ideal"}

// String returns the name as commands and bench files spell it.
func (d Density) String() string { return densityText[d] }

// ParseDensity reads the name of a density; empty means Reference.
func ParseDensity(text string) (Density, error) {
	if text == "" {
		return Reference, nil
	}
	for i, name := range densityText {
		if name == text {
			return Density(i), nil
		}
	}
	return 0, fmt.Errorf("density %q is %w: expected one of %s", text, ErrUnknown, strings.Join(densityText[:], ", "))
}

const (
	// idealR is the molar gas constant, exact since 2019 (SI Brochure, 9th
	// ed.), J/(mol K).
	idealR = 8.31446261815324

	lowestTemperature  = 250.0 // K
	highestTemperature = 400.0 // K

	highestPressure       = 100e5 // Pa, reference and ideal
	highestVirial         = 50e5  // Pa: 0.1 % of the equation of state there
	highestVirialOfXenon  = 30e5  // Pa: 0.2 %
	densityRelativeTarget = 1e-12
	// lastStep is the relative step of Newton's method after which another
	// would change the density by 1e-12 at most, but in the last percent
	// before the critical point.
	lastStep = 3e-7
)

// pure is one species at one temperature with the density chosen.
type pure struct {
	species *Species
	density Density
	fluid   fluid
	b, c    float64 // virials
	boiling float64 // Pa; +Inf where the gas cannot condense
	limit   float64 // mol/m³; the gas branch ends here
}

func (u *pure) set(s *Species, d Density, t float64) error {
	if !(t >= lowestTemperature && t <= highestTemperature) {
		return errTemperature
	}
	u.species, u.density = s, d
	u.fluid.set(s.equation, t)
	u.b, u.c = u.fluid.virials()
	u.boiling, u.limit = math.Inf(1), 3*s.equation.rhoRed
	if len(s.boundary) > 0 && t < s.equation.tRed {
		u.boiling = boilingPressure(s.boundary, t)
		u.limit = u.spinodal()
	}
	return nil
}

// molar returns the molar density in mol/m³ at the pressure p > 0 in Pa, and
// (∂p/∂ρ)_T there.
func (u *pure) molar(p float64) (rho, slope float64, err error) {
	switch {
	case !(p > 0):
		return 0, 0, errNegative
	case p >= u.boiling:
		return 0, 0, errCondensed
	case p > highestPressure:
		return 0, 0, errPressure
	}
	switch u.density {
	case Ideal:
		rt := idealR * u.fluid.t
		return p / rt, rt, nil
	case Virial:
		if p > highestVirial || p > highestVirialOfXenon && u.species.id == xenon {
			return 0, 0, errPressure
		}
		rho, slope = u.virial(p)
		return rho, slope, nil
	}
	return u.reference(p)
}

// virial solves ρRT(1 + Bρ + Cρ²) = p by Newton steps from the ideal gas, from
// where the root on the gas branch is reached from one side.
func (u *pure) virial(p float64) (rho, slope float64) {
	rt := idealR * u.fluid.t
	rho = p / rt
	for range 20 {
		f := rho*(1+rho*(u.b+rho*u.c)) - p/rt
		slope = 1 + rho*(2*u.b+3*rho*u.c)
		step := f / slope
		rho -= step
		if math.Abs(step) <= densityRelativeTarget*rho {
			break
		}
	}
	return rho, slope * rt
}

// reference solves the equation of state for the gas branch: Newton steps from
// the virial density, kept inside a bracket that the gas branch never leaves.
// Started from the ideal gas and left alone, Newton falls through to the liquid
// near the critical point of xenon.
func (u *pure) reference(p float64) (density, stiffness float64, err error) {
	lo, hi := 0.0, u.limit
	rho, _ := u.virial(p)
	if !(rho > 0 && rho < hi) {
		rho = 0.5 * hi
	}
	for range 100 {
		have, slope := u.fluid.pressure(rho)
		miss := have - p
		if slope > 0 && math.Abs(miss) <= lastStep*rho*slope {
			return rho - miss/slope, slope, nil // its square is what is left
		}
		if miss > 0 {
			hi = rho
		} else {
			lo = rho
		}
		next := rho - miss/slope
		if !(slope > 0 && next > lo && next < hi) {
			next = 0.5 * (lo + hi)
		}
		if hi-lo <= densityRelativeTarget*hi {
			return next, slope, nil // where the isotherm is flat
		}
		rho = next
	}
	return 0, 0, errSolve
}

// spinodal returns the density at which ∂p/∂ρ of the gas branch vanishes, a
// little below it. Only asked below the critical temperature, where the slope
// is negative at the critical density.
func (u *pure) spinodal() float64 {
	lo, hi := 0.0, u.species.equation.rhoRed
	for range 40 {
		mid := 0.5 * (lo + hi)
		if _, slope := u.fluid.pressure(mid); slope > 0 {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo
}
