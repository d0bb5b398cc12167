package main

import (
	"errors"

	"barline/device/instrument"
	"barline/model/limit"
	"barline/model/reading"
)

// wire brings commands to the instruments that take setpoints.
type wire struct {
	controllers []*instrument.Runner
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

// Hold implements loop.Wire.
func (w *wire) Hold(command uint64, sp limit.Setpoint) {
	if len(w.controllers) == 0 {
		w.answer(command, errNoController, w.now())
	}
	for _, r := range w.controllers {
		r.Hold(command, sp)
	}
}

var errNoController = errors.New("no instrument of this bench takes setpoints")
