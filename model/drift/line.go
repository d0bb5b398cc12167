package drift

import (
	"fmt"
	"math"
	"slices"
	"time"
)

// Line is a straight line through values that are correlated in time.
type Line struct {
	Slope      float64 // per second
	SlopeSigma float64 // the correlation of the values counted
	Change     float64 // from the first value to the last
	Scatter    float64 // of single values about the line
}

// Sure reports whether the slope stands clear of its own uncertainty by so
// many standard deviations.
func (l Line) Sure(deviations float64) bool { return math.Abs(l.Slope) > deviations*l.SlopeSigma }

const fewestForLine = 8

// FitLine draws a line through a stretch by least squares. The uncertainty of
// its slope counts how the values about the line know of each other; of a short
// stretch that is itself an estimate, good to about a third.
func FitLine(samples []Sample) (Line, error) {
	n := len(samples)
	if n < fewestForLine {
		return Line{}, fmt.Errorf("%d values for a line, expected at least %d: %w", n, fewestForLine, ErrShort)
	}
	q := Quiet{From: samples[0].At, To: samples[n-1].At, Values: n}
	gaps := make([]time.Duration, 0, n-1)
	var at, mean float64
	for i, s := range samples {
		if math.IsNaN(s.Value) || math.IsInf(s.Value, 0) || i > 0 && s.At <= samples[i-1].At {
			return Line{}, fmt.Errorf("value %d is not a number, or not later than the one before: %w", i+1, ErrNotQuiet)
		}
		if i > 0 {
			gaps = append(gaps, s.At-samples[i-1].At)
		}
		at += s.At.Seconds() / float64(n)
		mean += s.Value / float64(n)
	}
	slices.Sort(gaps)
	q.Spacing = gaps[len(gaps)/2]
	var sxx, sxy float64
	for _, s := range samples {
		x := s.At.Seconds() - at
		sxx += x * x
		sxy += x * (s.Value - mean)
	}
	l := Line{Slope: sxy / sxx}
	about := make([]Sample, n)
	for i, s := range samples {
		r := s.Value - mean - l.Slope*(s.At.Seconds()-at)
		about[i] = Sample{s.At, r}
		l.Scatter += r * r / float64(n-2)
	}
	l.Scatter = math.Sqrt(l.Scatter)
	q.Sigma = l.Scatter
	tau := 0.5
	if q.Sigma > 1e-13*math.Abs(mean) {
		tau = correlation(about, q)
	}
	l.SlopeSigma = l.Scatter * math.Sqrt(2*tau/sxx)
	l.Change = l.Slope * (q.To - q.From).Seconds()
	return l, nil
}
