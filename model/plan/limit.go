package plan

import (
	"math"
	"strings"

	"barline/model/emission"
	"barline/model/fibre"
	"barline/model/gas"
)

// Limit is one bound of a choice.
type Limit struct {
	Name         string
	Value, Bound float64
	Unit         string
	// Margin is the share of the bound that is left: 1 − value/bound below an
	// upper bound, 1 − bound/value above a lower one. Where a bound is no
	// matter of degree it is 1 or −1.
	Margin      float64
	Hard        bool // beyond it nothing is promised
	OK          bool
	Consequence string // said where OK is false
}

// sense says how a verdict of package emission counts here.
type sense struct {
	below  bool // the bound is a lower one
	degree bool // it has a margin; else it holds or not
	hard   bool
}

// resonance names the distance from a resonance of the wall. In a kagome fibre
// it is a caution only: light was tuned by pressure from 200 to 320 nm across a
// resonance of its webs, Phys. Rev. Lett. 106, 203901 (2011).
const resonance = "distance from a wall resonance"

// senses of the verdicts by name.
var senses = map[string]sense{
	"dispersion at the pump":           {hard: true},
	"soliton order":                    {degree: true, hard: true},
	"length to compression":            {degree: true, hard: true},
	"least soliton order":              {below: true, degree: true, hard: true},
	"ionised fraction (rough)":         {degree: true},
	"peak power":                       {degree: true, hard: true},
	"distance from a wall resonance":   {below: true, degree: true, hard: true},
	"attenuation of the pump":          {degree: true, hard: true},
	"least attenuation of such a bore": {},
	"range of the index source":        {},
	"range of the spectrometer":        {},
	"pump wavelength":                  {},
	"pressure":                         {degree: true, hard: true},
	"supply pressure":                  {degree: true, hard: true},
	"heating by ionisation (rough)":    {degree: true},
}

// margin of a value to its bound.
func (s sense) margin(value, bound float64, ok bool) float64 {
	m := 1.0
	switch {
	case !s.degree:
		if !ok {
			m = -1
		}
		return m
	case s.below && value > 0:
		m = 1 - bound/value
	case s.below:
		m = -far
	case bound > 0:
		m = 1 - value/bound
	}
	return math.Max(m, -far)
}

// far is the margin of what lies beyond any use.
const far = 1e6

// Bounds of what the emission package does not judge.
const (
	leastOrder = 1.8 // for emission, even of the shortest pulses
	orderReach = 8.6 // see orderFor
	fittedFrom = 2.0 // soliton orders of the runs that the estimate was fitted to
	fittedTo   = 7.0
)

// orderFor returns the soliton order from which on the compressed pulse reaches
// far enough to emit a thousandth of the light: N ≥ ω₀T₀(1 − λ/λ₀)/8.6, and 1.8
// at least. This project's own fit to 81 full-field runs (60 of one bench at
// 1030 nm and 35 fs, the others in four gases, bores of 30 to 250 µm, 800 and
// 1030 nm, 10 to 60 fs); least_test.go says how well it parts those that emit.
func (q *Question) orderFor(pr *emission.Prediction) float64 {
	if pr.Emission == 0 {
		return leastOrder
	}
	pump := float64(q.Setup.Pulse.Wavelength)
	t0 := math.Sqrt(float64(pr.DispersionLength) * math.Abs(pr.Beta2))
	return math.Max(leastOrder, 2*math.Pi*299792458/pump*t0*(1-float64(pr.Emission)/pump)/orderReach)
}

// limits returns all bounds of a prediction in a gas. dst is overwritten and returned.
func (q *Question) limits(dst []Limit, pr *emission.Prediction, m *gas.Medium) []Limit {
	dst = dst[:0]
	for _, v := range pr.Verdicts[:pr.VerdictCount] {
		s := senses[v.Name]
		if v.Name == "least soliton order" {
			continue // added below, with its margin
		}
		if q.Setup.Fibre.Kind == fibre.Kagome && v.Name == resonance {
			s.hard = false
		}
		dst = append(dst, Limit{
			Name: v.Name, Value: v.Value, Bound: v.Bound, Unit: v.Unit, Margin: s.margin(v.Value, v.Bound, v.OK),
			Hard: s.hard, OK: v.OK, Consequence: v.Consequence,
		})
	}
	if pr.Beta2 < 0 {
		n, bound := pr.SolitonOrder, q.orderFor(pr)
		dst = append(dst, Limit{
			Name: "least soliton order", Value: n, Bound: bound, Margin: senses["least soliton order"].margin(n, bound, n >= bound),
			Hard: true, OK: n >= bound, Consequence: "too weak a pulse: compressed, its spectrum does not reach the emission",
		})
		if pr.Answer == emission.Estimate {
			bound, ok := fittedTo, n >= fittedFrom && n <= fittedTo
			if n < fittedFrom {
				bound = fittedFrom
			}
			dst = append(dst, Limit{
				Name: "soliton orders behind the estimate", Value: n, Bound: bound, Margin: sense{}.margin(n, bound, ok), OK: ok,
				Consequence: "the estimate was fitted to runs of soliton order 2 to 7: here it is a guess",
			})
		}
	}
	if name := m.Name(); strings.Contains(name, "nitrogen") || strings.Contains(name, "air") {
		dst = append(dst, Limit{
			Name: "molecules", Value: 1, Bound: 0, Margin: -1,
			Consequence: "molecules answer late (Raman response): no answer here, propagation included, takes that in",
		})
	}
	if q.Supply > 0 {
		p, bound := pr.Input.Pressure.Bar(), q.Supply.Bar()
		dst = append(dst, Limit{
			Name: "supply pressure", Value: p, Bound: bound, Unit: "bar", Margin: 1 - p/bound, Hard: true, OK: p <= bound,
			Consequence: "the regulator gives no more: set it higher, if the ratings allow",
		})
	}
	return dst
}

// judged is what the bounds of one prediction come to.
type judged struct {
	forbidden int     // index of the hard bound that is broken worst, −1 for none
	narrowest int     // index of the bound with the least margin among those that hold by degree
	margin    float64 // of narrowest, soft ones included
	cautions  int     // soft bounds that are broken
}

func judge(limits []Limit) judged {
	j := judged{forbidden: -1, narrowest: -1, margin: math.Inf(1)}
	worst := 0.0
	for i, l := range limits {
		if !l.OK && l.Hard && (j.forbidden < 0 || l.Margin < worst) {
			j.forbidden, worst = i, l.Margin
		}
		if !l.OK && !l.Hard {
			j.cautions++
		}
		if senses[l.Name].degree && l.Margin < j.margin {
			j.narrowest, j.margin = i, l.Margin
		}
	}
	return j
}
