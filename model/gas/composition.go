package gas

import (
	"fmt"
	"math"
	"strings"

	"barline/model/unit"
)

// Component is one gas of a mixture and its mole fraction.
type Component struct {
	Species  *Species
	Fraction unit.Fraction
}

// mostComponents bounds a mixture; air as a contaminant comes on top.
const mostComponents = 3

// ParseComposition reads "argon", or a mixture such as "argon 90 % + neon 10 %"
// whose mole fractions add up to 100 %.
func ParseComposition(text string) ([]Component, error) {
	parts := strings.Split(text, "+")
	if len(parts) > mostComponents {
		return nil, fmt.Errorf("gas %q has %d parts, expected at most %d", text, len(parts), mostComponents)
	}
	var list []Component
	sum := 0.0
	for _, part := range parts {
		name, share, mixed := strings.Cut(strings.TrimSpace(part), " ")
		s, err := Named(name)
		if err != nil {
			return nil, err
		}
		c := Component{s, 1}
		if mixed {
			if c.Fraction, err = unit.ParseFraction(share); err != nil {
				return nil, fmt.Errorf("gas %q: %w", text, err)
			}
		} else if len(parts) > 1 {
			return nil, fmt.Errorf("gas %q: the share of %s is missing, expected such as \"argon 90 %% + neon 10 %%\"", text, s.Name)
		}
		for _, other := range list {
			if other.Species == s {
				return nil, fmt.Errorf("gas %q names %s twice", text, s.Name)
			}
		}
		list = append(list, c)
		sum += float64(c.Fraction)
	}
	if err := checkFractions(list); err != nil {
		return nil, fmt.Errorf("gas %q: %w", text, err)
	}
	return list, nil
}

func checkFractions(list []Component) error {
	sum := 0.0
	for _, c := range list {
		if !(c.Fraction > 0 && c.Fraction <= 1) {
			return fmt.Errorf("the share of %s is %.6g %%, expected above 0 and up to 100 %%", c.Species.Name, 100*float64(c.Fraction))
		}
		sum += float64(c.Fraction)
	}
	if !(math.Abs(sum-1) <= 1e-6) {
		return fmt.Errorf("the shares add up to %.6g %%, expected 100 %%", 100*sum)
	}
	return nil
}
