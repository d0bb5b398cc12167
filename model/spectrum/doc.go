// Package spectrum finds the emission in a spectrum, computed or measured.
//
// The emission is defined once, for both: energy per angular frequency is
// smoothed with a Gaussian of 0.08 rad/fs rms, then turned into energy per
// wavelength. A lobe is a maximum above 1.6 times the pump frequency that
// falls to half on its long-wave side before anything higher comes, and that
// is no harmonic of the pump. The lobe with most energy is the emission; its
// wavelength is the energy-weighted centroid of the part above half its
// maximum. The peak is given too, but it hops between sub-lobes by several
// nanometres where the centroid moves by two.
//
// The package refuses spectra that do not ascend or hold no energy. It finds
// no emission where no lobe holds a thousandth of the energy.
package spectrum
