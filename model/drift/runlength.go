package drift

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// Average run lengths of charts of independent normal values, from the Markov
// chain of Brook & Evans, Biometrika 59, 539 (1972), doi:10.1093/biomet/59.3.539.
// Shift, slack, threshold and limit are in standard deviations of one value.

// RunLengthCUSUM returns how many values pass on average before either of the
// two sums signals, when the mean has shifted.
func RunLengthCUSUM(slack, threshold, shift float64) float64 {
	return 1 / (1/oneSided(slack, threshold, shift) + 1/oneSided(slack, threshold, -shift))
}

func oneSided(slack, threshold, shift float64) float64 {
	const states = 100
	width := 2 * threshold / (2*states - 1)
	// The chain moves by differences alone: one row of edges serves all.
	var below [2 * states]float64
	for d := range below {
		below[d] = distuv.UnitNormal.CDF((float64(d-states)+0.5)*width + slack - shift)
	}
	return runLength(states, 0, func(from int, row []float64) {
		row[0] = below[states-from]
		for to := 1; to < states; to++ {
			row[to] = below[states+to-from] - below[states+to-from-1]
		}
	})
}

// RunLengthEWMA returns how many values pass on average before the average
// leaves limits of limit asymptotic standard deviations.
func RunLengthEWMA(lambda, limit, shift float64) float64 {
	const states = 121 // odd: the target is one of them
	reach := limit * math.Sqrt(lambda/(2-lambda))
	width := 2 * reach / states
	return runLength(states, states/2, func(from int, row []float64) {
		at := -reach + (float64(from)+0.5)*width
		edge := func(j int) float64 {
			return distuv.UnitNormal.CDF((-reach+float64(j)*width-(1-lambda)*at)/lambda - shift)
		}
		below := edge(0)
		for to := range row {
			above := edge(to + 1)
			row[to], below = above-below, above
		}
	})
}

// runLength returns the mean number of steps from a state until the chain is
// absorbed; fill writes the probabilities of moving from a state to each.
func runLength(states, start int, fill func(from int, row []float64)) float64 {
	a := mat.NewDense(states, states, nil)
	one := mat.NewVecDense(states, nil)
	for i := range states {
		one.SetVec(i, 1)
		row := a.RawRowView(i)
		fill(i, row)
		for j := range row {
			row[j] = -row[j]
		}
		row[i]++
	}
	var steps mat.VecDense
	if err := steps.SolveVec(a, one); err != nil && steps.IsEmpty() {
		return math.Inf(1) // so long that rounding hides the end
	}
	return steps.AtVec(start)
}

// ThresholdCUSUM returns the threshold at which false alarms come once in so
// many values on average.
func ThresholdCUSUM(slack, values float64) (float64, error) {
	return solve(values, func(h float64) float64 { return oneSided(slack, h, 0) / 2 })
}

// LimitEWMA returns the limit at which false alarms come once in so many
// values on average.
func LimitEWMA(lambda, values float64) (float64, error) {
	return solve(values, func(l float64) float64 { return RunLengthEWMA(lambda, l, 0) })
}

// solve finds where a run length that grows about exponentially reaches
// values: by halving between brackets and by the secant of its logarithm.
func solve(values float64, runLength func(float64) float64) (float64, error) {
	if !(values >= 10 && values <= 1e9) {
		return 0, fmt.Errorf("a false alarm in %v values, expected 10 to 1e9", values)
	}
	excess := func(x float64) float64 { return math.Log(runLength(x) / values) }
	// Far beyond, rounding hides how the chain ends: walk up to it.
	low, high := 0.1, 2.0
	below, above := excess(low), excess(high)
	for above < 0 {
		low, below = high, above
		high *= 1.3
		above = excess(high)
	}
	for range 60 {
		x := low - below*(high-low)/(above-below)
		if edge := (high - low) / 10; x < low+edge || x > high-edge {
			x = (low + high) / 2
		}
		at := excess(x)
		if math.Abs(at) < 1e-5 || high-low < 1e-6 {
			return x, nil
		}
		if at < 0 {
			low, below = x, at
		} else {
			high, above = x, at
		}
	}
	return high, nil
}
