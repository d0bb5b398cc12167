package main

import (
	"context"
	"fmt"
	"io"

	"barline/model/emission"
	"barline/model/plan"
	"barline/model/pulse"
	"barline/model/unit"
)

// anchorChoices puts the best few choices on full-field runs around them. One
// that they do not bear out stays as the estimate has it.
func anchorChoices(ctx context.Context, stderr io.Writer, p *plan.Plan, best int) error {
	for i := range min(best, len(p.Choices)) {
		c := &p.Choices[i]
		s := p.Question.Setup
		if c.Gas != s.Gas.Composition {
			s.Gas.Composition, s.Gas.Index, s.Gas.N2 = c.Gas, "", ""
		}
		s.Pulse.Energy = c.Energy
		from := emission.Input{Pressure: c.From / anchorReach, Temperature: p.Question.Temperature, Energy: c.Energy, Air: p.Question.Air}
		to := from
		to.Pressure = c.To * anchorReach
		start, err := emission.NewPredictor(s)
		if err != nil {
			return err
		}
		fmt.Fprintf(stderr, "%s: ", c.Gas)
		anchor, err := anchored(ctx, stderr, start, []emission.Input{from, to})
		if err != nil {
			return err
		}
		fmt.Fprintln(stderr)
		again, ok := p.Question.Again(*c, anchor)
		if !ok {
			fmt.Fprintf(stderr, "%s: its full-field runs do not emit at %s near there; the estimate stands\n", c.Gas, targetText(p.Question.Target))
			continue
		}
		*c = again
	}
	return nil
}

// anchorReach is how far from the estimate's pressure the runs reach: the
// estimate is off by less.
const anchorReach = 1.15

// confirm propagates the best few choices, with a progress bar on a terminal.
func confirm(ctx context.Context, stderr io.Writer, p *plan.Plan, best int) ([]plan.Confirmed, error) {
	n := min(best, len(p.Choices))
	bar := newBar(stderr)
	defer bar.clear()
	var list []plan.Confirmed
	for i, c := range p.Choices[:n] {
		said := func(done int) {
			share := (float64(i) + float64(done)/plan.RunsToConfirm) / float64(n)
			bar.draw(share, fmt.Sprintf(", %s, run %d", c.Gas, done))
		}
		one, err := p.Question.Confirm(ctx, c, propagateLight, said)
		if err != nil {
			return nil, fmt.Errorf("propagating %s: %w", c.Gas, err)
		}
		list = append(list, one)
	}
	return list, nil
}

// propagateLight propagates one input of a setup.
func propagateLight(ctx context.Context, s emission.Setup, in emission.Input) (plan.Light, error) {
	s.Pulse.Energy = in.Energy
	run, err := newPropagation(s, pulse.DefaultTolerance)
	if err != nil {
		return plan.Light{}, err
	}
	done, err := run.run(ctx, in, 0, nil)
	if err != nil {
		return plan.Light{}, err
	}
	r := done.result
	l := plan.Light{Ionised: unit.Fraction(r.Ionised), Reliable: r.Reliable, Reasons: r.Reasons}
	if lobe, ok := r.Emission(); ok {
		l.Emission, l.Width, l.Conversion = lobe.Centroid, lobe.Width, unit.Fraction(lobe.Conversion)
	}
	return l, nil
}
