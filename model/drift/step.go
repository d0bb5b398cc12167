package drift

import (
	"fmt"
	"math"
	"math/rand/v2"
	"sort"
	"time"
)

// Step is something to do that would tell causes apart, such as going to
// another pressure or shutting a valve for ten minutes.
type Step struct {
	Name string
	Cost time.Duration
	// Effect is what one unit of each cause's amount, by its name, would do
	// to what the step observes; Sigma is with what uncertainty it is seen.
	Effect map[string][]float64
	Sigma  []float64
}

// Worth is what a step promises.
type Worth struct {
	Step Step
	// Bits is the expected information about which cause it was; one bit
	// tells two equally likely causes apart.
	Bits float64
	// Certain is the expected probability of the then most probable cause.
	Certain float64
}

// drawsPerCause makes the expected information good to about 0.02 bit.
const drawsPerCause = 600

// Best ranks steps by expected information an hour, given the findings of now.
// Outcomes are drawn for each cause from what its amount is believed to be,
// always the same ones, so that the answer does not flicker. What nobody
// thought of is left out: no step tells what it would do.
func Best(findings []Finding, steps []Step) ([]Worth, error) {
	var causes []Finding
	total := 0.0
	for _, f := range findings {
		if f.Cause.Name != elseName && f.Probability > 1e-4 {
			causes = append(causes, f)
			total += f.Probability
		}
	}
	if total == 0 {
		return nil, ErrNoEvidence
	}
	var worths []Worth
	for _, s := range steps {
		for _, sigma := range s.Sigma {
			if !(sigma > 0) {
				return nil, fmt.Errorf("step %q sees with the uncertainty %v, expected above zero", s.Name, sigma)
			}
		}
		for name, e := range s.Effect {
			if len(e) != len(s.Sigma) {
				return nil, fmt.Errorf("step %q: %d effects of %q for %d observed values", s.Name, len(e), name, len(s.Sigma))
			}
		}
		worths = append(worths, s.worth(causes, total))
	}
	rate := func(w Worth) float64 { return w.Bits / math.Max(w.Step.Cost.Hours(), 1.0/60) }
	sort.SliceStable(worths, func(i, j int) bool { return rate(worths[i]) > rate(worths[j]) })
	return worths, nil
}

func (s Step) worth(causes []Finding, total float64) Worth {
	rng := rand.New(rand.NewPCG(1, 2))
	w := Worth{Step: s}
	z := make([]float64, len(s.Sigma))
	logs := make([]float64, len(causes))
	for c, f := range causes {
		for range drawsPerCause {
			amount := f.Amount + f.AmountSigma*rng.NormFloat64()
			for k := range z {
				z[k] = s.effect(f, k)*amount + s.Sigma[k]*rng.NormFloat64()
			}
			most := math.Inf(-1)
			for i, g := range causes {
				logs[i] = math.Log(g.Probability/total) + s.evidence(g, z)
				most = math.Max(most, logs[i])
			}
			sum, best := 0.0, 0.0
			for _, l := range logs {
				e := math.Exp(l - most)
				sum += e
				best = math.Max(best, e)
			}
			weight := f.Probability / total / drawsPerCause
			after := math.Exp(logs[c]-most) / sum
			w.Bits += weight * math.Log2(after/(f.Probability/total))
			w.Certain += weight * best / sum
		}
	}
	w.Bits = math.Max(w.Bits, 0)
	return w
}

func (s Step) effect(f Finding, k int) float64 {
	if e := s.Effect[f.Cause.Name]; k < len(e) {
		return e[k]
	}
	return 0
}

// evidence is the logarithm of how likely z is under the cause, up to a
// constant that all share.
func (s Step) evidence(f Finding, z []float64) float64 {
	var ee, ey, yy float64
	for k := range z {
		e := s.effect(f, k) / s.Sigma[k]
		y := (z[k] - s.effect(f, k)*f.Amount) / s.Sigma[k]
		ee, ey, yy = ee+e*e, ey+e*y, yy+y*y
	}
	v := f.AmountSigma * f.AmountSigma
	return -(yy - v*ey*ey/(1+v*ee) + math.Log1p(v*ee)) / 2
}

// Elsewhere is the step of looking at the same observables in another state
// of the bench, such as at another pressure or with all valves shut: slopes and
// state are those there. Observables whose sigma is zero are not looked at.
func Elsewhere(name string, cost time.Duration, there Slopes, b State, sigma [ObservableCount]float64) Step {
	s := Step{Name: name, Cost: cost, Effect: map[string][]float64{}}
	for k := range sigma {
		if sigma[k] > 0 {
			s.Sigma = append(s.Sigma, sigma[k])
		}
	}
	for _, c := range Causes(there, b) {
		var e []float64
		for k := range sigma {
			if sigma[k] > 0 {
				e = append(e, c.Effect[k])
			}
		}
		s.Effect[c.Name] = e
	}
	return s
}
