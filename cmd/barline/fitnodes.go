package main

import (
	"context"
	"fmt"
	"io"
	"math"

	"barline/model/anchor"
	"barline/model/calibration"
	"barline/model/emission"
	"barline/model/gas"
	"barline/model/unit"
)

// model returns the anchored prediction over the range of the points. Nodes
// come from the cache; those that are missing are computed, and kept.
func (f *fitFlags) model(ctx context.Context, s emission.Setup, points []calibration.Point, progress io.Writer) (*calibration.Model, error) {
	r, err := rangeOf(s, points)
	if err != nil {
		return nil, err
	}
	b, err := s.AnchorBench()
	if err != nil {
		return nil, err
	}
	nodes, err := nodesOver(ctx, progress, b, r, b.Plan)
	if err != nil {
		return nil, err
	}
	return calibration.NewModel(b.Build(nodes))
}

// rangeOf is the range of density of the usable points and a little more, so
// that corrections have room.
func rangeOf(s emission.Setup, points []calibration.Point) (anchor.Range, error) {
	medium, err := gas.New(s.Gas)
	if err != nil {
		return anchor.Range{}, err
	}
	low, high, n := math.Inf(1), math.Inf(-1), 0
	r := anchor.Range{From: math.Inf(1)}
	for _, p := range points {
		if !p.Status.Usable() || !(p.Input.Pressure > 0) || !(p.Input.Temperature > 0) {
			continue
		}
		state, err := medium.At(p.Input.Pressure, p.Input.Temperature, p.Input.Air)
		if err != nil {
			return r, err
		}
		n++
		low, high = math.Min(low, float64(p.Input.Pressure)), math.Max(high, float64(p.Input.Pressure))
		r.From, r.To = min(r.From, float64(state.Density)), max(r.To, float64(state.Density))
	}
	if n < 2 || !(high > low) {
		return r, fmt.Errorf("%d usable points between %v and %v: expected at least two pressures: %w", n, unit.Pascal(low), unit.Pascal(high), calibration.ErrPoints)
	}
	const room = 1.02 // the lattice of nodes reaches further by itself
	return anchor.Range{From: r.From / room, To: r.To * room}, nil
}
