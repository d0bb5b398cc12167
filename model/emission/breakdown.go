package emission

import (
	"math"
	"sort"

	"barline/model/unit"
)

// Contribution is one entry of the uncertainty of a prediction.
type Contribution struct {
	Name   string     // such as "pressure" or "index source"
	Input  string     // standard uncertainty of the input, with its unit; empty for the spread between models
	Effect unit.Metre // on the emission, one standard uncertainty, never negative
	// Rough says that the slope behind it is the estimate's, or that no
	// full-field run has measured a part of it yet: not to be leaned on.
	Rough bool
}

// Breakdown lists what makes up the uncertainty of a prediction, largest first,
// entries without effect left out. It is empty where there is no emission.
func (p *Predictor) Breakdown(pr Prediction) []Contribution {
	if p.beyond != nil && pr.Answer != Anchored {
		return p.beyond.Breakdown(pr)
	}
	e, ok := p.effectsOf(pr)
	if !ok {
		return nil
	}
	var list []Contribution
	for i := range QuantityCount {
		q := Quantity(i)
		list = append(list, Contribution{
			Name: q.String(), Input: q.text(e.known[i]),
			Effect: unit.Metre(math.Abs(e.slope[i] * e.known[i])), Rough: e.rough(q, p),
		})
	}
	list = append(list, Contribution{Name: "index source", Effect: unit.Metre(e.index)})
	name := "nonlinear term of the estimate"
	switch p.setup.Answer {
	case Linear:
		name = "nonlinear term left out"
	case Anchored:
		name = "interpolation between full-field runs"
	}
	list = append(list, Contribution{Name: name, Effect: unit.Metre(e.rest)},
		Contribution{Name: "ionisation model", Effect: unit.Metre(e.plasma)})
	kept := list[:0]
	for _, c := range list {
		if c.Effect > 0 {
			kept = append(kept, c)
		}
	}
	sort.SliceStable(kept, func(i, j int) bool { return kept[i].Effect > kept[j].Effect })
	return kept
}

// rough reports whether the slope over q is not to be leaned on.
func (e *effects) rough(q Quantity, p *Predictor) bool {
	if p.nodes != nil {
		return e.unknown[q]
	}
	return q >= PulseEnergy // acts through the nonlinear term
}

// Steady is how steady one quantity must be held.
type Steady struct {
	Quantity Quantity
	Slope    float64 // m of emission per unit of the quantity
	Within   float64 // in the unit of the quantity, plus or minus
	Text     string  // Within with its unit
}

// Steadiness answers how steady each quantity must be, alone, for the emission
// to stay within plus or minus tolerance. Quantities whose slope is rough are
// left out: those that act through the nonlinear term of a linear or estimated
// answer, and those that no full-field run has moved yet.
func (p *Predictor) Steadiness(pr Prediction, tolerance unit.Metre) []Steady {
	if p.beyond != nil && pr.Answer != Anchored {
		return p.beyond.Steadiness(pr, tolerance)
	}
	e, ok := p.effectsOf(pr)
	if !ok {
		return nil
	}
	var list []Steady
	for i := range QuantityCount {
		q := Quantity(i)
		if e.rough(q, p) || e.slope[i] == 0 {
			continue
		}
		within := math.Abs(float64(tolerance) / e.slope[i])
		list = append(list, Steady{q, e.slope[i], within, q.text(within)})
	}
	return list
}

// effectsOf weighs a prediction again.
func (p *Predictor) effectsOf(pr Prediction) (e effects, ok bool) {
	if !pr.Valid || pr.Emission == 0 {
		return e, false
	}
	out := Prediction{Input: pr.Input, Answer: p.setup.Answer}
	m, ok := p.prepare(pr.Input, &out)
	if !ok {
		return e, false
	}
	out.Emission = pr.Emission
	f := found{root: 2 * math.Pi * c / float64(pr.Emission)}
	if p.nodes != nil {
		p.answerAnchored(&m, &f, &out)
		if f.root == 0 {
			return e, false
		}
		out.Emission = wavelength(f.root)
	}
	at := m.at(f.root)
	if !(at.slope > 0) {
		return e, false
	}
	p.weigh(&m, &f, at, &out, &e)
	return e, true
}
