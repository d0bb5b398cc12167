// Package ionise says how fast a strong field frees electrons from an atom.
//
// A Rate is the Perelomov–Popov–Terent'ev rate of one gas at one pump
// frequency, acting on the instantaneous field. It goes over into tunnelling at
// low frequency and into the multiphoton law at high.
//
// A Table is a rate over the field of a guided mode, made once and then cheap:
// either the rate at the field that belongs to P/A_eff, or its two averages
// over the mode. The rate is so steep that the field of P/A_eff underestimates
// the electrons 6 to 8 times.
//
// Fields are in V/m and rates in 1/s. One electron leaves, once; above the
// barrier-suppression field the rate overestimates.
package ionise
