package gas

import "barline/model/unit"

// Virial returns B in m³/mol and C in m⁶/mol² of Z = 1 + Bρ + Cρ² at t, from
// the species' reference equation of state: what transport needs, which solves
// for density thousands of times a step. It is within 0.1 % of the equation up
// to 50 bar (xenon 0.2 % up to 30 bar). It refuses temperatures outside those
// for which densities were checked.
func (s *Species) Virial(t unit.Kelvin) (b, c float64, err error) {
	if !(float64(t) >= lowestTemperature && float64(t) <= highestTemperature) {
		return 0, 0, errTemperature
	}
	var f fluid
	f.set(s.equation, float64(t))
	b, c = f.virials()
	return b, c, nil
}
