// Package scpi turns the messages of IEEE 488.2 and SCPI instruments into
// values and back. It does no I/O.
//
// A program message is one line of units separated by semicolons; each has a
// header, perhaps a question mark, and arguments: "SOUR:PRES:LEV 3.1". A
// response is one line of data. Numbers are NR1, NR2 or NR3 text; a number
// that means "not a number" or infinity by the convention of SCPI becomes
// NaN or an infinity here and never an ordinary value.
//
// The package knows no instrument: headers are the caller's. It refuses what
// the standards do not allow instead of guessing.
//
// Sources: IEEE Std 488.2-1992; SCPI-99, volumes 1 and 2.
package scpi
