package plan

import (
	"math"
	"strconv"
)

// rounded returns v with four digits, which is more than a plan knows.
func rounded[T ~float64](v T) T {
	if r, err := strconv.ParseFloat(strconv.FormatFloat(float64(v), 'g', 4, 64), 64); err == nil && !math.IsInf(r, 0) {
		return T(r)
	}
	return v
}
