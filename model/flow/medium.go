package flow

import (
	"errors"
	"fmt"
	"math"

	"barline/model/gas"
	"barline/model/unit"
)

// GasConstant is R in J/(mol K), exact (SI Brochure, 9th ed., 2019).
const GasConstant = 8.31446261815324

// ErrRange is wrapped where an input lies outside what the model covers.
var ErrRange = errors.New("outside the range of the flow model")

// Medium is a gas as transport needs it. The zero value is refused.
type Medium struct {
	Name      string
	MolarMass float64 // kg/mol
	HeatRatio float64 // cp/cv of the dilute gas
	// Viscosity of the dilute gas in Pa s. At 10 bar argon is 0.8 % above it,
	// at 30 bar 2.8 % (Lemmon & Jacobsen 2004); that much the viscous times
	// of this package are too short there.
	Viscosity func(unit.Kelvin) float64
	// Virial returns B in m³/mol and C in m⁶/mol² of
	// p = R·T·ρ·(1 + B·ρ + C·ρ²). Nil is the ideal gas.
	Virial func(unit.Kelvin) (b, c float64, err error)
}

func (m Medium) check() error {
	if !(m.MolarMass > 0) || !(m.HeatRatio > 1) || m.Viscosity == nil {
		return fmt.Errorf("gas %q has no molar mass, heat ratio or viscosity", m.Name)
	}
	return nil
}

// virial returns B and C at t, zero for the ideal gas.
func (m Medium) virial(t unit.Kelvin) (b, c float64, err error) {
	if m.Virial == nil {
		return 0, 0, nil
	}
	return m.Virial(t)
}

// Ideal returns the same gas without its virial coefficients.
func (m Medium) Ideal() Medium {
	m.Virial = nil
	return m
}

// Density returns the molar density of the gas at p and t from its virial
// equation, by Newton from the ideal gas. It refuses p < 0, t <= 0, values
// that are not finite, and states where the truncated equation has no gas
// root (xenon under pressure).
func (m Medium) Density(p unit.Pascal, t unit.Kelvin) (unit.MolePerCubicMetre, error) {
	if err := checkState(p, t); err != nil {
		return 0, err
	}
	b, c, err := m.virial(t)
	if err != nil {
		return 0, fmt.Errorf("%s at %v: %w: %w", m.Name, t, ErrRange, err)
	}
	rho, ok := virialDensity(float64(p), GasConstant*float64(t), b, c)
	if !ok {
		return 0, fmt.Errorf("%s at %v and %v: %w: the virial equation has no gas there", m.Name, p, t, ErrRange)
	}
	return unit.MolePerCubicMetre(rho), nil
}

// virialDensity solves p = rt·ρ(1 + bρ + cρ²) on the gas branch: the one that
// starts at ρ = 0 and ends where p no longer rises with ρ. On it Newton from
// the ideal gas comes to the root from below where b < 0. What it finds beyond
// the end, at densities of a liquid, is none.
func virialDensity(p, rt, b, c float64) (float64, bool) {
	end := math.Inf(1)
	if d := b*b - 3*c; b < 0 && d > 0 {
		end = 1 / (math.Sqrt(d) - b) // the smaller root of 1 + 2bρ + 3cρ²
	}
	rho := p / rt
	for range 50 {
		slope := rt * (1 + rho*(2*b+3*c*rho))
		if !(slope > 0) || rho > end {
			return 0, false
		}
		step := (rt*rho*(1+rho*(b+c*rho)) - p) / slope
		rho -= step
		if math.Abs(step) <= 1e-15*rho {
			break
		}
	}
	ok := rho >= 0 && rho < end && 1+rho*(2*b+3*c*rho) > 0.05 && math.Abs(rt*rho*(1+rho*(b+c*rho))-p) <= 1e-9*p
	return rho, ok
}

func checkState(p unit.Pascal, t unit.Kelvin) error {
	if !(p >= 0) || math.IsInf(float64(p), 0) {
		return fmt.Errorf("pressure %v: %w: wanted a finite absolute pressure, not below zero", float64(p), ErrRange)
	}
	if !(t > 0) || math.IsInf(float64(t), 0) {
		return fmt.Errorf("temperature %v K: %w: wanted a finite temperature above zero", float64(t), ErrRange)
	}
	return nil
}

// chapman is the dilute viscosity of a Lennard-Jones gas as
// E.W. Lemmon & R.T. Jacobsen, Int. J. Thermophys. 25, 21 (2004),
// 10.1023/B:IJOT.0000022327.04529.f3, write it. Molar mass in g/mol, sigma in
// nm, epsilon in K. Checked in the paper from 70 K to 2000 K.
func chapman(molarMass, sigma, epsilon float64) func(unit.Kelvin) float64 {
	return func(t unit.Kelvin) float64 {
		x := math.Log(float64(t) / epsilon)
		omega := math.Exp(0.431 + x*(-0.4623+x*(0.08406+x*(0.005341-x*0.00331))))
		return 0.0266958e-6 * math.Sqrt(molarMass*float64(t)) / (sigma * sigma * omega)
	}
}

// heatAtlas is the viscosity polynomial of VDI Heat Atlas, 2nd ed. (2010),
// section D3, in Pa s with T in K.
func heatAtlas(a, b, c, d, e float64) func(unit.Kelvin) float64 {
	return func(t unit.Kelvin) float64 {
		x := float64(t)
		return a + x*(b+x*(c+x*(d+x*e)))
	}
}

// helium is the dilute viscosity of V.D. Arp, R.D. McCarty & D.G. Friend, NIST
// Technical Note 1334 rev. (1998), above 100 K.
func helium(t unit.Kelvin) float64 {
	x := float64(t)
	return 19.6e-6 * math.Pow(x, 0.71938) * math.Exp(12.451/x-295.67/(x*x)-4.1249)
}

// viscosity returns that of the dilute gas with this name, nil if not known.
func viscosity(name string) func(unit.Kelvin) float64 {
	switch name {
	case "helium":
		return helium
	case "neon":
		return heatAtlas(2.3014e-06, 1.22527e-07, -9.7141e-11, 5.386e-14, -1.103e-17)
	case "argon":
		return chapman(39.948, 0.335, 143.2)
	case "krypton":
		return heatAtlas(-7.92e-07, 1.02624e-07, -5.5428e-11, 2.187e-14, -3.69e-18)
	case "xenon":
		return heatAtlas(-2.3692e-06, 9.8454e-08, -4.8314e-11, 1.953e-14, -3.42e-18)
	case "nitrogen":
		return chapman(28.01348, 0.3656, 98.94)
	case "air":
		return chapman(28.9586, 0.360, 103.3)
	}
	return nil
}

// Named returns the gas with this name or symbol: helium, neon, argon, krypton,
// xenon, nitrogen or air, with the virial coefficients of its reference
// equation of state, from 250 K to 400 K.
func Named(name string) (Medium, error) {
	s, err := gas.Named(name)
	if err != nil {
		return Medium{}, err
	}
	ratio := 5.0 / 3
	if s.Name == "nitrogen" || s.Name == "air" {
		ratio = 1.4
	}
	eta := viscosity(s.Name)
	if eta == nil {
		return Medium{}, fmt.Errorf("gas %q: its viscosity is not known here", name)
	}
	return Medium{Name: s.Name, MolarMass: s.MolarMass, HeatRatio: ratio, Viscosity: eta, Virial: s.Virial}, nil
}
