package flow

import (
	"fmt"
	"math"

	"barline/model/unit"
)

// Reference atmosphere of pneumatics: ISO 8778:2003, 20 °C and 100 kPa.
const (
	referencePressure    = 100e3      // Pa
	referenceTemperature = 293.15     // K
	airMolarMass         = 28.9586e-3 // kg/mol, dry
	airHeatRatio         = 1.4
)

// laminarFrom is the pressure ratio above which ISO 6358-1:2013 lets the flow
// fall to zero in a straight line; the ellipse falls with infinite slope.
const laminarFrom = 0.999

// Valve is a restriction as ISO 6358-1:2013 describes it.
type Valve struct {
	// Conductance is the sonic conductance C for air, in m³/(s Pa): the volume
	// at 20 °C and 100 kPa that passes when choked, per upstream pressure.
	// Data sheets give dm³/(s bar), which is 1e-8 of it.
	Conductance float64
	// Critical is the critical ratio b that was measured. Zero takes that of a
	// short nozzle for the gas: 0.487 monatomic, 0.528 for air.
	Critical float64
}

// NewOrifice returns a round hole of area in m² with a discharge coefficient
// (0.6 sharp-edged, near 1 rounded): C = c_d·A·ψ(γ)·√(R·T₀/M)/p₀ for air.
func NewOrifice(area, discharge float64) Valve {
	return Valve{Conductance: discharge * area * psi(airHeatRatio) *
		math.Sqrt(GasConstant*referenceTemperature/airMolarMass) / referencePressure}
}

// psi is √γ·(2/(γ+1))^((γ+1)/(2(γ−1))): the choked mass flow of a nozzle is
// A·p₁·ψ/√(R_s·T₁).
func psi(gamma float64) float64 {
	return math.Sqrt(gamma) * math.Pow(2/(gamma+1), (gamma+1)/(2*(gamma-1)))
}

// CriticalRatio returns p₂/p₁ below which the gas chokes in a nozzle,
// (2/(γ+1))^(γ/(γ−1)).
func (m Medium) CriticalRatio() float64 {
	return math.Pow(2/(m.HeatRatio+1), m.HeatRatio/(m.HeatRatio-1))
}

// ValveFactor returns the choked volume flow of the gas, at reference, through
// a valve, relative to that of air: helium 2.85, neon 1.27, argon 0.90, krypton
// 0.62, xenon 0.50. It is ψ(γ)/ψ(1.4)·√(M_air/M).
func (m Medium) ValveFactor() float64 {
	return psi(m.HeatRatio) / psi(airHeatRatio) * math.Sqrt(airMolarMass/m.MolarMass)
}

// MolarFlow returns the flow in mol/s from p1 at t1 to p2 at t2, negative where
// it runs back. With r = downstream/upstream pressure,
//
//	ṅ = C·f·p₁·(p₀/RT₀)·√(T₀/T₁)             r <= b
//	  × √(1 − ((r−b)/(1−b))²)                 r > b
//
// and in a straight line to zero for r > 0.999. f is the gas's ValveFactor; the
// gas is ideal. Source: ISO 6358-1:2013, equations for ṁ, with the gas in
// place of air by nozzle theory. A closed valve has Conductance 0.
func (v Valve) MolarFlow(m Medium, p1 unit.Pascal, t1 unit.Kelvin, p2 unit.Pascal, t2 unit.Kelvin) float64 {
	if p2 > p1 {
		return -v.MolarFlow(m, p2, t2, p1, t1)
	}
	if !(p1 > 0) || !(v.Conductance > 0) {
		return 0
	}
	b := v.Critical
	if b == 0 {
		b = m.CriticalRatio()
	}
	choked := v.Conductance * m.ValveFactor() * float64(p1) *
		referencePressure / (GasConstant * referenceTemperature) * math.Sqrt(referenceTemperature/float64(t1))
	ellipse := func(r float64) float64 {
		x := (r - b) / (1 - b)
		return math.Sqrt(1 - x*x)
	}
	switch r := float64(p2 / p1); {
	case r <= b:
		return choked
	case r <= laminarFrom:
		return choked * ellipse(r)
	default:
		return choked * ellipse(laminarFrom) * (1 - r) / (1 - laminarFrom)
	}
}

// Regulator holds the pressure behind it at Set: it is wide open when the
// outlet is Band or more below Set, and shut at Set.
type Regulator struct {
	Supply unit.Pascal // of the cylinder
	Set    unit.Pascal
	Band   unit.Pascal
	Open   Valve // wide open
}

func (r Regulator) flow(m Medium, t unit.Kelvin, out unit.Pascal) float64 {
	opening := 1.0
	if r.Band > 0 {
		opening = min(1, max(0, float64((r.Set-out)/r.Band)))
	} else if out >= r.Set {
		opening = 0
	}
	v := Valve{r.Open.Conductance * opening, r.Open.Critical}
	return max(0, v.MolarFlow(m, r.Supply, t, out, t))
}

// Through returns the flow in mol/s through the regulator and a needle valve
// behind it into p2, all at t, and the pressure between them. It never runs
// back through the regulator.
func (r Regulator) Through(needle Valve, m Medium, t unit.Kelvin, p2 unit.Pascal) (molPerSecond float64, between unit.Pascal) {
	if p2 >= r.Set || p2 >= r.Supply {
		return 0, min(r.Set, r.Supply)
	}
	// The regulator gives less, the needle takes more, as the pressure
	// between them rises: one crossing.
	low, high := p2, min(r.Set, r.Supply)
	for range 60 {
		between = (low + high) / 2
		if r.flow(m, t, between) > needle.MolarFlow(m, between, t, p2, t) {
			low = between
		} else {
			high = between
		}
	}
	return needle.MolarFlow(m, between, t, p2, t), between
}

// Pump is a vacuum pump behind its valve.
type Pump struct {
	Speed    float64 // m³/s at its inlet, well above Ultimate
	Ultimate unit.Pascal
	Valve    Valve // between cell and pump; the zero value is a wide bore
}

// MolarFlow returns the flow in mol/s out of a cell at p and t:
// S·(p−p_u)/RT, and no more than the valve lets through. It is never negative:
// a check valve is taken for granted. In steady flow pump and valve are in
// series; the pressure between them is found by bisection.
func (u Pump) MolarFlow(m Medium, p unit.Pascal, t unit.Kelvin) float64 {
	rt := GasConstant * float64(t)
	speed := func(at unit.Pascal) float64 { return max(0, u.Speed*float64(at-u.Ultimate)/rt) }
	if u.Valve.Conductance == 0 {
		return speed(p)
	}
	low, high := unit.Pascal(0), p
	for range 50 {
		mid := (low + high) / 2
		if u.Valve.MolarFlow(m, p, t, mid, t) > speed(mid) {
			low = mid
		} else {
			high = mid
		}
	}
	return speed(high)
}

// Throughput returns a molar flow as pV flow at t: Q = ṅ·R·T.
func Throughput(molPerSecond float64, t unit.Kelvin) unit.PascalCubicMetrePerSecond {
	return unit.PascalCubicMetrePerSecond(molPerSecond * GasConstant * float64(t))
}

// LeakText writes q as "1.2e-06 Pa m3/s (1.2e-05 mbar L/s)".
func LeakText(q unit.PascalCubicMetrePerSecond) string {
	return fmt.Sprintf("%.2g Pa m3/s (%.2g mbar L/s)", float64(q), float64(q)*10)
}
