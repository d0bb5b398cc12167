package plan

import (
	"math"

	"barline/model/emission"
	"barline/model/gas"
	"barline/model/unit"
)

// Choice is one way to reach the target.
type Choice struct {
	Gas      string // composition, as it was asked for
	Answer   emission.Answer
	Pressure unit.Pascal // for the middle of what is covered
	Energy   unit.Joule
	// Covers is the part of the target that the pressure reaches at this energy,
	// and From to To the pressures at its ends.
	Covers   gas.Span
	From, To unit.Pascal
	Whole    bool // Covers is the whole target
	// EnergyFrom and EnergyTo are the energies, of those tried, at which as much
	// is covered.
	EnergyFrom, EnergyTo unit.Joule

	Prediction emission.Prediction // at Pressure and Energy
	// Limits are the bounds, each as it is where the least margin is left over
	// what is covered.
	Limits    []Limit
	Narrowest Limit // of those that hold by degree
	Cautions  []Limit

	// Slopes of the emission at Pressure: with the estimate, by the linear part
	// of phase matching.
	PerPressure    float64 // m/Pa
	PerTemperature float64 // m/K at constant pressure
	PerEnergy      float64 // m for the whole of the energy; see EnergyKnown
	// EnergyKnown is false where the answer does not know the slope over energy.
	EnergyKnown bool

	Fill *Fill // nil: no site
}

// Steady is how steady one quantity must be held, alone, for the emission to
// stay within plus or minus tolerance; +Inf where it does not matter.
func Steady(slope float64, tolerance unit.Metre) float64 {
	return math.Abs(float64(tolerance) / slope)
}

// margin is the one to rank by, in steps: finer differences are not known.
func (c *Choice) margin() float64 { return math.Floor(c.Narrowest.Margin / 0.05) }

func (c *Choice) covered() float64 { return float64(c.Covers.To - c.Covers.From) }

func (c *Choice) gas() float64 {
	if c.Fill == nil || c.Fill.Why != "" {
		return 0
	}
	return c.Fill.Gas
}

// before reports whether c ranks before d: more of the target, then fewer
// cautions, then the wider of the narrowest margins in steps of 5 %, then less
// gas, then less energy.
func (c *Choice) before(d *Choice) bool {
	switch {
	case math.Abs(c.covered()-d.covered()) > 1e-12:
		return c.covered() > d.covered()
	case len(c.Cautions) != len(d.Cautions):
		return len(c.Cautions) < len(d.Cautions)
	case c.margin() != d.margin():
		return c.margin() > d.margin()
	case math.Abs(c.gas()-d.gas()) > 1e-9:
		return c.gas() < d.gas()
	}
	return c.Energy < d.Energy
}

// choose finds the best energy of one gas, or reports that there is none.
func (s *surveyor) choose(composition string, m *Map) (best Choice, ok bool) {
	var all []Choice
	for j, e := range m.Energies {
		if c, found := s.at(m.Pressures, m.Cells[j], e); found {
			c.Gas = composition
			all = append(all, c)
		}
	}
	for i := range all {
		if !ok || all[i].before(&best) {
			best, ok = all[i], true
		}
	}
	if !ok {
		return best, false
	}
	best.EnergyFrom, best.EnergyTo = best.Energy, best.Energy
	for i := range all {
		if all[i].covered() >= best.covered()-1e-12 {
			best.EnergyFrom, best.EnergyTo = min(best.EnergyFrom, all[i].Energy), max(best.EnergyTo, all[i].Energy)
		}
	}
	s.finish(&best)
	return best, true
}

// finish adds what only the choice that is kept needs.
func (s *surveyor) finish(c *Choice) {
	for _, st := range s.predictor.Steadiness(c.Prediction, unit.Nanometre) {
		switch st.Quantity {
		case emission.Pressure:
			c.PerPressure = st.Slope
		case emission.Temperature:
			c.PerTemperature = st.Slope
		case emission.PulseEnergy:
			c.PerEnergy, c.EnergyKnown = st.Slope, true
		}
	}
	if s.Site != nil {
		f := s.Site.fill(c.Gas, c.Pressure)
		c.Fill = &f
	}
}

// at returns the choice at one energy: the longest run of the target's
// wavelengths that the pressure reaches within all hard bounds.
func (s *surveyor) at(pressures []unit.Pascal, row []Cell, e unit.Joule) (Choice, bool) {
	targets := s.targets()
	reached := make([]emission.Prediction, len(targets))
	from, length, run := 0, 0, 0
	for i, lambda := range targets {
		pr, ok := s.solve(pressures, row, e, lambda)
		if ok {
			ok = s.judged(&pr).forbidden < 0
		}
		if !ok {
			run = 0
			continue
		}
		reached[i] = pr
		if run++; run > length {
			from, length = i-run+1, run
		}
	}
	if length == 0 {
		return Choice{}, false
	}
	reached = reached[from : from+length]
	c := Choice{
		Answer: s.predictor.Setup().Answer, Energy: e, Prediction: reached[length/2], Whole: length == len(targets),
		Covers: gas.Span{From: targets[from], To: targets[from+length-1]},
		From:   reached[0].Input.Pressure, To: reached[0].Input.Pressure,
	}
	c.Pressure = c.Prediction.Input.Pressure
	for i := range reached {
		c.From, c.To = min(c.From, reached[i].Input.Pressure), max(c.To, reached[i].Input.Pressure)
		s.judged(&reached[i])
		c.Limits = narrower(c.Limits, s.limits)
	}
	j := judge(c.Limits)
	if j.narrowest >= 0 {
		c.Narrowest = c.Limits[j.narrowest]
	}
	for _, l := range c.Limits {
		if !l.OK {
			c.Cautions = append(c.Cautions, l)
		}
	}
	return c, true
}

// narrower keeps of each bound the one with less margin.
func narrower(kept, more []Limit) []Limit {
next:
	for _, l := range more {
		for i := range kept {
			if kept[i].Name == l.Name {
				if l.Margin < kept[i].Margin {
					kept[i] = l
				}
				continue next
			}
		}
		kept = append(kept, l)
	}
	return kept
}

// Again finds a choice anew with another predictor of the same gas, such as an
// anchored one, at pressures up to a third away. It reports false where the
// target is not reached there within the hard bounds.
func (q Question) Again(c Choice, p *emission.Predictor) (Choice, bool) {
	s := &surveyor{Question: &q, predictor: p}
	pressures := Range[unit.Pascal]{From: c.From / 1.33, To: c.To * 1.33, Steps: 40}
	m := s.survey(pressures, Range[unit.Joule]{From: c.Energy, To: c.Energy, Steps: 1})
	again, ok := s.at(m.Pressures, m.Cells[0], c.Energy)
	if !ok {
		return again, false
	}
	again.Gas, again.EnergyFrom, again.EnergyTo = c.Gas, c.EnergyFrom, c.EnergyTo
	again.Answer = again.Prediction.Answer
	s.finish(&again)
	return again, true
}
