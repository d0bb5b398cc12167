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

// Spec is a bench.
type Spec struct {
	Gas    gas.Spec
	Fibre  fibre.Spec
	Pulse  pulse.Pulse // its Energy is the one used most
	Plasma pulse.Plasma
}

// version goes into the digest: raise it when the solver's answers change.
const version = 2

// Digest names everything that a node depends on but its density and energy,
// as 64 hexadecimal digits.
func (s Spec) Digest() string {
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
	gas   gas.State // at any density
	omega float64   // pump, rad/s
	rates *pulse.Rates
}

// New checks a spec.
func New(s Spec) (*Bench, error) {
	medium, err := gas.New(s.Gas)
	if err != nil {
		return nil, err
	}
	f, err := fibre.New(s.Fibre)
	if err != nil {
		return nil, err
	}
	if !(s.Pulse.Energy > 0) || !(s.Pulse.Duration > 0) || !(s.Pulse.Wavelength > 0) {
		return nil, fmt.Errorf("anchoring: pulse of %.4g fs and %.4g uJ at %.4g nm, expected all above zero",
			s.Pulse.Duration.Femtoseconds(), s.Pulse.Energy.Microjoules(), s.Pulse.Wavelength.Nanometres())
	}
	const any, ambient = 293.15, unit.Bar // the density is set later
	state, err := medium.At(ambient, any, 0)
	if err != nil {
		return nil, fmt.Errorf("anchoring: %w", err)
	}
	ready, err := pulse.Setup{Fibre: f, Gas: state, Pulse: s.Pulse, Plasma: s.Plasma}.Prepare()
	if err != nil {
		return nil, fmt.Errorf("anchoring: %w", err)
	}
	return &Bench{spec: s, fibre: f, gas: state, omega: fibre.Frequency(s.Pulse.Wavelength), rates: ready.Rates}, nil
}

// Spec returns what the bench was made from.
func (b *Bench) Spec() Spec { return b.spec }

// Guide returns the fibre filled with the bench's gas at a density in mol/m³.
func (b *Bench) Guide(density float64) fibre.Guide {
	return fibre.Guide{Fibre: b.fibre, Gas: b.gas.WithDensity(unit.MolePerCubicMetre(density))}
}
