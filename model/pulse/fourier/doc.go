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
// the radix-4 transform; see Van Loan, Computational Frameworks for the Fast
// Fourier Transform (SIAM, 1992), section 1.7 and section 2.4. Lengths that
// are no power of two are refused.
package fourier
