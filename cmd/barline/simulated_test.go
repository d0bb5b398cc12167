package main

import (
	"testing"

	"barline/model/unit"
)

func TestTimeoutsHurryWithTheSimulatedBench(t *testing.T) {
	for _, c := range []struct {
		timeout unit.Second
		speed   float64
		want    unit.Second
	}{
		{0.5, 1, 0.5},
		{0.5, 2, 0.5},    // still shorter than what makes a neighbour stale
		{0.5, 20, 0.075}, // 1.5 s of bench time
		{4, 20, 0.2},     // an instrument that may take longer than that keeps its own
		{0.5, 0.1, 0.5},
	} {
		if got := hurried(c.timeout, 2, c.speed); got < c.want-1e-9 || got > c.want+1e-9 {
			t.Errorf("%v at %g × life: %v, want %v", c.timeout, c.speed, got, c.want)
		}
	}
}
