package plan

import (
	"fmt"
	"runtime"
	"sort"
	"sync"
)

// Plan is the answer to a Question.
type Plan struct {
	Question Question
	Choices  []Choice  // best first, one a gas
	Refusals []Refusal // in the order of the gases
	Maps     []Map     // one for each gas that could be computed, in their order
}

// Map returns the map of a gas, as the question or a choice names it.
func (p *Plan) Map(composition string) (*Map, bool) {
	for i := range p.Maps {
		if p.Maps[i].Gas == composition {
			return &p.Maps[i], true
		}
	}
	return nil, false
}

// Answer works the question out, gases beside each other on all cores. A gas
// that cannot be computed is an error where it is the only one, else a refusal.
func (q Question) Answer() (*Plan, error) {
	if len(q.Gases) == 0 {
		q.Gases = Gases()
	}
	if err := q.check(); err != nil {
		return nil, err
	}
	type found struct {
		m       *Map
		choice  Choice
		refusal Refusal
		ok      bool
		err     error
	}
	results := make([]found, len(q.Gases))
	work := make(chan int)
	var all sync.WaitGroup
	for range min(runtime.GOMAXPROCS(0), len(q.Gases)) {
		all.Go(func() {
			for i := range work {
				r := &results[i]
				s, err := q.surveyor(q.Gases[i])
				if err != nil {
					r.err = err
					continue
				}
				m := s.survey(q.Pressure, q.Energy)
				m.Gas = q.Gases[i]
				r.m = &m
				if r.choice, r.ok = s.choose(q.Gases[i], &m); !r.ok {
					r.refusal = s.refuse(q.Gases[i], &m)
				}
			}
		})
	}
	for i := range q.Gases {
		work <- i
	}
	close(work)
	all.Wait()
	p := &Plan{Question: q}
	for i, r := range results {
		switch {
		case r.err != nil && len(q.Gases) == 1:
			return nil, fmt.Errorf("plan: %w", r.err)
		case r.err != nil:
			p.Refusals = append(p.Refusals, Refusal{Gas: q.Gases[i], Why: r.err.Error()})
			continue
		case r.ok:
			p.Choices = append(p.Choices, r.choice)
		default:
			p.Refusals = append(p.Refusals, r.refusal)
		}
		p.Maps = append(p.Maps, *r.m)
	}
	sort.SliceStable(p.Choices, func(i, j int) bool { return p.Choices[i].before(&p.Choices[j]) })
	return p, nil
}

// Nearest returns the refusal that needs least to give way.
func (p *Plan) Nearest() (Refusal, bool) {
	best, ok := Refusal{}, false
	for _, r := range p.Refusals {
		if len(r.Needs) > 0 && (!ok || r.Needs[0].Margin > best.Needs[0].Margin) {
			best, ok = r, true
		}
	}
	return best, ok
}
