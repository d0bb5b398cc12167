package drift

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"time"
)

// Errors of learning.
var (
	ErrShort    = errors.New("too few values")
	ErrNotQuiet = errors.New("the stretch is not quiet")
)

// Sample is one usable value and when it was taken.
type Sample struct {
	At    time.Duration // bench Mono
	Value float64
}

// Quiet is what a quiet stretch says of a quantity. It is what charts judge
// against, and stays frozen until somebody learns anew.
type Quiet struct {
	From, To    time.Duration
	Values      int
	Mean, Sigma float64       // of single values
	Spacing     time.Duration // of the values, median
	// Correlation is the time over which values know of each other: the
	// integral of their autocorrelation, half a spacing where there is none.
	Correlation time.Duration
	// Group is how long a mean must be taken for means to be independent,
	// and GroupSigma how much such means scatter.
	Group      time.Duration
	GroupSigma float64
	// MeanSigma is the uncertainty of Mean itself.
	MeanSigma float64
}

const (
	fewestValues = 60
	fewestGroups = 12
	// groupOf is the length of a group in correlation times: adjacent means
	// of an exponentially correlated quantity then correlate by
	// (1−e⁻ᵐ)²/(2(m−1+e⁻ᵐ)) = 0.10 for m = 6, which the long-run scatter of
	// GroupSigma makes up for.
	groupOf = 6
)

// Learn finds scatter and correlation time of a stretch in which nothing is
// known to have happened. Samples ascend in time; gaps are allowed. It wants
// at least 60 values and 12 groups, and no trend.
func Learn(samples []Sample) (Quiet, error) {
	q, err := measure(samples)
	if err != nil {
		return Quiet{}, err
	}
	tau := float64(q.Correlation) / float64(q.Spacing)
	q.Group = max(time.Duration(groupOf*tau*float64(q.Spacing)), q.Spacing).Round(q.Spacing)
	span := q.To - q.From + q.Spacing
	if span < fewestGroups*q.Group {
		return Quiet{}, fmt.Errorf("values are correlated over %v and the stretch lasts %v, expected at least %v: %w",
			q.Correlation.Round(time.Second), span.Round(time.Second), (fewestGroups * q.Group).Round(time.Second), ErrNotQuiet)
	}
	q.GroupSigma = q.Sigma * math.Sqrt(2*tau*float64(q.Spacing)/float64(q.Group))
	q.MeanSigma = q.Sigma * math.Sqrt(2*tau/float64(q.Values))
	if t := trend(samples, q); math.Abs(t) > 4 {
		return Quiet{}, fmt.Errorf("it runs away, by %.1f of its own standard deviations: %w", math.Abs(t), ErrNotQuiet)
	}
	return q, nil
}

// measure finds mean, scatter, spacing and correlation time of a stretch.
func measure(samples []Sample) (Quiet, error) {
	n := len(samples)
	if n < fewestValues {
		return Quiet{}, fmt.Errorf("%d values, expected at least %d: %w", n, fewestValues, ErrShort)
	}
	q := Quiet{From: samples[0].At, To: samples[n-1].At, Values: n}
	gaps := make([]time.Duration, 0, n-1)
	for i, s := range samples {
		if math.IsNaN(s.Value) || math.IsInf(s.Value, 0) {
			return Quiet{}, fmt.Errorf("value %d is not a number: %w", i+1, ErrNotQuiet)
		}
		if i > 0 {
			gap := s.At - samples[i-1].At
			if gap <= 0 {
				return Quiet{}, fmt.Errorf("value %d is not later than the one before: %w", i+1, ErrNotQuiet)
			}
			gaps = append(gaps, gap)
		}
		q.Mean += s.Value / float64(n)
	}
	slices.Sort(gaps)
	q.Spacing = gaps[len(gaps)/2]
	for _, s := range samples {
		q.Sigma += (s.Value - q.Mean) * (s.Value - q.Mean) / float64(n-1)
	}
	q.Sigma = math.Sqrt(q.Sigma)
	if q.Sigma <= 1e-13*math.Abs(q.Mean) {
		return Quiet{}, fmt.Errorf("all values are the same: the reading is frozen or too coarse: %w", ErrNotQuiet)
	}
	q.Correlation = time.Duration(correlation(samples, q) * float64(q.Spacing))
	return q, nil
}

