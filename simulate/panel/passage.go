package panel

import "math"

// State is the intensive state of the gas at one end of a passage.
type State struct {
	P   float64 // Pa, absolute
	T   float64 // K
	Air float64 // mole fraction of air
}

// Law is how much a wide-open passage carries.
type Law interface {
	// Flow returns mol/s from a to b, negative where it runs from b to a.
	Flow(a, b State) float64
}

// Orifice is a valve, a needle or a leak after ISO 6358-1:2013:
//
//	ṅ = C k p₁ n₀ √(T₀/T₁) ψ(p₂/p₁)
//	ψ = 1 at and below the critical ratio b, else √(1 − ((p₂/p₁ − b)/(1 − b))²)
//
// with n₀ = 100 kPa/(R·293.15 K) and k, b of the gas that flows. Above
// p₂/p₁ = 0.999 the square root is replaced by its chord to zero: there flow
// is laminar, and its slope would be infinite.
type Orifice struct {
	conductance float64 // m³/(s Pa)
	factor      float64 // flow of the working gas relative to air
	critical    float64 // of the working gas
}

const laminarRatio = 0.999

// NewOrifice returns an orifice of sonic conductance c, measured with air as
// ISO 6358 has it, in m³/(s Pa), for the working gas g.
func NewOrifice(c float64, g Gas) Orifice {
	return Orifice{conductance: c, factor: g.FlowFactor(), critical: g.CriticalRatio()}
}

// Flow implements Law.
func (o Orifice) Flow(a, b State) float64 {
	if a.P >= b.P {
		return o.forward(a, b.P)
	}
	return -o.forward(b, a.P)
}

func (o Orifice) forward(up State, p2 float64) float64 {
	if !(up.P > 0) {
		return 0
	}
	// A mixture flows by the mean of its parts.
	k := o.factor + up.Air*(1-o.factor)
	crit := o.critical + up.Air*(airCritical-o.critical)
	const n0 = ReferencePressure / (R * ReferenceTemperature)
	return o.conductance * k * up.P * n0 * math.Sqrt(ReferenceTemperature/up.T) * subsonic(p2/up.P, crit)
}

var airCritical = air.CriticalRatio()

func subsonic(ratio, critical float64) float64 {
	ellipse := func(r float64) float64 {
		s := (r - critical) / (1 - critical)
		return math.Sqrt(1 - s*s)
	}
	switch {
	case ratio <= critical:
		return 1
	case ratio < laminarRatio:
		return ellipse(ratio)
	default:
		return ellipse(laminarRatio) * (1 - ratio) / (1 - laminarRatio)
	}
}

// Pump carries gas from a to b at a volumetric speed that ends at its
// ultimate pressure, and never backwards.
type Pump struct {
	Speed    float64 // m³/s
	Ultimate float64 // Pa
}

// Flow implements Law.
func (p Pump) Flow(a, _ State) float64 {
	if a.P <= p.Ultimate {
		return 0
	}
	return p.Speed * (a.P - p.Ultimate) / (R * a.T)
}

// Regulator carries gas from a to b in proportion to how far b stands below
// its setting: outlet pressure droops under flow.
type Regulator struct {
	Setting float64 // Pa
	Slope   float64 // mol/(s Pa)
}

// Flow implements Law.
func (r Regulator) Flow(a, b State) float64 {
	if b.P >= r.Setting || a.P <= b.P {
		return 0
	}
	return r.Slope * (r.Setting - b.P)
}

// Relief is a relief valve from a to b: shut below its setting, wide open a
// twentieth above.
type Relief struct {
	Setting float64 // Pa
	Orifice Orifice // wide open
}

// Flow implements Law.
func (r Relief) Flow(a, b State) float64 {
	if a.P <= r.Setting {
		return 0
	}
	return min(1, (a.P/r.Setting-1)*20) * r.Orifice.Flow(a, b)
}

// Source carries a constant flow from a to b, such as outgassing of a wall.
type Source struct {
	Rate float64 // mol/s
}

// Flow implements Law.
func (s Source) Flow(_, _ State) float64 { return s.Rate }
