package fourier

import (
	"math"
	"time"
)

// best returns the shortest time in seconds of a call of f: the machine's
// other work can only lengthen it.
func best(f func()) float64 {
	const rounds, calls = 60, 20
	shortest := math.Inf(1)
	for range rounds {
		start := time.Now()
		for range calls {
			f()
		}
		shortest = min(shortest, time.Since(start).Seconds()/calls)
	}
	return shortest
}
