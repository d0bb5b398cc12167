package live

import (
	"fmt"
	"strings"

	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// OrderWords says how orders are written.
const OrderWords = `"open inlet", "shut vent", "energy 1.2 uJ" or "zero cell A at 1.013 bar"`

var gaugeWords = map[string]reading.Role{
	"cell a": reading.CellAPressure, "cell b": reading.CellBPressure, "manifold": reading.ManifoldPressure,
	"supply": reading.SupplyPressure, "controller": reading.ControllerSensor,
}

// ParseOrder reads a valve to move, a pulse energy to set or the zero of a
// gauge to correct, as OrderWords writes them.
func ParseOrder(text string) (Intent, error) {
	verb, rest, _ := strings.Cut(strings.TrimSpace(text), " ")
	rest = strings.TrimSpace(rest)
	switch strings.ToLower(verb) {
	case "open", "shut", "close":
		for v := range limit.Valve(limit.ValveCount) {
			if strings.EqualFold(rest, v.String()) {
				return MoveValve{Valve: v, Open: strings.EqualFold(verb, "open")}, nil
			}
		}
		return nil, fmt.Errorf("valve %q: expected inlet, pump or vent", rest)
	case "energy":
		e, err := unit.ParseEnergy(rest)
		if err != nil {
			return nil, err
		}
		return Attenuate{Energy: e}, nil
	case "zero":
		name, value, ok := strings.Cut(rest, " at ")
		role, known := gaugeWords[strings.ToLower(strings.TrimSpace(name))]
		if !ok || !known {
			return nil, fmt.Errorf("zero %q: expected cell A, cell B, manifold, supply or controller, and the pressure it is at, such as \"zero cell A at 1.013 bar\"", rest)
		}
		p, err := unit.ParsePressure(strings.TrimSpace(value))
		if err != nil {
			return nil, err
		}
		return ZeroGauge{Role: role, Is: p}, nil
	}
	return nil, fmt.Errorf("%q: expected %s", text, OrderWords)
}
