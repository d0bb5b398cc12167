package simulate

import (
	"fmt"
	"strings"
	"time"

	"barline/model/unit"
	"barline/simulate/panel"
)

// Scenario is a story: how the bench stands at the start, what goes wrong and
// when, and what the person at it would do.
type Scenario struct {
	Name  string
	About string // one line

	// Moves are setpoints that a person at the bench would ask for, in order
	// of time. The bench does not carry them out: whoever plays it does.
	Moves []Move

	start panel.State
	cues  []Timed
	next  int // the first cue that has not come yet
}

// Air returns the share of air in the cells at the start, which whoever works
// at the bench knows: they stood open, or were purged.
func (s *Scenario) Air() unit.Fraction { return unit.Fraction(s.start.Air) }

// Move is a pressure asked for at a bench time.
type Move struct {
	At time.Duration
	To unit.Pascal
}

// play lets come what is due.
func (s *Scenario) play(b *Bench) {
	for s.next < len(s.cues) && s.cues[s.next].At <= b.time() {
		// Those of scenarios a test injects, others New has checked.
		_ = b.inject(s.cues[s.next].Fault)
		s.next++
	}
}

// Scenarios returns all of them, in the order in which help lists them.
func Scenarios() []Scenario {
	filled := func(p float64) panel.State { return panel.State{P: p * bar, T: roomTemperature} }
	opened := panel.State{P: ambient, T: roomTemperature, Air: 1}
	nine := []Move{{5 * time.Second, 9 * unit.Bar}}
	hold := func(name, about string, cues ...Timed) Scenario {
		return Scenario{Name: name, About: about, Moves: nine, start: filled(9), cues: cues}
	}
	return []Scenario{
		{Name: "fill", About: "from 1.1 bar of argon up to 9 bar, then steps", start: filled(1.1), Moves: []Move{
			{5 * time.Second, 7 * unit.Bar}, {60 * time.Second, 8 * unit.Bar}, {90 * time.Second, 9 * unit.Bar},
			{120 * time.Second, 10 * unit.Bar}, {150 * time.Second, 11 * unit.Bar}, {180 * time.Second, 9 * unit.Bar},
		}},
		{Name: "evacuate", About: "cells full of air are pumped down", start: opened, Moves: []Move{{5 * time.Second, 0}}},
		{Name: "purge", About: "cells full of air, three cycles of pumping and filling, then 9 bar", start: opened, Moves: []Move{
			{5 * time.Second, 0}, {60 * time.Second, 3 * unit.Bar},
			{90 * time.Second, 0}, {150 * time.Second, 3 * unit.Bar},
			{180 * time.Second, 0}, {240 * time.Second, 9 * unit.Bar},
		}},
		{Name: "scan", About: "from 7 to 11 bar and back in steps of half a bar", start: filled(7), Moves: scanMoves()},
		hold("quiet", "9 bar held, nothing goes wrong"),
		{Name: "leak", About: "closed at 9 bar, and a seal of cell B begins to leak after a minute", start: filled(9),
			cues: []Timed{{time.Minute, Fault{Kind: Leak}}}},
		{Name: "air", About: "the cylinder was changed and its line not purged: 2 % of air come in with the argon", start: filled(1.1),
			Moves: nine, cues: []Timed{{0, Fault{Kind: Air}}}},
		hold("sag", "pulse energy sags by 15 % an hour from the first minute on", Timed{time.Minute, Fault{Kind: Sag}}),
		hold("warm", "the laboratory warms by 3 K an hour", Timed{time.Minute, Fault{Kind: Warm}}),
		{Name: "stuck", About: "the inlet valve sticks while the cells are filled", start: filled(6),
			Moves: nine, cues: []Timed{{10 * time.Second, Fault{Kind: Stuck}}}},
		hold("zero", "the transducer of cell B drifts by 100 mbar an hour", Timed{time.Minute, Fault{Kind: Zero}}),
		hold("dead", "the transducer of cell A falls silent for a minute",
			Timed{time.Minute, Fault{Kind: Dead}}, Timed{2 * time.Minute, Fault{Kind: Dead, Over: true}}),
		hold("garbage", "one reply in ten of the gauges is damaged on the line", Timed{30 * time.Second, Fault{Kind: Garbage}}),
		hold("unplugged", "the controller's cable is pulled for half a minute",
			Timed{time.Minute, Fault{Kind: Unplugged}}, Timed{90 * time.Second, Fault{Kind: Unplugged, Over: true}}),
		hold("shutter", "somebody closes the shutter for a minute",
			Timed{time.Minute, Fault{Kind: Shutter}}, Timed{2 * time.Minute, Fault{Kind: Shutter, Over: true}}),
	}
}

func scanMoves() []Move {
	var m []Move
	at := 5 * time.Second
	for k := 0; k <= 16; k++ {
		up := k
		if k > 8 {
			up = 16 - k
		}
		m = append(m, Move{at, 7*unit.Bar + unit.Pascal(up)*unit.Bar/2})
		at += 30 * time.Second
	}
	return m
}

func findScenario(name string) (Scenario, error) {
	var names []string
	for _, s := range Scenarios() {
		if s.Name == name {
			return s, nil
		}
		names = append(names, s.Name)
	}
	return Scenario{}, fmt.Errorf("scenario %q: expected one of %s", name, strings.Join(names, ", "))
}
