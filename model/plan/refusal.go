package plan

import (
	"fmt"
	"math"
	"sort"

	"barline/model/unit"
)

// Refusal is a gas that does not reach the target.
type Refusal struct {
	Gas string
	Why string // one line; always said
	// Needs are the bounds that would have to give way, the one that gives
	// most first, at Pressure and Energy: the place where they give least. It
	// is empty where no pressure and energy within reach puts the emission
	// there.
	Needs    []Limit
	Pressure unit.Pascal
	Energy   unit.Joule
	Lambda   unit.Metre // of the target, that would be reached there
	// Nearest is the emission nearest to the target of those that are allowed,
	// Beyond that of those beyond the bounds as well; 0 where none is.
	Nearest, Beyond Place
}

// Place is where a gas emits at some wavelength.
type Place struct {
	Emission unit.Metre
	Pressure unit.Pascal
	Energy   unit.Joule
}

// By how much a refusal looks beyond what was asked for.
const (
	lowerPressure  = 10
	higherPressure = 10
	otherEnergy    = 10
)

// refuse says what would have to give way.
func (s *surveyor) refuse(composition string, m *Map) Refusal {
	r := Refusal{Gas: composition, Nearest: s.nearest(m, true)}
	wide := s.survey(
		Range[unit.Pascal]{From: s.Pressure.From / lowerPressure, To: s.Pressure.To * higherPressure, Steps: 48},
		Range[unit.Joule]{From: s.Energy.From / otherEnergy, To: s.Energy.To * otherEnergy, Steps: 12},
	)
	r.Beyond = s.nearest(&wide, false)
	least := math.Inf(1)
	for j, e := range wide.Energies {
		for _, lambda := range s.targets() {
			pr, ok := s.solve(wide.Pressures, wide.Cells[j], e, lambda)
			if !ok {
				continue
			}
			s.judged(&pr)
			s.limits = append(s.limits, s.asked(pr.Input.Pressure, e)...)
			var needs []Limit
			give := 0.0
			for _, l := range s.limits {
				if l.Hard && !l.OK {
					needs = append(needs, l)
					give += math.Log(1 - l.Margin)
				}
			}
			if len(needs) > 0 && give < least {
				least = give
				r.Needs, r.Pressure, r.Energy, r.Lambda = needs, pr.Input.Pressure, e, lambda
			}
		}
	}
	sort.SliceStable(r.Needs, func(i, j int) bool { return r.Needs[i].Margin < r.Needs[j].Margin })
	r.Why = r.text()
	if len(r.Needs) == 0 && r.Nearest.Emission == 0 && r.Beyond.Emission == 0 {
		p, e := middle(s.Pressure), middle(s.Energy)
		pr := s.predictor.Predict(s.input(p, e), nil)
		r.Why = fmt.Sprintf("emits nowhere that its numbers were checked for; at %v and %v: %s", rounded(p), rounded(e), pr.Why)
	}
	return r
}

// asked returns the bounds that the question itself sets.
func (s *surveyor) asked(p unit.Pascal, e unit.Joule) (list []Limit) {
	add := func(name, unit string, value, from, to, factor float64) {
		l := Limit{Name: name, Value: value * factor, Unit: unit, Hard: true}
		switch {
		case value > to:
			l.Bound, l.Margin = to*factor, 1-value/to
			l.Consequence = "more than was to be tried"
		case value < from:
			l.Bound, l.Margin = from*factor, 1-from/value
			l.Consequence = "less than was to be tried"
		default:
			return
		}
		list = append(list, l)
	}
	add("pressures to be tried", "bar", float64(p), float64(s.Pressure.From), float64(s.Pressure.To), 1e-5)
	add("energies to be tried", "uJ", float64(e), float64(s.Energy.From), float64(s.Energy.To), 1e6)
	return list
}

// nearest returns the emission nearest to the target, of all or of those that
// are allowed.
func (s *surveyor) nearest(m *Map, allowed bool) (best Place) {
	away := math.Inf(1)
	for j, row := range m.Cells {
		for i, c := range row {
			if c.Emission == 0 || allowed && c.Forbidden != "" {
				continue
			}
			if d := max(float64(s.Target.From-c.Emission), float64(c.Emission-s.Target.To)); d < away {
				best, away = Place{c.Emission, m.Pressures[i], m.Energies[j]}, d
			}
		}
	}
	return best
}

func (r *Refusal) text() string {
	switch {
	case len(r.Needs) > 0:
	case r.Nearest.Emission > 0:
		return "no pressure and energy puts the emission there; the nearest is " + r.Nearest.text()
	case r.Beyond.Emission > 0:
		return "emits nowhere within the bounds, nor there beyond them; the nearest is " + r.Beyond.text()
	default:
		return "" // said by refuse, which can ask why
	}
	n := r.Needs[0]
	text := fmt.Sprintf("%s gives way first: %.4g%s, bound %.4g%s, %s, at %v and %v",
		n.Name, n.Value, spaced(n.Unit), n.Bound, spaced(n.Unit), beyond(n), rounded(r.Pressure), rounded(r.Energy))
	for _, more := range r.Needs[1:] {
		text += "; with it " + more.Name
	}
	return text
}

func (p Place) text() string {
	return fmt.Sprintf("%.1f nm at %v and %v", p.Emission.Nanometres(), rounded(p.Pressure), rounded(p.Energy))
}

func spaced(unit string) string {
	if unit == "" {
		return ""
	}
	return " " + unit
}

// middle returns the middle of a range in ratio.
func middle[T ~float64](r Range[T]) T { return T(math.Sqrt(float64(r.From) * float64(r.To))) }

// Left says in words how much of the bound is left, or by how much it is
// broken.
func (l Limit) Left() string {
	if l.Margin >= 0 {
		return fmt.Sprintf("%.0f %% of %s", 100*l.Margin, l.Name)
	}
	return fmt.Sprintf("none: %s %s", l.Name, beyond(l))
}

// beyond says by how much a bound is broken.
func beyond(l Limit) string {
	side := "over"
	if l.Value < l.Bound {
		side = "under"
	}
	f := 1 - l.Margin
	if f >= 2 {
		return fmt.Sprintf("%s by a factor of %.3g", side, f)
	}
	return fmt.Sprintf("%s by %.2g %%", side, 100*(f-1))
}
