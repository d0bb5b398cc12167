// Package fourier transforms real and complex signals whose length is a power
// of two.
//
// The transform is
//
//	X[k] = Σ_j x[j] exp(−2πi jk/n)
//
// and the inverse takes the opposite sign without the factor 1/n, so that a
// caller folds it into a factor of its own. A field written as
// E(ω) = ∫ E(t) exp(iωt) dt is therefore the complex conjugate of X times the
// time step.
//
// A plan owns its scratch memory: transforms allocate nothing, and one plan
// serves one goroutine. The algorithm is the self-sorting (Stockham) form of
// the radix-4 transform, whose last pass is of radix 8 where fours do not go
// into the length; see Van Loan, Computational Frameworks for the Fast Fourier
// Transform (SIAM, 1992), section 1.7 and section 2.4. Lengths that are no
// power of two are refused.
//
// The passes exist twice: plain, in Go, and for amd64 in the processor's vector
// instructions (AVX2 and FMA), which plans use where the processor has them.
// The build tag purego leaves the latter out. Both agree to rounding, 1e-15 of
// the signal times the number of passes.
package fourier
