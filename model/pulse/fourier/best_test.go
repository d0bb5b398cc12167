package fourier

import (
	"math"
	"time"
)

// best returns the shortest times in seconds of a call of each f, called in
// turns: the machine's other work can only lengthen them, and no f has a quiet
// spell to itself.
func best(fs ...func()) []float64 {
	const rounds = 2000
	shortest := make([]float64, len(fs))
	for i := range shortest {
		shortest[i] = math.Inf(1)
	}
	for range rounds {
		for i, f := range fs {
			f() // its own data into the cache
			start := time.Now()
			f()
			shortest[i] = min(shortest[i], time.Since(start).Seconds())
		}
	}
	return shortest
}
