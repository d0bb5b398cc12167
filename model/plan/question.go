package plan

import (
	"errors"
	"fmt"
	"math"

	"barline/model/emission"
	"barline/model/gas"
	"barline/model/unit"
)

// Question is what a plan is asked.
type Question struct {
	// Setup is the bench. Its answer is Linear or Estimate. Its own gas keeps
	// the sources that the setup names; any other takes its defaults.
	Setup emission.Setup
	Gases []string // compositions to try; empty: the pure gases of Gases
	// Target is the band to be reached by turning the pressure alone, one
	// wavelength where both ends are equal.
	Target gas.Span

	Temperature unit.Kelvin   // of the fibre
	Air         unit.Fraction // in the gas

	Pressure Range[unit.Pascal] // that may be used
	Energy   Range[unit.Joule]

	// Supply is the pressure behind the regulator, above which nothing can be
	// filled; 0: not judged.
	Supply unit.Pascal
	// Site is what moves the gas; nil: filling and purging are not estimated.
	Site *Site
}

// Range is a range in steps of equal ratio.
type Range[T ~float64] struct {
	From, To T
	Steps    int // values, both ends included
}

// at returns value i.
func (r Range[T]) at(i int) T {
	if r.Steps < 2 {
		return r.To
	}
	return T(float64(r.From) * math.Pow(float64(r.To/r.From), float64(i)/float64(r.Steps-1)))
}

// values returns all values, rising.
func (r Range[T]) values() []T {
	list := make([]T, r.Steps)
	for i := range list {
		list[i] = r.at(i)
	}
	return list
}

// most bounds a range: a map of more cells says no more.
const most = 1000

func (r Range[T]) check(name string) error {
	switch {
	case !(r.From > 0) || !(r.To >= r.From) || math.IsInf(float64(r.To), 0):
		return fmt.Errorf("plan: %s from %g to %g, expected above zero and rising", name, float64(r.From), float64(r.To))
	case r.Steps < 1 || r.Steps > most:
		return fmt.Errorf("plan: %d steps of %s, expected 1 to %d", r.Steps, name, most)
	}
	return nil
}

// Gases returns the pure gases that are tried where none is named. Air is a
// contaminant and stands only where it is asked for.
func Gases() []string {
	var list []string
	for _, name := range gas.SpeciesNames() {
		if name != "air" {
			list = append(list, name)
		}
	}
	return list
}

// Bounds of a target.
const (
	shortest = 100 * unit.Nanometre
	longest  = 5 * unit.Micrometre
)

func (q *Question) check() error {
	t := q.Target
	switch {
	case !(t.From >= shortest && t.To >= t.From && t.To <= longest):
		return fmt.Errorf("plan: target is %v to %v, expected 100 nm to 5 um, the shorter first", t.From, t.To)
	case q.Setup.Answer == emission.Anchored:
		return errors.New("plan: starts from the linear answer or the estimate; Again takes an anchored one")
	case !(t.To < q.Setup.Pulse.Wavelength):
		return fmt.Errorf("plan: target is %v, expected below the pump at %v", t.To, q.Setup.Pulse.Wavelength)
	}
	return errors.Join(q.Pressure.check("pressure"), q.Energy.check("energy"))
}

// setupFor returns the setup with another gas in it.
func (q *Question) setupFor(composition string) emission.Setup {
	s := q.Setup
	if composition != s.Gas.Composition {
		s.Gas = gas.Spec{Composition: composition, Density: s.Gas.Density}
	}
	return s
}

// targets returns the wavelengths that stand for the band, rising.
func (q *Question) targets() []unit.Metre {
	if q.Target.From == q.Target.To {
		return []unit.Metre{q.Target.From}
	}
	const n = 5
	list := make([]unit.Metre, n)
	for i := range list {
		list[i] = q.Target.From + (q.Target.To-q.Target.From)*unit.Metre(i)/(n-1)
	}
	return list
}
