package gas

import (
	"fmt"
	"strings"
)

// Species is one pure gas.
type Species struct {
	Name      string
	Symbol    string
	MolarMass float64 // kg/mol

	// IonisationEnergy is the first ionisation energy in electronvolt, that of
	// the gas's most easily ionised abundant part.
	// Source: NIST Atomic Spectra Database (noble gases), NIST Chemistry
	// WebBook (nitrogen; oxygen for air, from memory).
	IonisationEnergy float64
	// OrbitalMomentum is the angular momentum quantum number l of the electron
	// that leaves: 0 for helium and nitrogen, 1 for the p shells.
	OrbitalMomentum int

	// ThermalConductivity is that of the dilute gas at 293 K in W/(m K).
	// Source: VDI Heat Atlas, 2nd ed. (2010).
	ThermalConductivity float64

	id       speciesID
	equation *equation
	critical critical
	boundary []boiling // saturation, where the gas can condense on a bench
}

type speciesID uint8

const (
	helium speciesID = iota
	neon
	argon
	krypton
	xenon
	nitrogen
	air
)

// critical holds the constants that corresponding states need: temperature in
// kelvin, molar volume in m³/mol and compressibility. For helium and neon they
// are the effective values of the classical limit.
type critical struct {
	temperature, volume float64
}

// Molar masses: CIAAW standard atomic weights as used by the equations of
// state. Critical constants: those of the equations of state; helium and neon
// effective values of J. M. Prausnitz, R. N. Lichtenthaler, E. G. de Azevedo,
// Molecular Thermodynamics of Fluid-Phase Equilibria, 3rd ed. (1999), table 5-6
// (from memory).
var speciesTable = [...]Species{
	{Name: "helium", Symbol: "He", MolarMass: 4.002602e-3, IonisationEnergy: 24.58738901, OrbitalMomentum: 0, ThermalConductivity: 0.1519, id: helium, equation: &heliumEquation, critical: critical{10.47, 37.5e-6}},
	{Name: "neon", Symbol: "Ne", MolarMass: 20.179e-3, IonisationEnergy: 21.564541, OrbitalMomentum: 1, ThermalConductivity: 0.0483, id: neon, equation: &neonEquation, critical: critical{45.5, 40.3e-6}},
	{Name: "argon", Symbol: "Ar", MolarMass: 39.948e-3, IonisationEnergy: 15.7596119, OrbitalMomentum: 1, ThermalConductivity: 0.0174, id: argon, equation: &argonEquation, critical: critical{150.687, 74.59e-6}},
	{Name: "krypton", Symbol: "Kr", MolarMass: 83.798e-3, IonisationEnergy: 13.9996055, OrbitalMomentum: 1, ThermalConductivity: 0.00943, id: krypton, equation: &kryptonEquation, critical: critical{209.48, 92.17e-6}},
	{Name: "xenon", Symbol: "Xe", MolarMass: 131.293e-3, IonisationEnergy: 12.1298437, OrbitalMomentum: 1, ThermalConductivity: 0.00554, id: xenon, equation: &xenonEquation, critical: critical{289.733, 119.05e-6}, boundary: xenonBoiling[:]},
	{Name: "nitrogen", Symbol: "N2", MolarMass: 28.01348e-3, IonisationEnergy: 15.581, OrbitalMomentum: 0, ThermalConductivity: 0.0251, id: nitrogen, equation: &nitrogenEquation, critical: critical{126.192, 89.41e-6}},
	{Name: "air", Symbol: "air", MolarMass: 28.9586e-3, IonisationEnergy: 12.0697, OrbitalMomentum: 1, ThermalConductivity: 0.0258, id: air, equation: &airEquation, critical: critical{132.531, 92.0e-6}},
}

// Named returns the species of that name or chemical symbol.
func Named(name string) (*Species, error) {
	for i := range speciesTable {
		s := &speciesTable[i]
		if strings.EqualFold(name, s.Name) || strings.EqualFold(name, s.Symbol) {
			return s, nil
		}
	}
	return nil, fmt.Errorf("gas %q is %w: expected one of %s", name, ErrUnknown, strings.Join(SpeciesNames(), ", "))
}

// SpeciesNames returns the names of all gases, lightest noble gas first.
func SpeciesNames() []string {
	names := make([]string, len(speciesTable))
	for i := range speciesTable {
		names[i] = speciesTable[i].Name
	}
	return names
}
