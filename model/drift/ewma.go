package drift

import "math"

// EWMA is an exponentially weighted moving average with its limits: a value
// that can be copied (NIST/SEMATECH e-Handbook of Statistical Methods, section
// 6.3.2.4).
//
//	z_t = λ·x_t + (1−λ)·z_{t−1},  z_0 = target
//	var z_t = σ²·λ/(2−λ)·(1 − (1−λ)^{2t})
type EWMA struct {
	Target float64
	Sigma  float64 // of one value, in the unit of Target
	Lambda float64 // 0 < λ <= 1; small is slow and sees little drifts
	Limit  float64 // in standard deviations of the average
	value  float64 // above Target
	steps  int
}

// Add takes the next value and reports whether the average left its limits.
func (e *EWMA) Add(x float64) (outside bool) {
	e.value += e.Lambda * (x - e.Target - e.value)
	e.steps++
	return math.Abs(e.value) > e.reach()
}

// Value returns the average; before the first value it is the target.
func (e *EWMA) Value() float64 { return e.Target + e.value }

// Limits returns the limits of the average after as many values as were added.
func (e *EWMA) Limits() (lower, upper float64) {
	r := e.reach()
	return e.Target - r, e.Target + r
}

func (e *EWMA) reach() float64 {
	grown := 1 - math.Pow(1-e.Lambda, 2*float64(e.steps))
	return e.Limit * e.Sigma * math.Sqrt(e.Lambda/(2-e.Lambda)*grown)
}
