package drift

import (
	"fmt"
	"math"
)

// Individuals returns mean and limits of single values from their moving
// range, three standard deviations wide (NIST/SEMATECH e-Handbook, section
// 6.3.2.2). The values must be independent of each other, and at least two.
func Individuals(values []float64) (mean, lower, upper float64, err error) {
	if len(values) < 2 {
		return 0, 0, 0, fmt.Errorf("%d values, expected at least 2: %w", len(values), ErrShort)
	}
	// The range of two normal values is 1.128 σ on average.
	const rangeOfTwo = 1.128
	var ranges float64
	for i, v := range values {
		mean += v / float64(len(values))
		if i > 0 {
			ranges += math.Abs(v - values[i-1])
		}
	}
	reach := 3 * ranges / float64(len(values)-1) / rangeOfTwo
	return mean, mean - reach, mean + reach, nil
}
