package panel

import "math"

// R is the molar gas constant in J/(mol K), exact (SI Brochure, 9th ed., 2019).
const R = 8.31446261815324

// Reference conditions of ISO 6358-1:2013, clause 3: 293.15 K and 100 kPa.
const (
	ReferenceTemperature = 293.15 // K
	ReferencePressure    = 1e5    // Pa
)

// Gas is what the panel needs to know of a gas, taken as ideal with a
// constant heat capacity.
type Gas struct {
	MolarMass float64 // kg/mol
	HeatRatio float64 // cp/cv
}

// Air and argon. Molar masses: CIAAW standard atomic weights (2021) and the
// dry air of ISO 2533:1975; heat ratios of ideal monatomic and diatomic gas.
var (
	air   = Gas{MolarMass: 28.9645e-3, HeatRatio: 1.4}
	argon = Gas{MolarMass: 39.948e-3, HeatRatio: 5.0 / 3}
)

// Air returns dry air.
func Air() Gas { return air }

// Argon returns argon.
func Argon() Gas { return argon }

// cv and cp are the molar heat capacities in J/(mol K).
func (g Gas) cv() float64 { return R / (g.HeatRatio - 1) }
func (g Gas) cp() float64 { return g.HeatRatio * g.cv() }

// CriticalRatio returns the ratio of downstream to upstream pressure at and
// below which the flow through a nozzle is choked.
//
//	b = (2/(γ+1))^(γ/(γ−1))
//
// Source: ideal nozzle; any textbook of gas dynamics, for example Liepmann &
// Roshko, Elements of Gasdynamics (1957), chapter 2.
func (g Gas) CriticalRatio() float64 {
	return math.Pow(2/(g.HeatRatio+1), g.HeatRatio/(g.HeatRatio-1))
}

// FlowFactor returns the choked flow of g through a valve relative to that of
// air at the same upstream state, in moles (and so in volume at reference).
// A sonic conductance measured with air times this factor is that of g.
//
//	ṅ ∝ p₁ √(γ/(M R T₁)) (2/(γ+1))^((γ+1)/(2(γ−1)))
func (g Gas) FlowFactor() float64 { return g.choked() / air.choked() }

func (g Gas) choked() float64 {
	k := g.HeatRatio
	return math.Sqrt(k/g.MolarMass) * math.Pow(2/(k+1), (k+1)/(2*(k-1)))
}
