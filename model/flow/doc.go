// Package flow is gas on the move, as the model knows it: through the core of
// the fibre and through its cladding, in and out of the cells, through valves
// and leaks.
//
// The gauge reads a cell and the light sees the core. Between the two lie
// transport, temperature and time. Core carries the gas along the fibre from
// molecular to viscous flow and says how far it lags behind the cells and for
// how long. Cell is a volume with the energy that filling and venting leave in
// it. Valve, Regulator and Pump are what is bolted to it. RateOfRise tells a
// leak from outgassing and from cooling; Purge counts cycles.
//
// Everything is a function of its arguments: no clock, no I/O. Pressures are
// absolute, temperatures are thermodynamic, amounts are moles.
//
// The package refuses, with an error that names the value, what is not finite
// or below zero, states outside the gas phase, and geometry without length or
// bore. A refusal leaves the last state as it was.
package flow
