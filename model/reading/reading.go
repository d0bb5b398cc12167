// Package reading defines what an instrument said: a value, when it was taken,
// and how far it can be trusted.
//
// The status is that of NAMUR NE 107. The zero value of a Reading is a
// failure, so that a channel which has never spoken is never believed.
package reading

import (
	"fmt"
	"time"
)

// Status is the condition of a reading in the words of NAMUR NE 107.
type Status uint8

const (
	// Failure: no valid value. It is the zero value.
	Failure Status = iota
	// FunctionCheck: a valid instrument that is not measuring its quantity
	// now, such as a spectrometer behind a closed shutter.
	FunctionCheck
	// OutOfSpecification: measured outside the range that the instrument
	// is specified for.
	OutOfSpecification
	// MaintenanceRequired: valid still, but the instrument asks for care.
	MaintenanceRequired
	// Good: valid.
	Good
)

var statusText = [...]string{"failure", "function check", "out of specification", "maintenance required", "good"}

// String returns the NE 107 term.
func (s Status) String() string {
	if int(s) < len(statusText) {
		return statusText[s]
	}
	return fmt.Sprintf("status %d", uint8(s))
}

// ParseStatus returns the status of an NE 107 term as String writes it.
func ParseStatus(text string) (Status, error) {
	for i, t := range statusText {
		if t == text {
			return Status(i), nil
		}
	}
	return Failure, fmt.Errorf("status %q: expected one of %q", text, statusText)
}

// Usable reports whether a value may enter a fit, a drift statistic or a
// decision that moves gas.
func (s Status) Usable() bool { return s == Good || s == MaintenanceRequired }

// Role is what a channel measures on the bench. Values are in the SI unit
// named beside each.
type Role uint8

const (
	NoRole           Role = iota // shown and recorded, drives nothing
	CellAPressure                // Pa, absolute; cell at the fibre input
	CellBPressure                // Pa, absolute; cell at the fibre output
	ManifoldPressure             // Pa, absolute
	SupplyPressure               // Pa, absolute; behind the regulator
	Ambient                      // Pa, barometer
	FibreTemperature             // K
	CellTemperature              // K
	RoomTemperature              // K
	PulseEnergy                  // J, in the fibre
	Emission                     // m, vacuum; centroid or peak as the bench file says
	EmissionWidth                // m, full width at half maximum
	EmissionStrength             // dimensionless; share of the output energy, or counts
	Setpoint                     // Pa, absolute; the controller's own, read back
	ControllerSensor             // Pa, absolute; the controller's own transducer
	InletValve                   // 0 shut … 1 open, read back
	PumpValve                    // 0 shut … 1 open, read back
	VentValve                    // 0 shut … 1 open, read back
	ShutterOpen                  // 0 shut, 1 open
	LaserOn                      // 0 off, 1 on
	Attenuator                   // share of the full pulse energy let through, 0 to 1
	roleCount
)

// RoleCount is the number of roles, for arrays indexed by Role.
const RoleCount = int(roleCount)

var roleText = [RoleCount]string{
	"none", "cell-a-pressure", "cell-b-pressure", "manifold-pressure", "supply-pressure", "ambient-pressure",
	"fibre-temperature", "cell-temperature", "room-temperature", "pulse-energy",
	"emission", "emission-width", "emission-strength", "setpoint", "controller-pressure",
	"inlet-valve", "pump-valve", "vent-valve", "shutter-open", "laser-on", "attenuator",
}

// String returns the role as the bench file spells it.
func (r Role) String() string {
	if int(r) < RoleCount {
		return roleText[r]
	}
	return fmt.Sprintf("role %d", uint8(r))
}

// ParseRole returns the role that the bench file spells text.
func ParseRole(text string) (Role, error) {
	for i, t := range roleText {
		if t == text {
			return Role(i), nil
		}
	}
	return NoRole, fmt.Errorf("role %q: expected one of %q", text, roleText)
}

// Stamp is an instant of bench time: UTC for people, Mono for arithmetic.
// Mono counts from the start of the record and never steps back.
type Stamp struct {
	UTC  time.Time
	Mono time.Duration
}

// Reading is one value from one channel.
type Reading struct {
	Channel string // the channel's name in the bench file
	Role    Role
	Value   float64 // SI unit of the role; meaningless where Status is Failure
	Taken   Stamp   // when the last byte arrived, or interpolated within a block
	Status  Status
	Reason  string // why the status is not good; empty where it is
}

// UnmarshalText reads the role as ParseRole does.
func (r *Role) UnmarshalText(text []byte) (err error) {
	*r, err = ParseRole(string(text))
	return err
}

// MarshalText writes the role as ParseRole reads it.
func (r Role) MarshalText() ([]byte, error) {
	if int(r) >= RoleCount {
		return nil, fmt.Errorf("%v: expected one below %d", r, RoleCount)
	}
	return []byte(r.String()), nil
}

// IsPressure reports whether readings of the role are absolute pressures.
func (r Role) IsPressure() bool {
	switch r {
	case CellAPressure, CellBPressure, ManifoldPressure, SupplyPressure, Ambient, Setpoint, ControllerSensor:
		return true
	}
	return false
}

// IsTemperature reports whether readings of the role are temperatures.
func (r Role) IsTemperature() bool {
	return r == FibreTemperature || r == CellTemperature || r == RoomTemperature
}

// IsCommanded reports whether the program may write to a channel of the role.
func (r Role) IsCommanded() bool {
	switch r {
	case Setpoint, InletValve, PumpValve, VentValve, Attenuator:
		return true
	}
	return false
}

// Words returns every role as a bench file spells it.
func (Role) Words() []string { return roleText[:] }
