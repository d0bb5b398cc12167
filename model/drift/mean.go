package drift

import (
	"fmt"
	"math"
	"slices"
	"time"
)

const fewestForMean = 6

// MeanOf is what a stretch says of a quantity where no chart is to be drawn:
// its mean with the uncertainty that the correlation of the values leaves. It
// wants six values, and takes a stretch that runs away as it is: its scatter
// then holds the slope.
func MeanOf(samples []Sample) (Quiet, error) {
	n := len(samples)
	if n < fewestForMean {
		return Quiet{}, fmt.Errorf("%d values, expected at least %d: %w", n, fewestForMean, ErrShort)
	}
	q := Quiet{From: samples[0].At, To: samples[n-1].At, Values: n}
	gaps := make([]time.Duration, 0, n-1)
	for i, s := range samples {
		q.Mean += s.Value / float64(n)
		if i > 0 {
			gaps = append(gaps, s.At-samples[i-1].At)
		}
	}
	slices.Sort(gaps)
	if q.Spacing = gaps[len(gaps)/2]; q.Spacing <= 0 {
		return Quiet{}, fmt.Errorf("values do not ascend in time: %w", ErrNotQuiet)
	}
	for _, s := range samples {
		q.Sigma += (s.Value - q.Mean) * (s.Value - q.Mean) / float64(n-1)
	}
	q.Sigma = math.Sqrt(q.Sigma)
	tau := 0.5
	if q.Sigma > 1e-13*math.Abs(q.Mean) {
		tau = correlation(samples, q)
	}
	q.Correlation = time.Duration(tau * float64(q.Spacing))
	q.MeanSigma = q.Sigma * math.Sqrt(math.Min(2*tau/float64(n), 1))
	return q, nil
}
