package flow

import (
	"fmt"
	"math"
	"time"

	"barline/model/unit"
)

// Cladding is a set of equal holes round the core.
type Cladding struct {
	Radius unit.Metre // of one hole: that of a circle of the same area
	Holes  int
}

// Fibre is the core and, where configured, the hollow cladding, between the
// same cells. Smaller holes fill later: until they have, the pressure differs
// across the walls between, and with it the loss. Not safe for concurrent use.
type Fibre struct {
	Core     *Core
	Cladding []*Core // one hole of each set, in the order given

	holes    []int   // of each channel, 1 for the core
	channels []*Core // the core, then the cladding
	before   []State // scratch
}

// NewFibre returns the fibre evacuated. Sets of holes take length, gas,
// temperature and sealing from the core.
func NewFibre(core Spec, cladding ...Cladding) (*Fibre, error) {
	c, err := NewCore(core)
	if err != nil {
		return nil, err
	}
	f := &Fibre{Core: c, holes: []int{1}, channels: []*Core{c}}
	for i, set := range cladding {
		if set.Holes < 1 {
			return nil, fmt.Errorf("cladding %d with %d holes: %w: wanted at least one", i+1, set.Holes, ErrRange)
		}
		s := core
		s.Radius = set.Radius
		hole, err := NewCore(s)
		if err != nil {
			return nil, fmt.Errorf("cladding %d: %w", i+1, err)
		}
		f.channels, f.holes = append(f.channels, hole), append(f.holes, set.Holes)
	}
	f.Cladding = f.channels[1:]
	f.before = make([]State, len(f.channels))
	return f, nil
}

// each calls do for every channel; where one refuses, all are as before.
func (f *Fibre) each(do func(*Core) error) error {
	for i, c := range f.channels {
		f.before[i] = c.state
		if err := do(c); err != nil {
			for k, done := range f.channels[:i] {
				// What a core has been it can be again.
				if back := done.Restore(f.before[k]); back != nil {
					return fmt.Errorf("channel %d: %w, after %w", k, back, err)
				}
			}
			if i > 0 {
				err = fmt.Errorf("cladding %d: %w", i, err)
			}
			return err
		}
	}
	return nil
}

// Fill sets every channel to its steady state, see Core.Fill.
func (f *Fibre) Fill(pA, pB unit.Pascal, t unit.Kelvin) error {
	return f.each(func(c *Core) error { return c.Fill(pA, pB, t) })
}

// Advance carries every channel on, see Core.Advance.
func (f *Fibre) Advance(dt time.Duration, pA, pB unit.Pascal, t unit.Kelvin) error {
	return f.each(func(c *Core) error { return c.Advance(dt, pA, pB, t) })
}

// Differential returns by how much the pressure in the core exceeds that in
// the cladding at z, for the set where it differs most; zero without cladding.
func (f *Fibre) Differential(z unit.Metre) (worst unit.Pascal) {
	p := f.Core.At(z)
	for _, c := range f.Cladding {
		if d := p - c.At(z); math.Abs(float64(d)) > math.Abs(float64(worst)) {
			worst = d
		}
	}
	return worst
}

// TimeToSettle returns how long it takes until every channel is within
// tolerance of its steady state, see Core.TimeToSettle.
func (f *Fibre) TimeToSettle(tolerance unit.Pascal) (longest time.Duration, ok bool) {
	for _, c := range f.channels {
		wait, ok := c.TimeToSettle(tolerance)
		if !ok {
			return 0, false
		}
		longest = max(longest, wait)
	}
	return longest, true
}

// Amount returns the moles in core and cladding.
func (f *Fibre) Amount() float64 {
	sum := 0.0
	for i, c := range f.channels {
		sum += float64(f.holes[i]) * c.Amount()
	}
	return sum
}

// Entered returns the moles that came in through each end of core and cladding
// since they were made or filled.
func (f *Fibre) Entered() (a, b float64) {
	for i, c := range f.channels {
		a += float64(f.holes[i]) * c.state.EnteredA
		b += float64(f.holes[i]) * c.state.EnteredB
	}
	return a, b
}
