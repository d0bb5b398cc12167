// Package gas says what a gas does to light that passes through it: how dense
// it is at a pressure and temperature, and from that its refractive index with
// exact derivatives, its nonlinear index and what it takes to ionise it.
//
// Concepts:
//
//   - A Species is one pure gas and what is known of its atoms.
//   - A Medium is what fills the fibre, with the sources of its numbers chosen
//     by name: density (reference, virial, ideal), index (peck-fisher-1964 …)
//     and nonlinear index. It never changes and may be shared.
//   - An Isotherm is a Medium at one temperature. It keeps what depends on
//     temperature alone, so that the next pressure costs a fraction of a
//     microsecond. One goroutine each.
//   - A State is a Medium at one pressure and temperature. It is a value.
//
// The index always follows the Lorentz–Lorenz relation in molar density, from
// the published dispersion formula at the density of its own reference state.
// One source serves from pump to emission: sources are never spliced.
//
// The package refuses what is no gas or lies outside the range its numbers were
// checked in: liquid xenon, negative pressure, wavelengths at a resonance.
package gas
