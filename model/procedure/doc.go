// Package procedure reads procedure files and turns them into programs that
// the core can run: evacuate, purge, fill, step, scan, hold, leak test, vent,
// energy.
//
// A procedure file is TOML, strict as a bench file is:
//
//	[procedure]
//	name = "purge and scan"
//
//	[[step]]
//	do = "purge"
//	cycles = 3
//	low = "5 mbar"
//	high = "3 bar"
//	hold = "30 s"
//
//	[[step]]
//	do = "scan"
//	from = "7 bar"
//	to = "11 bar"
//	by = "0.25 bar"
//	order = "up and down"
//	dwell = "20 s"
//	energies = ["1.1 uJ", "1.3 uJ"]
//
// A scan goes to pressures that are listed, evenly spaced (from, to, by), or so
// spaced that the model puts the emission at even steps of wavelength
// (from_emission, to_emission, emission_by). An evacuation ends at a pressure
// (to) or where it falls more slowly than until_rate.
//
// Everything is checked before anything runs: keys, units, which key goes with
// which verb, and every pressure against the limits of the bench. The package
// does no I/O and knows no clock.
package procedure
