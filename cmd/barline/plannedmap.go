package main

import (
	"sync/atomic"

	"barline/model/gas"
	"barline/model/plan"
	"barline/model/unit"
)

// planned has the plan's map of the bench's gas computed beside everything
// else, and returns what hands it out as soon as it stands. A map that cannot
// be made is left out: forms do without.
func (s *session) planned() func() *plan.Map {
	var made atomic.Pointer[plan.Map]
	setup := s.predictor.Setup()
	pump := setup.Pulse.Wavelength
	q := plan.Question{
		Setup: setup, Target: gas.Span{From: pump / 4, To: pump / 4}, Temperature: benchTemperature,
		Air: s.bench.Gas.Air, Supply: s.bench.Panel.Supply,
		Pressure: plan.Range[unit.Pascal]{From: s.core.Limits().Lowest().Max / 10, To: s.core.Limits().Lowest().Max, Steps: 90},
		Energy:   plan.Range[unit.Joule]{From: setup.Pulse.Energy / 4, To: mostEnergy(s.bench, setup.Pulse.Energy), Steps: 12},
	}
	go s.broken.guard("the plan's map", func() {
		if m, err := q.Survey(setup.Gas.Composition, q.Pressure, q.Energy); err == nil {
			made.Store(m)
		}
	})
	return made.Load
}

// benchTemperature stands in before a thermometer has spoken.
const benchTemperature unit.Kelvin = 295.15
