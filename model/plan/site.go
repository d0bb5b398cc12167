package plan

import (
	"fmt"
	"math"
	"time"

	"barline/model/flow"
	"barline/model/unit"
)

// Site is what moves the gas, and what a purge has to do.
type Site struct {
	Handling flow.Handling // its gas is replaced by that of each choice
	Core     flow.Spec     // likewise
	Cladding []flow.Cladding

	Start    unit.Pascal   // at which the panel stands, holding StartAir
	StartAir unit.Fraction // 1 is air
	Want     unit.Fraction // air that a purge must leave
	Cylinder unit.Fraction // air in the gas supplied
	Low      unit.Pascal   // of a purge cycle
	High     unit.Pascal
}

// Fill is what it takes to have a gas in the core, by estimate.
type Fill struct {
	Cycles int           // of the purge
	Purge  time.Duration // until the air is below what was wanted, ending at the high pressure
	Fill   time.Duration // from there to the pressure of the choice
	// Core is how much longer the core takes to come within a millibar of the
	// cells, at most.
	Core time.Duration
	Gas  float64       // mol from the cylinder, purge included
	Air  unit.Fraction // left
	Why  string        // why there is no estimate; the rest is then zero
}

// coreWithin is how near the core must come to the cells.
const coreWithin = 1 * unit.Millibar

// fill estimates the way to p in a gas.
func (s *Site) fill(composition string, p unit.Pascal) Fill {
	medium, err := flow.Named(composition)
	if err != nil {
		return Fill{Why: fmt.Sprintf("no estimate for %q: only a pure gas has its transport here", composition)}
	}
	h, core := s.Handling, s.Core
	h.Gas, core.Gas = medium, medium
	channels := []flow.Spec{core}
	for _, c := range s.Cladding {
		hole := core
		hole.Radius = c.Radius
		channels = append(channels, hole)
	}
	purge := flow.Purge{Start: s.StartAir, Cylinder: s.Cylinder, Low: s.Low, High: s.High}
	plan, err := flow.PlanPurge(h, purge, s.Start, s.Want, channels...)
	if err != nil {
		return Fill{Why: "purge: " + err.Error()}
	}
	from := s.Start
	if plan.Cycles > 0 {
		from = s.High
	}
	stage, err := h.Move(from, p)
	if err != nil {
		return Fill{Why: "fill: " + err.Error()}
	}
	tau, err := core.Relaxation(p)
	if err != nil {
		return Fill{Why: "core: " + err.Error()}
	}
	most := math.Log(math.Max(1, math.Abs(float64(p-from))/float64(coreWithin)))
	return Fill{
		Cycles: plan.Cycles, Purge: plan.Total, Fill: stage.Time, Core: time.Duration(float64(tau) * most),
		Gas: plan.Gas + stage.Gas, Air: plan.Reached,
	}
}
