// Package fit finds the parameters of a model from measured points: weighted,
// robust, bounded and aware of what was known before.
//
// A Problem holds the points, the model and its parameters; Solve minimises
//
//	Σ ρ((measured − model(p)) / σ) + Σ ((p − prior) / σ_prior)²
//
// by Levenberg–Marquardt (Marquardt, J. Soc. Ind. Appl. Math. 11, 431 (1963),
// doi:10.1137/0111030; damping as Nielsen, IMM-REP-1999-05, DTU (1999)), with ρ
// the square or Huber's loss. The damped linear problem is solved by QR of the
// Jacobian itself, never of its square, which keeps the digits that badly
// scaled parameters need.
//
// A Result carries the parameters with covariance, correlations and degrees of
// freedom, and Seen: the combinations of parameters, the best known first, and
// how much the data added to what was known of each. A fit that converged on a
// combination the data cannot see would look like knowledge; Solve refuses it
// and names the combination, unless a prior holds it.
//
// Refused too: fewer points and priors than parameters, points that are not
// numbers, uncertainties that are not above zero, a start outside the bounds.
package fit
