// Package air converts between wavelengths in air, which most spectrometers
// report, and wavelengths in vacuum, which all of the model works in.
//
// Air is standard air: dry, 15 °C, 101325 Pa, 450 ppm carbon dioxide. The room
// is not, but near 265 nm the difference between the two wavelengths is
// 0.08 nm in all, and 10 K or 3 % of pressure change it by 3 %.
package air

import "barline/model/unit"

// Shortest and longest vacuum wavelength for which the dispersion was
// published (0.23 µm to 1.69 µm). It is used below as well: at 200 nm it
// is within 4e-7 of the wavelength of Peck and Reeder's formula, which holds
// from 185 nm on, and no spectrometer on the bench sees 0.1 pm.
const (
	Shortest = 230 * unit.Nanometre
	Longest  = 1690 * unit.Nanometre
)

// RefractivityAt returns n−1 of standard air at a vacuum wavelength.
//
//	10⁸ (n − 1) = 5792105 / (238.0185 − σ²) + 167917 / (57.362 − σ²)
//
// with σ the vacuum wavenumber in µm⁻¹. Dimensionless.
// Source: Ciddor, Appl. Opt. 35, 1566 (1996), eq. (1), doi:10.1364/AO.35.001566.
func RefractivityAt(vacuum unit.Metre) float64 {
	sigma := 1 / vacuum.Micrometres()
	s2 := sigma * sigma
	return 1e-8 * (5792105/(238.0185-s2) + 167917/(57.362-s2))
}

// InAir returns the wavelength in standard air of a vacuum wavelength.
func InAir(vacuum unit.Metre) unit.Metre {
	return vacuum / unit.Metre(1+RefractivityAt(vacuum))
}

// Vacuum returns the vacuum wavelength of a wavelength in standard air. It
// undoes InAir to the last digits.
func Vacuum(inAir unit.Metre) unit.Metre {
	vacuum := inAir
	for range 4 { // the refractivity changes so little that each round gains four digits
		vacuum = inAir * unit.Metre(1+RefractivityAt(vacuum))
	}
	return vacuum
}
