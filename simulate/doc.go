// Package simulate is the other end of the wire: the invented bench Heron, as
// a physical model whose instruments speak the real protocols.
//
// A Bench is a value that stands at one instant of bench time. Advance carries
// it on in frames of 20 ms: the controller's loop moves its valves, gas flows
// between cylinder, line, manifold, cells, core, pump and room (package
// panel), walls and fibre warm and cool, sensors lag, light is emitted. What
// the instruments say is asked for over lines: in memory and at once with
// Lines, on pseudo-terminals with Serve.
//
// Everything random comes from the seed, and noise from the seed and the
// number of the frame, so that the same seed and the same commands at the same
// times give the same bench, however often and in whatever order it is asked.
//
// The light obeys a Truth that differs from what a bench file says by amounts
// drawn from the seed. Nothing on the wire tells them.
//
// Registers, scaling and commands are written here from the description of
// the instruments and not shared with the drivers, so that a misreading shows
// up as a disagreement. Only the codecs of the protocols are shared.
//
// The package refuses to know the program it serves: it has no limits, takes
// orders that a careful program would never give, and lets gas do what gas
// does.
package simulate
