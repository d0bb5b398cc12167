package main

import (
	"errors"

	"barline/device/instrument"
	"barline/model/limit"
	"barline/model/reading"
)

// wire brings commands to the instruments that take them.
type wire struct {
	controllers []*instrument.Runner // take setpoints
	holders     []*instrument.Runner // have something to do on HOLD
	all         map[*instrument.Instrument]*instrument.Runner
	gather      *gather
	answer      func(command uint64, err error, at reading.Stamp)
	now         func() reading.Stamp
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
