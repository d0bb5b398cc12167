// Package flow is gas on the move, as the model knows it: through the core of
// the fibre and through its cladding, in and out of the cells, through valves
// and leaks.
//
// The gauge reads a cell and the light sees the core. Between the two lie
// transport, temperature and time:
//
//   - A Core carries the gas along the fibre, from molecular to viscous flow,
//     driven by the measured cells. It says how far the gas lags and how long
//     it will. A Fibre adds the hollow cladding, which fills later.
//   - A Cell is a volume with the heat that filling leaves in it; a Panel is a
//     cell with Regulator, Valve, Pump, leak and walls that give off gas.
//   - Handling plans moves and purges before they are made; a Forecast follows
//     one under way and corrects the model by what is seen.
//   - Slope and Settled say when the gas has come to rest.
//   - FitRise tells a leak from outgassing and from cooling.
//
// Everything is a function of its arguments: no clock, no I/O. Pressures are
// absolute, temperatures are thermodynamic, amounts are moles.
//
// The package refuses, with an error that names the value, what is not finite
// or below zero, states outside the gas phase, and geometry without length or
// bore. A refusal leaves the last state as it was.
package flow
