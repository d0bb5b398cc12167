package plan

import (
	"errors"

	"barline/model/emission"
	"barline/model/unit"
)

// Cell is one place of a Map.
type Cell struct {
	Emission unit.Metre // 0 where none is predicted
	// Forbidden names the hard bound that is broken worst here, or why there
	// is no answer at all; empty where the place may be used.
	Forbidden string
	Margin    float64 // the narrowest, of soft bounds too
}

// Map is the emission of one gas over pressure and energy.
type Map struct {
	Gas       string
	Answer    emission.Answer
	Pressures []unit.Pascal // rising, in equal ratios
	Energies  []unit.Joule  // rising, in equal ratios
	Cells     [][]Cell      // one row for each energy, one cell for each pressure
}

// surveyor predicts over one gas. It belongs to one goroutine.
type surveyor struct {
	*Question
	predictor *emission.Predictor
	limits    []Limit // scratch
}

func (q *Question) surveyor(composition string) (*surveyor, error) {
	p, err := emission.NewPredictor(q.setupFor(composition))
	if err != nil {
		return nil, err
	}
	return &surveyor{Question: q, predictor: p}, nil
}

// judged weighs a prediction; its bounds are in s.limits until the next one.
func (s *surveyor) judged(pr *emission.Prediction) judged {
	s.limits = s.Question.limits(s.limits, pr, s.predictor.Medium())
	return judge(s.limits)
}

func (s *surveyor) input(p unit.Pascal, e unit.Joule) emission.Input {
	return emission.Input{Pressure: p, Temperature: s.Temperature, Energy: e, Air: s.Air}
}

// names of places that no bound forbids and yet hold no emission.
const (
	noAnswer   = "no answer"
	noEmission = "no phase matching"
)

// survey fills a map. Along the energies the density stays, so that the root of
// one energy leads to that of the next.
func (s *surveyor) survey(pressures Range[unit.Pascal], energies Range[unit.Joule]) Map {
	m := Map{
		Gas: s.predictor.Medium().Name(), Answer: s.predictor.Setup().Answer,
		Pressures: pressures.values(), Energies: energies.values(), Cells: make([][]Cell, energies.Steps),
	}
	for j := range m.Cells {
		m.Cells[j] = make([]Cell, pressures.Steps)
	}
	for i, p := range m.Pressures {
		var pr emission.Prediction
		for j, e := range m.Energies {
			if j > 0 && !(pr.Valid && pr.Beta2 < 0) { // no energy changes that
				m.Cells[j][i] = m.Cells[0][i]
				continue
			}
			pr = s.predictor.Predict(s.input(p, e), &pr)
			m.Cells[j][i] = s.cell(&pr)
		}
	}
	return m
}

// Survey returns the map of one gas over other pressures and energies, such as
// finer ones for a picture.
func (q Question) Survey(composition string, pressures Range[unit.Pascal], energies Range[unit.Joule]) (*Map, error) {
	if err := errors.Join(q.check(), pressures.check("pressure"), energies.check("energy")); err != nil {
		return nil, err
	}
	s, err := q.surveyor(composition)
	if err != nil {
		return nil, err
	}
	m := s.survey(pressures, energies)
	m.Gas = composition
	return &m, nil
}

func (s *surveyor) cell(pr *emission.Prediction) Cell {
	if !pr.Valid {
		return Cell{Forbidden: noAnswer, Margin: -far}
	}
	j := s.judged(pr)
	c := Cell{Emission: pr.Emission, Margin: j.margin}
	switch {
	case j.forbidden >= 0:
		c.Forbidden = s.limits[j.forbidden].Name
	case pr.Emission == 0:
		c.Forbidden = noEmission
	}
	return c
}

// solve returns the prediction at the pressure that puts the emission at lambda
// with energy e, from the rows of a map that was surveyed at e. Where several
// pressures do, one that breaks no hard bound is preferred, then the lowest.
func (s *surveyor) solve(pressures []unit.Pascal, row []Cell, e unit.Joule, lambda unit.Metre) (best emission.Prediction, ok bool) {
	allowed := false
	for i := 1; i < len(row); i++ {
		a, b := row[i-1].Emission, row[i].Emission
		if a == 0 || b == 0 || (a < lambda) == (b < lambda) {
			continue
		}
		pr, found := s.bracket(pressures[i-1], pressures[i], a-lambda, b-lambda, e, lambda)
		if !found {
			continue
		}
		fine := s.judged(&pr).forbidden < 0
		if !ok || fine && !allowed {
			best, ok, allowed = pr, true, fine
		}
	}
	return best, ok
}

// near is how close to the target a solution must come: a jump from one branch
// to another is none.
const near = 0.05 * unit.Nanometre

// bracket finds the pressure between lo and hi, where the emission is off by
// below and above, of opposite sign. Regula falsi, the end that stays halved in
// weight (Illinois), each prediction a search from nothing.
func (s *surveyor) bracket(lo, hi unit.Pascal, below, above unit.Metre, e unit.Joule, lambda unit.Metre) (emission.Prediction, bool) {
	side := 0
	for range 40 {
		p := (lo*unit.Pascal(above) - hi*unit.Pascal(below)) / unit.Pascal(above-below)
		pr := s.predictor.Predict(s.input(p, e), nil)
		if pr.Emission == 0 {
			return pr, false
		}
		off := pr.Emission - lambda
		switch {
		case off < near && off > -near:
			return pr, true
		case (off < 0) == (below < 0):
			lo, below = p, off
			if side == -1 {
				above /= 2
			}
			side = -1
		default:
			hi, above = p, off
			if side == 1 {
				below /= 2
			}
			side = 1
		}
		if hi-lo < 1e-9*hi && lo-hi < 1e-9*hi {
			break
		}
	}
	return emission.Prediction{}, false
}
