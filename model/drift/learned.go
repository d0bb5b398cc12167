package drift

import (
	"fmt"
	"math"
	"sort"
)

// Learned weighs findings anew by what a step showed: z in the order of the
// step's Sigma. The probabilities before are the prior, and the amounts are
// those that both together ask for. What nobody thought of may show anything,
// within several times what the known causes would have.
func Learned(findings []Finding, s Step, z []float64) ([]Finding, error) {
	if len(z) != len(s.Sigma) || len(z) == 0 {
		return nil, fmt.Errorf("step %q: %d values seen, expected %d and at least one", s.Name, len(z), len(s.Sigma))
	}
	after := make([]Finding, len(findings))
	copy(after, findings)
	most := math.Inf(-1)
	weights := make([]float64, len(after))
	for i := range after {
		f := &after[i]
		evidence := 0.0
		if f.Cause.Name == elseName {
			for k := range z {
				broad := 0.0
				for _, g := range findings {
					broad = math.Max(broad, elseReach*math.Abs(s.effect(g, k))*math.Max(g.Cause.Size, math.Hypot(g.Amount, g.AmountSigma)))
				}
				v := s.Sigma[k]*s.Sigma[k] + broad*broad
				evidence -= (z[k]*z[k]/v + math.Log(v/(s.Sigma[k]*s.Sigma[k]))) / 2
			}
		} else {
			evidence = s.evidence(*f, z)
			f.update(s, z)
		}
		weights[i] = math.Log(math.Max(f.Probability, 1e-300)) + evidence
		most = math.Max(most, weights[i])
	}
	sum := 0.0
	for i := range weights {
		weights[i] = math.Exp(weights[i] - most)
		sum += weights[i]
	}
	for i := range after {
		after[i].Probability = weights[i] / sum
	}
	sort.SliceStable(after, func(i, j int) bool { return after[i].Probability > after[j].Probability })
	return after, nil
}

// update brings the amount to what it is believed to be behind the step.
func (f *Finding) update(s Step, z []float64) {
	precision := 0.0
	pull := 0.0
	if f.AmountSigma > 0 {
		precision = 1 / (f.AmountSigma * f.AmountSigma)
		pull = f.Amount * precision
	}
	for k := range z {
		e := s.effect(*f, k) / (s.Sigma[k] * s.Sigma[k])
		precision += e * s.effect(*f, k)
		pull += e * z[k]
	}
	if precision > 0 {
		f.Amount, f.AmountSigma = pull/precision, 1/math.Sqrt(precision)
	}
}
