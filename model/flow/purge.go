package flow

import (
	"fmt"
	"math"

	"barline/model/unit"
)

// Purge is a pressure or vacuum swing that takes air out of a volume.
type Purge struct {
	Start    unit.Fraction // air at the beginning, as a mole fraction
	Cylinder unit.Fraction // air in the gas supplied
	Low      unit.Pascal   // each cycle falls to Low and fills to High
	High     unit.Pascal
	// PerCycle is the air that leaks in and leaves the walls during one
	// cycle, as a fraction of the gas at High.
	PerCycle unit.Fraction
}

func (p Purge) check() error {
	if !(p.Low >= 0 && p.High > p.Low) || math.IsInf(float64(p.High), 0) {
		return fmt.Errorf("purge between %v and %v: %w: wanted 0 <= low < high", p.Low, p.High, ErrRange)
	}
	for _, x := range [...]unit.Fraction{p.Start, p.Cylinder, p.PerCycle} {
		if !(x >= 0 && x <= 1) {
			return fmt.Errorf("share of air %v: %w: wanted 0 to 1", float64(x), ErrRange)
		}
	}
	return nil
}

// After returns the air left after n cycles:
//
//	x_n = x_∞ + (x₀ − x_∞)·(p_low/p_high)ⁿ
//
// with x_∞ = Floor. Each cycle mixes well and every part of the volume reaches
// both pressures: hold for the core, see Spec.Relaxation. Source: pressure and
// vacuum swing, CEN/TR 15281:2022, annex A.
func (p Purge) After(n int) unit.Fraction {
	floor := p.Floor()
	return floor + (p.Start-floor)*unit.Fraction(math.Pow(float64(p.Low/p.High), float64(n)))
}

// Floor returns the air that no number of cycles goes below: what the cylinder
// brings and what comes in during each cycle, x_in + δ/(1 − p_low/p_high).
func (p Purge) Floor() unit.Fraction {
	return min(1, p.Cylinder+p.PerCycle/unit.Fraction(1-p.Low/p.High))
}

// Cycles returns how many cycles bring the air to want or below, 0 where it is
// there already. Where the floor is above want, the error says so and names
// the floor.
func (p Purge) Cycles(want unit.Fraction) (int, error) {
	if err := p.check(); err != nil {
		return 0, err
	}
	if !(want >= 0) {
		return 0, fmt.Errorf("wanted share of air %v: %w", float64(want), ErrRange)
	}
	if p.Start <= want {
		return 0, nil
	}
	floor := p.Floor()
	if want <= floor {
		return 0, fmt.Errorf("%s of air: %w: cylinder and leaks leave %s however often it is purged",
			shareText(want), ErrRange, shareText(floor))
	}
	if p.Low == 0 {
		return 1, nil
	}
	// A hair less, so that an exact answer is not rounded up a cycle.
	n := math.Log(float64((want-floor)/(p.Start-floor))) / math.Log(float64(p.Low/p.High))
	return max(1, int(math.Ceil(n-1e-9))), nil
}

// shareText writes a share in per cent or parts per million.
func shareText(x unit.Fraction) string {
	if x >= 1e-3 {
		return fmt.Sprintf("%.3g %%", float64(x)*100)
	}
	return fmt.Sprintf("%.3g ppm", float64(x)*1e6)
}
