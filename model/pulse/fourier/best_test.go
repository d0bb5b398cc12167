package fourier

import (
	"math"
	"time"
)

// best returns the shortest time in seconds of a call of f: the machine's
// other work can only lengthen it.
func best(f func()) float64 {
	const calls = 3000
	shortest := math.Inf(1)
	for range calls {
		start := time.Now()
		f()
		shortest = min(shortest, time.Since(start).Seconds())
	}
	return shortest
}
