package gas

import (
	"fmt"
	"strings"

	"barline/model/unit"
)

// kerrSource is one published nonlinear index of one gas, electronic part.
type kerrSource struct {
	name     string
	of       speciesID
	n2       float64 // m²/W at the state t, p
	t, p     float64 // K, Pa
	citation string
}

const (
	lab       = 293.15
	citeLehm  = "H. J. Lehmeier, W. Leupacher, A. Penzkofer, Opt. Commun. 56, 67 (1985), doi:10.1016/0030-4018(85)90069-0; helium value and ratios from memory, 1055 nm"
	citeShelt = "D. P. Shelton, J. E. Rice, Chem. Rev. 94, 3 (1994), doi:10.1021/cr00025a001; static hyperpolarisability from memory, carried to 800 nm"
	citeZahed = "S. Zahedpour, J. K. Wahlstrand, H. M. Milchberg, Opt. Lett. 40, 5794 (2015), doi:10.1364/OL.40.005794; 800 nm"
	citeWahl  = "J. K. Wahlstrand, Y.-H. Cheng, H. M. Milchberg, Phys. Rev. A 85, 043820 (2012), doi:10.1103/PhysRevA.85.043820; 800 nm"
	citeNibb  = "E. T. J. Nibbering et al., J. Opt. Soc. Am. B 14, 650 (1997), doi:10.1364/JOSAB.14.000650; 800 nm, 120 fs"

	// Lehmeier et al.: χ⁽³⁾ of helium 3.43e-28 m²/V² in a convention that the
	// cube of the real field divides by 4; n₂ = 3χ⁽³⁾/(4ε₀c) at 273.15 K, 1 atm.
	lehmeierHelium = 3 * 4 * 3.43e-28 / (4 * 8.8541878128e-12 * 299792458)
)

// kerrTable holds nonlinear indices; the first of each gas is its default.
var kerrTable = [...]kerrSource{
	{"shelton-1994", helium, 3.6e-25, lab, bar1, citeShelt},
	{"lehmeier-1985", helium, lehmeierHelium, freezing, atm, citeLehm},
	{"shelton-1994", neon, 9.2e-25, lab, bar1, citeShelt},
	{"lehmeier-1985", neon, 1.8 * lehmeierHelium, freezing, atm, citeLehm},
	{"zahedpour-2015", argon, 1.01e-23, lab, atm, citeZahed},
	{"wahlstrand-2012", argon, 9.7e-24, lab, atm, citeWahl},
	{"shelton-1994", argon, 1.03e-23, lab, bar1, citeShelt},
	{"lehmeier-1985", argon, 23.5 * lehmeierHelium, freezing, atm, citeLehm},
	{"nibbering-1997", argon, 1.4e-23, 293, atm, citeNibb},
	{"shelton-1994", krypton, 2.34e-23, lab, bar1, citeShelt},
	{"lehmeier-1985", krypton, 64 * lehmeierHelium, freezing, atm, citeLehm},
	{"shelton-1994", xenon, 6.38e-23, lab, bar1, citeShelt},
	{"lehmeier-1985", xenon, 188.2 * lehmeierHelium, freezing, atm, citeLehm},
	{"nibbering-1997", xenon, 8.1e-23, 293, atm, citeNibb},
	{"zahedpour-2015", nitrogen, 7.9e-24, lab, atm, citeZahed},
	{"wahlstrand-2012", nitrogen, 7.4e-24, lab, atm, citeWahl},
	{"shelton-1994", nitrogen, 7.96e-24, lab, bar1, citeShelt},
	{"lehmeier-1985", nitrogen, 21.1 * lehmeierHelium, freezing, atm, citeLehm},
	{"wahlstrand-2012", air, 7.9e-24, lab, bar1, citeWahl + "; electronic part of air from memory"},
}

// kerrSpread is the relative standard uncertainty of n₂ of each gas: half the
// spread of the direct measurements and the ab initio values.
var kerrSpread = [...]float64{helium: 0.04, neon: 0.08, argon: 0.04, krypton: 0.10, xenon: 0.18, nitrogen: 0.04, air: 0.05}

// findKerr returns the source of that name, or a value written with its unit,
// which holds at 273.15 K and 101325 Pa. Empty means the default.
func findKerr(of *Species, name string) (kerrSource, error) {
	var have []string
	for _, s := range kerrTable {
		if s.of != of.id {
			continue
		}
		if name == s.name || name == "" {
			return s, nil
		}
		have = append(have, s.name)
	}
	v, err := unit.ParseNonlinearIndex(name)
	if err != nil {
		return kerrSource{}, fmt.Errorf("nonlinear index %q is %w for %s: expected one of %s, or a value such as \"9.11e-24 m2/W\" at 273.15 K and 101325 Pa",
			name, ErrUnknown, of.Name, strings.Join(have, ", "))
	}
	if !(v >= 0) {
		return kerrSource{}, fmt.Errorf("nonlinear index %q: expected a value of zero or above", name)
	}
	return kerrSource{name, of.id, float64(v), freezing, atm, "given by hand, at 273.15 K and 101325 Pa"}, nil
}

// KerrNames returns the nonlinear-index sources of a gas, the default first.
func KerrNames(of *Species) []string {
	var names []string
	for _, s := range kerrTable {
		if s.of == of.id {
			names = append(names, s.name)
		}
	}
	return names
}
