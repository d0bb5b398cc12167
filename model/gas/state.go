package gas

import (
	"fmt"
	"math"

	"barline/model/taylor"
	"barline/model/unit"
)

// Isotherm is a medium at one temperature. It is for one goroutine; the zero
// value is not ready, Medium.Isotherm makes one.
type Isotherm struct {
	medium *Medium
	parts  [mostComponents + 1]pure
	excess [mostComponents + 1][mostComponents + 1]float64 // δᵢⱼ, m³/mol
	ready  bool
	t      unit.Kelvin
}

// Isotherm returns the medium at temperature t.
func (m *Medium) Isotherm(t unit.Kelvin) (*Isotherm, error) {
	iso := &Isotherm{medium: m}
	if err := iso.Set(t); err != nil {
		return nil, fmt.Errorf("%s at %v: %w", m.Name(), t, err)
	}
	return iso, nil
}

// Set moves the isotherm to temperature t. It allocates nothing.
func (iso *Isotherm) Set(t unit.Kelvin) error {
	if iso.ready && iso.t == t {
		return nil
	}
	iso.ready = false
	m := iso.medium
	for i := range m.count {
		iso.parts[i].species = nil
		if m.parts[i].fraction == 0 {
			continue // air: made when it is first asked for
		}
		if err := iso.prepare(i, t); err != nil {
			return err
		}
	}
	iso.ready, iso.t = true, t
	return nil
}

// prepare moves part i, and its pairs with the parts before it, to t.
func (iso *Isotherm) prepare(i int, t unit.Kelvin) error {
	m := iso.medium
	if err := iso.parts[i].set(m.parts[i].species, m.density, float64(t)); err != nil {
		return err
	}
	for j := range i {
		iso.excess[i][j] = excessSecondVirial(m.parts[i].species, m.parts[j].species, float64(t))
	}
	return nil
}

// State returns the gas at pressure p with the mole fraction air of it replaced
// by dry air. It allocates nothing, refusals included.
func (iso *Isotherm) State(p unit.Pascal, airShare unit.Fraction) (State, error) {
	m := iso.medium
	if !iso.ready {
		return State{}, errTemperature
	}
	if !(airShare >= 0 && airShare <= 1) {
		return State{}, errAir
	}
	s := State{medium: m, Pressure: p, Temperature: iso.t}
	if !(p > 0) {
		if p == 0 {
			s.fractions[m.main] = 1
			s.DensitySlope = 1 / (idealR * float64(iso.t))
			return s, nil
		}
		return State{}, errNegative
	}
	volume, shrink := 0.0, 0.0 // m³/mol, and its fall with pressure
	for i := range m.count {
		x := m.parts[i].fraction * (1 - float64(airShare))
		if m.parts[i].species.id == air {
			x += float64(airShare)
		}
		if x == 0 {
			continue
		}
		s.fractions[i] = x
		if iso.parts[i].species == nil {
			if err := iso.prepare(i, iso.t); err != nil {
				return State{}, err
			}
		}
		rho, stiffness, err := iso.parts[i].molar(float64(p))
		if err != nil {
			return State{}, err
		}
		volume += x / rho
		shrink += x / (rho * rho * stiffness)
		if m.density == Ideal {
			continue
		}
		for j := range i {
			volume += 2 * x * s.fractions[j] * iso.excess[i][j]
		}
	}
	s.Density = unit.MolePerCubicMetre(1 / volume)
	s.DensitySlope = shrink / (volume * volume)
	return s, nil
}

// At returns the gas at one pressure and temperature. Isotherm is faster where
// many pressures are asked at one temperature.
func (m *Medium) At(p unit.Pascal, t unit.Kelvin, airShare unit.Fraction) (State, error) {
	iso := Isotherm{medium: m}
	err := iso.Set(t)
	if err == nil {
		var s State
		if s, err = iso.State(p, airShare); err == nil {
			return s, nil
		}
	}
	return State{}, fmt.Errorf("%s at %v and %v: %w", m.Name(), p, t, err)
}

// State is a medium at one pressure and temperature. It is a value; its zero
// value is empty space.
type State struct {
	Pressure    unit.Pascal
	Temperature unit.Kelvin
	Density     unit.MolePerCubicMetre
	// DensitySlope is (∂ρ/∂p)_T in mol/(m³ Pa).
	DensitySlope float64

	medium    *Medium
	fractions [mostComponents + 1]float64
}

const c = 299792458.0 // m/s, exact (SI Brochure, 9th ed., 2019)

// WithDensity returns the same gas at another molar density.
func (s State) WithDensity(rho unit.MolePerCubicMetre) State { s.Density = rho; return s }

// Components returns the gases of s and their mole fractions, which add up to
// one. Air that got into the gas is one of them.
func (s *State) Components() []Component {
	if s.medium == nil {
		return nil
	}
	var list []Component
	for i, x := range s.fractions[:s.medium.count] {
		if x > 0 {
			list = append(list, Component{s.medium.parts[i].species, unit.Fraction(x)})
		}
	}
	return list
}

// As returns the same gas, of the same composition and density, with its index
// and nonlinear index from the sources of another medium.
func (s State) As(m *Medium) State { s.medium = m; return s }

// Susceptibility returns n²−1 about the angular frequency omega in rad/s, by
// Lorentz–Lorenz with additive molar refractivities. It is exact to the third
// derivative. Outside Usable it is meaningless.
//
// Source: M. Born, E. Wolf, Principles of Optics, 7th ed. (1999), section 2.3.3.
func (s *State) Susceptibility(omega float64) taylor.Number {
	if s.medium == nil || s.Density == 0 {
		return taylor.Number{}
	}
	nu := omega / (2 * math.Pi * c) * 1e-6 // 1/µm
	q := nu * nu
	rho := float64(s.Density)
	var y taylor.Number
	for i := range s.medium.count {
		if x := s.fractions[i]; x != 0 {
			p := &s.medium.parts[i]
			y = y.Add(p.index.molar(q, p.indexRho).Times(x * rho))
		}
	}
	return y.Times(3).Over(y.Times(-1).Plus(1))
}

// IndexMinusOne returns n−1 at the vacuum wavelength lambda.
func (s *State) IndexMinusOne(lambda unit.Metre) float64 {
	return s.Susceptibility(2 * math.Pi * c / float64(lambda)).SqrtMinusOne().C0
}

// Kerr returns the nonlinear index n₂, proportional to density.
func (s *State) Kerr() unit.SquareMetrePerWatt {
	n2 := 0.0
	if s.medium == nil {
		return 0
	}
	for i := range s.medium.count {
		if x := s.fractions[i]; x != 0 {
			p := &s.medium.parts[i]
			n2 += x * p.kerr.n2 / p.kerrRho
		}
	}
	return unit.SquareMetrePerWatt(n2 * float64(s.Density))
}

// Usable returns the wavelengths at which the index has a meaning at all: clear
// of the resonances of every gas in the mixture.
func (s *State) Usable() Span {
	floor := unit.Metre(shortestWavelength)
	if s.medium != nil {
		for i := range s.medium.count {
			if s.fractions[i] != 0 {
				floor = max(floor, s.medium.parts[i].floor)
			}
		}
	}
	return Span{floor, longestWavelength}
}

// Medium returns what the gas is and where its numbers come from; nil for empty
// space.
func (s *State) Medium() *Medium { return s.medium }
