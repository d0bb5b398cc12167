package main

import (
	"errors"

	"barline/device/instrument"
	"barline/model/limit"
	"barline/model/live"
	"barline/model/reading"
)

// wire brings commands to the instruments that take them.
type wire struct {
	controllers []*instrument.Runner // take setpoints
	holders     []*instrument.Runner // have something to do on HOLD
	instruments []*instrument.Instrument
	all         map[*instrument.Instrument]*instrument.Runner
	gather      *gather
	answer      func(command uint64, err error, at reading.Stamp)
	now         func() reading.Stamp
}

// fares tells how the instruments have fared.
func (w *wire) fares() []live.Fare {
	all := make([]live.Fare, len(w.instruments))
	for i, in := range w.instruments {
		c := in.Counts()
		all[i] = live.Fare{
			Instrument: in.Name(), Asked: c.Asked, Silent: c.Silent, Refused: c.Refused, Resynced: c.Resynced, Stray: c.Stray,
			Good:      c.Readings[reading.Good] + c.Readings[reading.MaintenanceRequired],
			Bad:       c.Readings[reading.Failure] + c.Readings[reading.OutOfSpecification],
			RoundTrip: c.RoundTrip, Slowest: c.Slowest, Worst: c.Worst,
		}
	}
	return all
}

// Setpoint implements loop.Wire.
func (w *wire) Setpoint(command uint64, sp limit.Setpoint) {
	if len(w.controllers) == 0 {
		w.answer(command, errNoController, w.now())
	}
	for _, r := range w.controllers {
		r.Set(command, sp)
	}
}

// Hold implements loop.Wire. It reaches every instrument that drives a valve
// or has hold commands, and is answered when all of them have answered.
func (w *wire) Hold(command uint64, sp limit.Setpoint) {
	if len(w.holders) == 0 {
		w.answer(command, errNoController, w.now())
		return
	}
	w.gather.expect(command, len(w.holders))
	for _, r := range w.holders {
		r.Hold(command, sp)
	}
}

// Order implements loop.Wire. It goes to the one instrument that takes it.
func (w *wire) Order(command uint64, o limit.Order) {
	for in, r := range w.all {
		if in.Takes(o) {
			r.Move(command, o)
			return
		}
	}
	w.answer(command, errNobodyTakes, w.now())
}

var errNobodyTakes = errors.New("no instrument of this bench takes that")

var errNoController = errors.New("no instrument of this bench takes setpoints")
