// Package panel is the gas side of the simulated bench: volumes joined by
// valves, a pump, a regulator and leaks, their walls, and the core of a
// hollow fibre between two of the volumes.
//
// A Network is a set of volumes, each holding moles of the working gas, moles
// of air and internal energy, joined by passages that carry all three from
// the upstream side. Walls take up heat. Reservoirs are outside the network
// (the cylinder, the room, the pump's exhaust): their pressure is given, and
// they count what went into and out of them, so that moles and energy summed
// over everything never change. The equations are stiff (a wide valve levels
// two volumes within a millisecond, a cell wall needs half an hour) and are
// integrated by an L-stable Rosenbrock method with its own choice of step.
//
// The gas is ideal: at 12 bar argon departs from that by 0.8 %, which moves
// times and gas used by as much and nothing else.
//
// The package refuses to know what a controller, a gauge or a bench file is.
// Everything is in SI units and nothing here is random.
package panel
