// Package plan answers the question that stands before the gas is opened:
// which gas, at which pressure and with how much energy, puts the emission at
// a wavelength, and what stands in the way.
//
// Concepts:
//
//   - A Question is a bench, a wavelength or band, and the pressures, energies
//     and gases that may be had. Answer works it out.
//   - A Limit is one bound with the margin that is left to it: 1 far away, 0 at
//     the bound, below 0 beyond. Beyond a hard one nothing is promised; beyond
//     a soft one the choice carries a caution.
//   - A Choice is one gas that reaches the target, at the energy whose
//     narrowest margin is widest.
//   - A Refusal is a gas that does not: what would have to give way, and by how
//     much.
//   - A Map is the emission of one gas over pressure and energy, with the first
//     bound that forbids each place.
//   - Confirm asks full-field propagation about a choice.
//
// Predictions are those of package emission, and as good: the estimate is right
// to about ten nanometres. What it does not know, the slope over energy, is
// given only by the anchored answer and by Confirm.
//
// The package refuses a target outside 100 nm to 5 µm, empty ranges, and gases
// it has no numbers for. It does no I/O; propagation is a function it is given.
package plan
