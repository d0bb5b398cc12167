// Package fibre says how a hollow fibre guides light through a gas: effective
// index with exact derivatives, effective area, loss and the wavelengths at
// which its walls let the light through.
//
// Concepts:
//
//   - A Spec is the fibre as a bench file describes it; New checks it and
//     returns a Fibre, which never changes and may be shared.
//   - A Mode names the field pattern; HE11 unless asked otherwise.
//   - A Guide is a Fibre filled with a gas.State. It is a value, and answers
//     for propagation constant, loss and nonlinearity at a frequency.
//   - A Band is a stretch of wavelengths between two resonances of the wall.
//     Predictions are made inside bands only.
//
// Three kinds of fibre: capillary, kagome and antiresonant (single ring,
// tubular). The package does not solve Maxwell's equations: each kind is a
// closed form with a stated range. It refuses sizes that are not positive and
// a wall where the kind has none.
package fibre
