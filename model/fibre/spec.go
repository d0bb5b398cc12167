package fibre

import (
	"fmt"
	"math"
	"strings"

	"barline/model/unit"
)

// Kind is the form of the cladding.
type Kind uint8

const (
	// Capillary is a bore in glass much thicker than a wavelength.
	Capillary Kind = iota
	// Kagome is a lattice of thin webs round the core.
	Kagome
	// Antiresonant is a single ring of thin-walled tubes round the core.
	Antiresonant
)

var kindText = [...]string{"capillary", "kagome", "antiresonant"}

// String returns the kind as commands and bench files spell it.
func (k Kind) String() string { return kindText[k] }

// ParseKind reads the name of a kind.
func ParseKind(text string) (Kind, error) {
	for i, name := range kindText {
		if name == text {
			return Kind(i), nil
		}
	}
	return 0, fmt.Errorf("fibre kind %q is not known: expected one of %s", text, strings.Join(kindText[:], ", "))
}

// Spec describes a fibre.
type Spec struct {
	Kind         Kind
	CoreDiameter unit.Metre // kagome: of the circle of equal area
	Wall         unit.Metre // thickness of the glass round the core; 0 for a capillary
	Length       unit.Metre
	Loss         Loss
	Mode         Mode // zero means HE11

	// KagomeScale is s in a(λ) = a₀/(1 + s λ²/(a₀t)); 0 means 0.08.
	KagomeScale float64
	// Margin is the half-width of the gap round each wall resonance, as a
	// share of its wavelength; 0 means 3 %.
	Margin unit.Fraction
}

const (
	defaultKagomeScale = 0.08 // from memory, of the order of Opt. Lett. 39, 821 (2014)
	defaultMargin      = 0.03
)

// Fibre is a checked Spec with what follows from it. It never changes.
type Fibre struct {
	spec   Spec
	radius float64 // a or a₀, m
	u      float64
	area   float64 // effective, m²
	peak   float64 // peak intensity over P/A_eff
}

// New checks a spec.
func New(s Spec) (*Fibre, error) {
	for _, size := range []struct {
		name  string
		value unit.Metre
		most  unit.Metre
	}{{"core diameter", s.CoreDiameter, 1e-2}, {"length", s.Length, 1000}} {
		if !(size.value > 0 && size.value <= size.most) {
			return nil, fmt.Errorf("fibre: %s is %v, expected above zero and up to %v", size.name, size.value, size.most)
		}
	}
	if s.Kind > Antiresonant {
		return nil, fmt.Errorf("fibre: kind %d is not known", s.Kind)
	}
	switch {
	case s.Kind == Capillary && s.Wall != 0:
		return nil, fmt.Errorf("fibre: wall is %v, but a capillary has no thin wall: leave it out, or name another kind", s.Wall)
	case s.Kind != Capillary && !(s.Wall > 0 && s.Wall < s.CoreDiameter):
		return nil, fmt.Errorf("fibre: wall is %v, expected above zero and below the core diameter of %v", s.Wall, s.CoreDiameter)
	}
	if s.KagomeScale == 0 {
		s.KagomeScale = defaultKagomeScale
	}
	if s.Margin == 0 {
		s.Margin = defaultMargin
	}
	if !(s.KagomeScale > 0 && s.KagomeScale < 1) {
		return nil, fmt.Errorf("fibre: kagome scale is %g, expected between 0 and 1", s.KagomeScale)
	}
	if !(s.Margin > 0 && s.Margin < 0.3) {
		return nil, fmt.Errorf("fibre: margin round resonances is %g %%, expected between 0 and 30 %%", 100*float64(s.Margin))
	}
	if err := s.Loss.check(); err != nil {
		return nil, err
	}
	if s.Mode == (Mode{}) {
		s.Mode = HE11
	}
	f := &Fibre{spec: s, radius: float64(s.CoreDiameter) / 2}
	var err error
	if f.u, err = s.Mode.zero(); err != nil {
		return nil, err
	}
	share, peak := s.Mode.area(f.u)
	f.area, f.peak = share*f.radius*f.radius, peak
	return f, nil
}

// WithSizes returns the same fibre with another core radius and wall, in
// metres: the derivative of a prediction with respect to either needs it. It
// checks nothing and allocates nothing.
func (f *Fibre) WithSizes(radius, wall float64) Fibre {
	g := *f
	g.area *= radius * radius / (f.radius * f.radius)
	g.radius = radius
	g.spec.CoreDiameter, g.spec.Wall = unit.Metre(2*radius), unit.Metre(wall)
	return g
}

// Spec returns the fibre's description with its defaults filled in.
func (f *Fibre) Spec() Spec { return f.spec }

// Radius returns the core radius in metres.
func (f *Fibre) Radius() float64 { return f.radius }

// EffectiveArea returns (∫I dA)²/∫I² dA in m², 1.49717 a² for HE11.
func (f *Fibre) EffectiveArea() float64 { return f.area }

// PeakFactor returns the peak intensity of the mode over P/A_eff: 1.768 for HE11.
func (f *Fibre) PeakFactor() float64 { return f.peak }

// plainReach and formReach are the wavelengths, in √(a₀t), up to which the
// plain capillary form of a kagome fibre is within 15 % and up to which the
// corrected one holds: Opt. Lett. 39, 821 (2014).
const (
	plainReach = 0.56
	formReach  = 0.98
)

// KagomeReach returns the wavelength beyond which the plain capillary form is
// off by more than 15 %, and the one up to which the form used here holds.
// Both are infinite for the other kinds.
func (f *Fibre) KagomeReach() (plain, form unit.Metre) {
	if f.spec.Kind != Kagome {
		return unit.Metre(math.Inf(1)), unit.Metre(math.Inf(1))
	}
	scale := math.Sqrt(f.radius * float64(f.spec.Wall))
	return unit.Metre(plainReach * scale), unit.Metre(formReach * scale)
}

// Profile returns order and argument of the mode's radial shape J_order(u r/a).
func (f *Fibre) Profile() (order int, u float64) { return f.spec.Mode.order(), f.u }
