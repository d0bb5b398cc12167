// Package taylor carries a function of frequency together with its first
// three derivatives through a formula, so that dispersion is exact and never
// the difference of two nearby values.
//
// A Number holds the Taylor coefficients about one frequency ω₀ in the
// relative step s, ω = ω₀(1+s). The relative step keeps the coefficients of
// one size; Derivatives turns them into derivatives with respect to ω.
//
// The rules are those of truncated power series: A. Griewank, A. Walther,
// Evaluating Derivatives, 2nd ed., SIAM (2008), chapter 13.
package taylor
