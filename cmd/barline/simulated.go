package main

import (
	"context"
	"errors"
	"fmt"

	"barline/device/instrument"
	"barline/device/link"
	"barline/model/bench"
	"barline/model/clock"
	"barline/model/unit"
	"barline/simulate"
)

// serveSimulated puts the simulated bench at the other end of its lines:
// pseudo-terminals that are opened like any serial port, in-memory lines where
// the system has none. It serves until ctx ends; wait returns when it has
// stopped.
func serveSimulated(ctx context.Context, sim *simulate.Bench, clk clock.Clock) (open func(bench.Instrument) (instrument.Open, error), wait func(), err error) {
	ports, err := sim.Serve(ctx, clk)
	if errors.Is(err, simulate.ErrNoTerminals) {
		sim.Follow(clk)
		return func(in bench.Instrument) (instrument.Open, error) {
			if _, ok := sim.Lines()[in.Name]; !ok {
				return nil, fmt.Errorf("instrument %q is not on the simulated bench", in.Name)
			}
			return func(context.Context) (link.Line, error) { return sim.Lines()[in.Name], nil }, nil
		}, func() {}, nil
	}
	if err != nil {
		return nil, nil, err
	}
	return func(in bench.Instrument) (instrument.Open, error) {
		port, ok := ports[in.Name]
		if !ok {
			return nil, fmt.Errorf("instrument %q is not on the simulated bench", in.Name)
		}
		in.Port, in.Address, in.Command = port, "", nil
		return openLine(in)
	}, sim.Wait, nil
}

// hurried is how long, wall time, an answer of a simulated instrument may take
// on a bench that runs speed times as fast as life. One that is silent must not
// make its neighbours on the line stale: three quarters of that time is left to
// it, so that a busy machine is not taken for silence sooner than it must be.
func hurried(timeout, stale unit.Second, speed float64) unit.Second {
	if !(speed > 1) {
		return timeout
	}
	return min(timeout, max(timeout, 0.75*stale)/unit.Second(speed))
}
