package gas

import (
	"fmt"
	"math"
	"strings"

	"barline/model/taylor"
	"barline/model/unit"
)

// form is how a source writes its dispersion formula, with ν = 1/λ in µm⁻¹.
type form uint8

const (
	// refractivity: n−1 = c0 + Σ B/(C − ν²).
	refractivity form = iota
	// sellmeier: n²−1 = Σ Bλ²/(λ² − C).
	sellmeier
	// polarisability: α = c0 + B w² + C w⁴/(1 − tail·w²) in atomic units, with
	// w the photon energy in hartree; Lorentz–Lorenz with the number density.
	polarisability
)

// pole is one term of a formula. Its two numbers are B and C as published.
type pole struct{ b, c float64 }

// Span is a range of vacuum wavelengths.
type Span struct{ From, To unit.Metre }

// Holds reports whether λ lies within the span.
func (s Span) Holds(lambda unit.Metre) bool { return lambda >= s.From && lambda <= s.To }

func nm(from, to float64) Span { return Span{unit.Metre(from * 1e-9), unit.Metre(to * 1e-9)} }

// indexSource is one published dispersion formula of one gas.
type indexSource struct {
	name     string
	of       speciesID
	form     form
	constant float64
	poles    []pole
	tail     float64 // polarisability only: ratio of the geometric tail
	t, p     float64 // reference state, K and Pa; unused for polarisability
	// published is the range that the source states, checked the range in
	// which its dispersion was found within 5 % of the best source known.
	published, checked Span
	citation           string
	caution            string
}

const (
	polarisedMole      = 4 * math.Pi / 3 * 6.02214076e23 * 1.481847e-31 // 4π/3·N_A·a₀³, m³/mol
	hartreeMicrometre  = 0.0455633525                                   // photon energy in hartree times λ in µm
	longestWavelength  = 6e-6                                           // m
	shortestWavelength = 100e-9
	// No answer closer to a resonance than this factor in wavelength.
	resonanceClearance = 1.08
)

// floor returns the shortest wavelength at which the formula is used at all:
// clear of its longest ultraviolet resonance.
func (s *indexSource) floor() unit.Metre {
	longest := shortestWavelength
	for _, p := range s.poles {
		var lambda float64
		switch {
		case s.form == refractivity && p.c > 0:
			lambda = 1e-6 / math.Sqrt(p.c)
		case s.form == sellmeier && p.c > 0:
			lambda = 1e-6 * math.Sqrt(p.c)
		case s.form == polarisability:
			lambda = 1e-6 * hartreeMicrometre * math.Sqrt(s.tail) // 1 = tail·w²
		}
		longest = math.Max(longest, resonanceClearance*lambda)
	}
	return unit.Metre(longest)
}

// molar returns the molar refractivity (n²−1)/(n²+2)/ρ in m³/mol, given the
// molar density rho of the reference state in mol/m³. q is 1/λ² in µm⁻².
func (s *indexSource) molar(q, rho float64) taylor.Number {
	nu := taylor.Square(q)
	sum := taylor.Constant(s.constant)
	switch s.form {
	case refractivity:
		for _, p := range s.poles {
			sum = sum.Add(nu.Times(-1).Plus(p.c).Inverse().Times(p.b))
		}
		sum = sum.Mul(sum.Plus(2)) // n²−1
	case sellmeier:
		for _, p := range s.poles {
			sum = sum.Add(nu.Times(-p.c).Plus(1).Inverse().Times(p.b))
		}
	case polarisability:
		w := nu.Times(hartreeMicrometre * hartreeMicrometre)
		p := s.poles[0]
		tail := w.Mul(w).Times(p.c).Over(w.Times(-s.tail).Plus(1))
		return sum.Add(w.Times(p.b)).Add(tail).Times(polarisedMole)
	}
	return sum.Over(sum.Plus(3)).Times(1 / rho)
}

// findIndex returns the source of that name for a gas; empty means the default.
func findIndex(of *Species, name string) (*indexSource, error) {
	var have []string
	for i := range indexTable {
		s := &indexTable[i]
		if s.of != of.id {
			continue
		}
		if name == s.name || name == "" { // the default stands first
			return s, nil
		}
		have = append(have, s.name)
	}
	return nil, fmt.Errorf("index %q is %w for %s: expected one of %s", name, ErrUnknown, of.Name, strings.Join(have, ", "))
}

// IndexNames returns the index sources of a gas, the default first.
func IndexNames(of *Species) []string {
	var names []string
	for i := range indexTable {
		if indexTable[i].of == of.id {
			names = append(names, indexTable[i].name)
		}
	}
	return names
}