// roughGroup is how long means of a rough stretch are taken.
const roughGroup = 2 * time.Minute

// LearnRoughly learns from a stretch whose values know of each other for too
// long to be learnt from properly, as those of a bench that always wanders a
// little do. Means of two minutes are then taken for independent, and to scatter
// as much as keeps their sums honest: what a chart makes of them finds what is
// large, and is wrong more often than it was designed for. It
// wants at least 60 values, and refuses a stretch that is a line rather than
// scatter, unless it changes by less than tolerated from end to end.
func LearnRoughly(samples []Sample, tolerated float64) (Quiet, error) {
	q, err := measure(samples)
	if err != nil {
		return Quiet{}, err
	}
	tau := float64(q.Correlation) / float64(q.Spacing)
	q.Group = max(roughGroup, q.Spacing).Round(q.Spacing)
	q.GroupSigma = q.Sigma * math.Max(math.Sqrt(2*float64(q.Correlation)/float64(q.Group)), 1)
	q.MeanSigma = q.Sigma * math.Min(math.Sqrt(2*tau/float64(q.Values)), 1)
	l, err := FitLine(samples)
	if err != nil {
		return Quiet{}, err
	}
	if math.Abs(l.Change) > math.Max(4*l.Scatter, tolerated) {
		return Quiet{}, fmt.Errorf("it runs away, by %.1f times its scatter: %w", math.Abs(l.Change)/l.Scatter, ErrNotQuiet)
	}
	return q, nil
}

// correlation returns the integrated autocorrelation time in spacings,
//
//	τ = 1/2 + Σ ρ(k),  k = 1 … M, with M the first that is 5 τ or more
//
// The window is that of Sokal, in Functional Integration, NATO ASI B 361, 131
// (1997), doi:10.1007/978-1-4899-0319-8_6. Pairs are counted where both values
// are there, so that gaps do not shift the lags. The mean was taken from the
// same values, which makes every ρ too small by 2τ/n; it is given back.
func correlation(samples []Sample, q Quiet) float64 {
	n := len(samples)
	slots := int((q.To-q.From)/q.Spacing) + 2
	if slots > 50*n { // a gap of days: leave it out by closing up
		slots = n
	}
	value, there := make([]float64, slots), make([]bool, slots)
	for i, s := range samples {
		slot := i
		if slots != n {
			slot = int(math.Round(float64(s.At-q.From) / float64(q.Spacing)))
		}
		if slot < slots {
			value[slot], there[slot] = s.Value-q.Mean, true
		}
	}
	variance := q.Sigma * q.Sigma
	tau := 0.5
	for lag := 1; lag < slots/2; lag++ {
		sum, pairs := 0.0, 0
		for i := 0; i+lag < slots; i++ {
			if there[i] && there[i+lag] {
				sum += value[i] * value[i+lag]
				pairs++
			}
		}
		if pairs > 0 {
			tau += sum/float64(pairs)/variance + 2*tau/float64(n)
		}
		if float64(lag) >= 5*tau {
			break
		}
	}
	return math.Max(tau, 0.5)
}

// trend returns the slope of a line through the values in its own standard
// deviations, their correlation counted.
func trend(samples []Sample, q Quiet) float64 {
	n := float64(len(samples))
	var mean, sxx, sxy float64
	for _, s := range samples {
		mean += s.At.Seconds() / n
	}
	for _, s := range samples {
		x := s.At.Seconds() - mean
		sxx += x * x
		sxy += x * (s.Value - q.Mean)
	}
	slope := sxy / sxx
	left := 0.0 // scatter about the line
	for _, s := range samples {
		r := s.Value - q.Mean - slope*(s.At.Seconds()-mean)
		left += r * r / (n - 2)
	}
	tau := float64(q.Correlation) / float64(q.Spacing)
	return slope * math.Sqrt(sxx/(left*2*tau))
}
