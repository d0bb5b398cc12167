// Package emission predicts from the state of the gas and the pulse where the
// source emits, and how sure that is.
//
// Concepts:
//
//   - A Setup is one bench: medium, fibre, pulse, what is uncertain about them
//     and the limits to judge by. SetupFromBench makes it from a bench file.
//   - A Predictor is a Setup made ready. Predict answers for one reading in
//     microseconds and allocates nothing; Clone makes another for another
//     goroutine.
//   - A Prediction is a value: wavelength, uncertainty, dispersion, limits.
//   - An Answer names how the nonlinear part of phase matching was taken.
//
// Emission is where the mode's phase constant meets that of the compressed
// pulse, Δβ(ω) = β(ω) − β(ω₀) − β₁(ω₀)(ω−ω₀) = κ. Roots count only inside
// transmission bands, on the short-wave side of the zero-dispersion
// wavelength, where Δβ − κ passes from negative to positive with rising ω; the
// highest of them is the answer. The package gives no number where there is no
// such root: it says why.
//
// A linear or estimated answer is a start value. Its slopes over energy and
// pulse are not to be leaned on, and Steadiness leaves them out. The anchored
// answer takes κ from full-field runs of the same bench, which package anchor
// interpolates: Predictor.Anchored makes the predictor for it.
package emission
