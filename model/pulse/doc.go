// Package pulse describes the light at the fibre input and computes what
// becomes of it along the fibre.
//
// A Pulse is the light as a person states it; Grid.Launch turns it into the
// spectrum of a real electric field. A Medium holds what the field meets:
// propagation constant, loss, Kerr response and ionisation. A Solver carries
// the field through the medium by the mode-averaged unidirectional equation
// of Kolesik & Moloney, Phys. Rev. E 70, 036604 (2004):
//
//	∂E/∂z = i(β(ω) − ω/v) E − (α/2) E + i ω²/(2 ε₀ c² β) P(ω)
//
// with E(ω) = ∫ E(t) exp(iωt) dt. The polarisation P is ε₀χ⁽³⁾E³ and the time
// integral of the plasma current, to which every gas of a mixture adds by its
// own rate and partial density. The intensity is ε₀c⟨E²⟩ = power / effective
// area.
//
// Spectra are held as the complex conjugate, which is what the transform of
// package fourier gives, divided by the number of points: E(t_j) is the
// plain sum over bins.
//
// A run takes its grid from the setup, and starts again with more room where
// light reaches the ends. The package refuses a grid that would fold the cube
// of the field back into the band that is kept, a window in which the pulse
// meets itself, and a pulse that ionises everything where it enters; a result
// says by itself how far it can be trusted.
package pulse
