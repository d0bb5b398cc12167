package gas

import (
	"fmt"
	"strings"

	"barline/model/unit"
)

// Spec names what fills the fibre and the sources that describe it. Empty
// names mean the defaults.
type Spec struct {
	Composition string // "argon", "argon 90 % + neon 10 %"
	Density     string // reference | virial | ideal
	Index       string // of the main gas; the others take their defaults
	N2          string // of the main gas: a source, or a value with its unit
}

// Medium is a gas or mixture with its sources chosen. It never changes.
type Medium struct {
	parts   [mostComponents + 1]part // air as a contaminant stands last
	count   int                      // of parts, air included
	density Density
	main    int // index of the part with the largest share
}

// part is one gas of a medium with its sources.
type part struct {
	species  *Species
	fraction float64 // without air
	index    *indexSource
	indexRho float64 // mol/m³ at the index's reference state
	kerr     kerrSource
	kerrRho  float64 // mol/m³ at the nonlinear index's reference state
	floor    unit.Metre
}

// New returns the medium of a spec.
func New(s Spec) (*Medium, error) {
	list, err := ParseComposition(s.Composition)
	if err != nil {
		return nil, err
	}
	density, err := ParseDensity(s.Density)
	if err != nil {
		return nil, err
	}
	m := &Medium{density: density}
	for i, c := range list {
		if c.Fraction > list[m.main].Fraction {
			m.main = i
		}
	}
	for i, c := range list {
		index, kerr := "", ""
		if i == m.main {
			index, kerr = s.Index, s.N2
		}
		p, err := newPart(c.Species, float64(c.Fraction), index, kerr, density)
		if err != nil {
			return nil, err
		}
		m.parts[i] = p
	}
	m.count = len(list)
	if !m.has(air) {
		p, err := newPart(&speciesTable[air], 0, "", "", density)
		if err != nil {
			return nil, err
		}
		m.parts[m.count] = p
		m.count++
	}
	return m, nil
}

func newPart(s *Species, fraction float64, index, kerr string, density Density) (p part, err error) {
	p.species, p.fraction = s, fraction
	if p.index, err = findIndex(s, index); err != nil {
		return part{}, err
	}
	if p.kerr, err = findKerr(s, kerr); err != nil {
		return part{}, err
	}
	if p.index.form != polarisability {
		if p.indexRho, err = referenceDensity(s, density, p.index.t, p.index.p); err != nil {
			return part{}, fmt.Errorf("index %s: %w", p.index.name, err)
		}
	}
	if p.kerrRho, err = referenceDensity(s, density, p.kerr.t, p.kerr.p); err != nil {
		return part{}, fmt.Errorf("nonlinear index %s: %w", p.kerr.name, err)
	}
	p.floor = p.index.floor()
	return p, nil
}

// referenceDensity returns the density at the reference state of a source. It
// is the real one; with Ideal it is ideal too, so that what remains is the
// plain ratio (p/p₀)(T₀/T) that the ideal gas stands for.
func referenceDensity(s *Species, d Density, t, p float64) (float64, error) {
	if d != Ideal {
		d = Reference
	}
	var u pure
	if err := u.set(s, d, t); err != nil {
		return 0, err
	}
	rho, _, err := u.molar(p)
	return rho, err
}

func (m *Medium) has(id speciesID) bool {
	for _, p := range m.parts[:m.count] {
		if p.species.id == id {
			return true
		}
	}
	return false
}

// Main returns the gas with the largest share.
func (m *Medium) Main() *Species { return m.parts[m.main].species }

// Name returns the composition as text.
func (m *Medium) Name() string {
	var b strings.Builder
	for _, p := range m.parts[:m.count] {
		if p.fraction == 0 {
			continue
		}
		if b.Len() > 0 {
			b.WriteString(" + ")
		}
		b.WriteString(p.species.Name)
		if p.fraction < 1 {
			fmt.Fprintf(&b, " %.6g %%", 100*p.fraction)
		}
	}
	return b.String()
}

// Source says where one kind of number comes from.
type Source struct {
	Name     string // as it is chosen, such as "peck-fisher-1964"
	Citation string
	Caution  string // what to know before trusting it; may be empty
}

// DensitySource returns the source of densities of the main gas.
func (m *Medium) DensitySource() Source {
	e := m.Main().equation
	s := Source{Name: m.density.String(), Citation: "equation of state " + e.source}
	switch m.density {
	case Virial:
		s.Citation = "B and C of the equation of state " + e.source
	case Ideal:
		s.Citation = "p = density * R * T, R exact (SI 2019)"
		s.Caution = "not the density of a real gas"
	}
	return s
}

// IndexSource returns the source of the main gas's index.
func (m *Medium) IndexSource() Source {
	i := m.parts[m.main].index
	return Source{i.name, i.citation, i.caution}
}

// KerrSource returns the source of the main gas's nonlinear index.
func (m *Medium) KerrSource() Source {
	k := m.parts[m.main].kerr
	return Source{Name: k.name, Citation: k.citation}
}

// KerrSpread returns the relative standard uncertainty of the main gas's
// nonlinear index: half the spread between independent sources.
func (m *Medium) KerrSpread() float64 { return kerrSpread[m.Main().id] }

// Published and Checked return the wavelength ranges of the index source: the
// one it states, and the one in which its dispersion was found within 5 % of
// the best source known. Checked is empty where it nowhere was.
func (m *Medium) Published() Span { return m.parts[m.main].index.published }

// Checked is described with Published.
func (m *Medium) Checked() Span { return m.parts[m.main].index.checked }
