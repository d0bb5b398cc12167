package drift

import (
	"fmt"
	"math"
)

// The Allan deviations take values that are evenly spaced (frequencies, in the
// words of the source; here emission or pressure) and return how much means
// over m of them differ from one to the next, in the same unit. Source: Riley,
// Handbook of Frequency Stability Analysis, NIST SP 1065 (2008), sections
// 5.2.1, 5.2.4 and 5.2.6. Given already summed values they would be too large:
// the deviation over one value is near, but is not, the standard deviation.

// Allan returns the deviation from groups of m that do not overlap.
func Allan(values []float64, m int) (float64, error) {
	groups := 0
	if m > 0 {
		groups = len(values) / m
	}
	if groups < 2 {
		return 0, tooFew(values, m, 2*m)
	}
	sum, before := 0.0, 0.0
	for g := range groups {
		mean := 0.0
		for _, v := range values[g*m : (g+1)*m] {
			mean += v
		}
		mean /= float64(m)
		if g > 0 {
			sum += (mean - before) * (mean - before)
		}
		before = mean
	}
	return math.Sqrt(sum / float64(2*(groups-1))), nil
}

// AllanOverlapping returns the deviation from all groups of m, which uses
// every value and scatters less.
func AllanOverlapping(values []float64, m int) (float64, error) {
	n := len(values) - 2*m + 1
	if m < 1 || n < 1 {
		return 0, tooFew(values, m, 2*m)
	}
	total := summed(values)
	sum := 0.0
	for i := range n {
		d := total[i+2*m] - 2*total[i+m] + total[i]
		sum += d * d
	}
	return math.Sqrt(sum/float64(2*n)) / float64(m), nil
}

// AllanModified returns the modified deviation, which tells fast noise of the
// reading from fast noise of the light.
func AllanModified(values []float64, m int) (float64, error) {
	n := len(values) - 3*m + 2
	if m < 1 || n < 1 {
		return 0, tooFew(values, m, 3*m-1)
	}
	total := summed(values)
	var window, sum float64
	for i := range m {
		window += total[i+2*m] - 2*total[i+m] + total[i]
	}
	for j := range n {
		if j > 0 {
			window += total[j+3*m-1] - 3*total[j+2*m-1] + 3*total[j+m-1] - total[j-1]
		}
		sum += window * window
	}
	return math.Sqrt(sum/float64(2*n)) / float64(m*m), nil
}

// summed returns the running sums of the values about their mean, one longer
// than they are; the mean cancels, and without it fewer digits are lost.
func summed(values []float64) []float64 {
	mean := 0.0
	for _, v := range values {
		mean += v / float64(len(values))
	}
	total := make([]float64, len(values)+1)
	for i, v := range values {
		total[i+1] = total[i] + v - mean
	}
	return total
}

func tooFew(values []float64, m, need int) error {
	if m < 1 {
		return fmt.Errorf("means over %d values, expected at least 1: %w", m, ErrShort)
	}
	return fmt.Errorf("%d values for means over %d, expected at least %d: %w", len(values), m, need, ErrShort)
}
