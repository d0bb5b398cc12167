package anchor

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/pulse"
	"barline/model/unit"
)

// Spec is a bench and the range over which it is used.
type Spec struct {
	Gas    gas.Spec
	Fibre  fibre.Spec
	Pulse  pulse.Pulse // its Energy is the one used most
	Plasma pulse.Plasma

	// Pressure at Temperature spans the range of density.
	Temperature unit.Kelvin
	Pressure    [2]unit.Pascal
	Energy      [2]unit.Joule
}

// version goes into the digest: raise it when the solver's answers change.
const version = 1

// Digest names everything that a node depends on but its density and energy,
// as 64 hexadecimal digits. Specs that differ in their ranges share nodes.
func (s Spec) Digest() string {
	s.Pressure, s.Energy, s.Temperature = [2]unit.Pascal{}, [2]unit.Joule{}, 0
	s.Pulse.Energy = 0
	text, err := json.Marshal(struct {
		Version   int
		Tolerance float64
		Spec      Spec
	}{version, pulse.DefaultTolerance, s})
	if err != nil { // a number that is none: nothing else can be refused
		text = fmt.Appendf(nil, "%+v", s)
	}
	sum := sha256.Sum256(text)
	return hex.EncodeToString(sum[:])
}

// Bench is a checked Spec, ready to compute nodes.
type Bench struct {
	spec  Spec
	fibre *fibre.Fibre
	gas   gas.State // at the middle of the range
	low   float64   // density, mol/m³
	high  float64
	omega float64 // pump, rad/s
}

// New checks a spec. It refuses empty or descending ranges.
func New(s Spec) (*Bench, error) {
	medium, err := gas.New(s.Gas)
	if err != nil {
		return nil, err
	}
	f, err := fibre.New(s.Fibre)
	if err != nil {
		return nil, err
	}
	if !(s.Pressure[0] > 0 && s.Pressure[1] > s.Pressure[0]) {
		return nil, fmt.Errorf("anchoring: pressure from %v to %v, expected an ascending range above zero", s.Pressure[0], s.Pressure[1])
	}
	if !(s.Energy[0] > 0 && s.Energy[1] > s.Energy[0] && s.Pulse.Energy >= s.Energy[0] && s.Pulse.Energy <= s.Energy[1]) {
		return nil, fmt.Errorf("anchoring: energy from %.4g to %.4g uJ with %.4g uJ used most, expected an ascending range that holds it",
			s.Energy[0].Microjoules(), s.Energy[1].Microjoules(), s.Pulse.Energy.Microjoules())
	}
	b := &Bench{spec: s, fibre: f, omega: fibre.Frequency(s.Pulse.Wavelength)}
	iso, err := medium.Isotherm(s.Temperature)
	if err != nil {
		return nil, err
	}
	ends := [2]float64{}
	for i, p := range s.Pressure {
		state, err := iso.State(p, 0)
		if err != nil {
			return nil, fmt.Errorf("anchoring: %s at %v and %v: %w", medium.Name(), p, s.Temperature, err)
		}
		ends[i] = float64(state.Density)
		b.gas = state
	}
	b.low, b.high = ends[0], ends[1]
	return b, nil
}

// Spec returns what the bench was made from.
func (b *Bench) Spec() Spec { return b.spec }

// Guide returns the fibre filled with the bench's gas at a density in mol/m³.
func (b *Bench) Guide(density float64) fibre.Guide {
	return fibre.Guide{Fibre: b.fibre, Gas: b.gas.WithDensity(unit.MolePerCubicMetre(density))}
}
