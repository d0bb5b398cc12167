package limit

import (
	"fmt"
	"math"

	"barline/model/unit"
)

// EnergyOrder asks an attenuator for a pulse energy. Only Limits.Energy makes a
// valid one; the zero value is not.
type EnergyOrder struct {
	energy unit.Joule
	share  unit.Fraction
	valid  bool
}

// Order returns the energy, in the fibre, and the share of the full energy
// that the attenuator is to let through. ok is false for one that no limit
// made.
func (o EnergyOrder) Order() (energy unit.Joule, share unit.Fraction, ok bool) {
	return o.energy, o.share, o.valid
}

// Energy returns the order for a pulse energy in the fibre, where full is what
// comes there with the attenuator wide open. Without a MostEnergy it is never
// moved.
func (l Limits) Energy(wanted, full unit.Joule) (EnergyOrder, error) {
	refuse := func(format string, args ...any) (EnergyOrder, error) {
		return EnergyOrder{}, fmt.Errorf("pulse energy %v: %s: %w", wanted, fmt.Sprintf(format, args...), ErrLimit)
	}
	if !(l.MostEnergy > 0) {
		return refuse("no highest energy is given, so that the attenuator stays where it is")
	}
	if !(full > 0) || math.IsInf(float64(full), 0) {
		return refuse("the full energy is %v, expected more than zero", full)
	}
	if !(wanted > 0 && wanted <= l.MostEnergy) { // this way round, NaN is refused too
		return refuse("expected more than 0 J and at most %v", l.MostEnergy)
	}
	share := unit.Fraction(wanted / full)
	if share > 1 {
		return refuse("wide open the attenuator lets %v through", full)
	}
	return EnergyOrder{wanted, share, true}, nil
}
