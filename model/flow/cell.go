package flow

import (
	"fmt"
	"math"
	"time"

	"barline/model/unit"
)

// Cell is a volume of gas with walls: one gas cell, or all that is open to it.
type Cell struct {
	Gas    Medium
	Volume unit.CubicMetre
	Wall   unit.Kelvin
	// WallTime is the time constant with which the gas takes the temperature
	// of the wall: for a cell of some centimetres seconds to a minute.
	// Zero is at once.
	WallTime time.Duration
}

// CellState is the gas in a cell. The zero value is an empty one.
type CellState struct {
	Amount      float64 // mol
	Temperature unit.Kelvin
}

func (c Cell) check() error {
	if err := c.Gas.check(); err != nil {
		return err
	}
	if !(c.Volume > 0) || math.IsInf(float64(c.Volume), 0) {
		return fmt.Errorf("cell of %v m3: %w: wanted a volume above zero", float64(c.Volume), ErrRange)
	}
	if c.WallTime < 0 {
		return fmt.Errorf("wall time constant %v: %w", c.WallTime, ErrRange)
	}
	return checkState(0, c.Wall)
}

// At returns the state with the gas at p and t.
func (c Cell) At(p unit.Pascal, t unit.Kelvin) (CellState, error) {
	if err := c.check(); err != nil {
		return CellState{}, err
	}
	rho, err := c.Gas.Density(p, t)
	return CellState{float64(rho) * float64(c.Volume), t}, err
}

// Pressure returns the pressure of s by the virial equation, as far as that is
// known at its temperature, and the ideal gas beyond.
func (c Cell) Pressure(s CellState) unit.Pascal {
	if s.Amount <= 0 {
		return 0
	}
	rho := s.Amount / float64(c.Volume)
	b, cc, err := c.Gas.virial(s.Temperature)
	z := 1 + rho*(b+cc*rho)
	if err != nil || !(z > 0.1) {
		z = 1
	}
	return unit.Pascal(rho * GasConstant * float64(s.Temperature) * z)
}

// AdiabaticFill returns the temperature after a cell at p1 and t is filled to
// p2 with gas that comes at t, faster than heat leaves:
//
//	T₂ = γT/(1 + (γ−1)·p₁/p₂)
//
// γT for an evacuated cell, 490 K from 294 K with a noble gas.
// Source: energy balance of an open vessel, ideal gas.
func AdiabaticFill(m Medium, t unit.Kelvin, p1, p2 unit.Pascal) unit.Kelvin {
	return unit.Kelvin(m.HeatRatio * float64(t) / (1 + (m.HeatRatio-1)*float64(p1/p2)))
}

// AdiabaticVent returns the temperature of what stays when the pressure falls
// from p1 to p2 faster than heat comes in: T₂ = T₁·(p₂/p₁)^((γ−1)/γ).
func AdiabaticVent(m Medium, t unit.Kelvin, p1, p2 unit.Pascal) unit.Kelvin {
	return unit.Kelvin(float64(t) * math.Pow(float64(p2/p1), (m.HeatRatio-1)/m.HeatRatio))
}
