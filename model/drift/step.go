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
	// Doubt is the standard uncertainty of each effect; causes that are not
	// in it have effects that are known exactly.
	Doubt map[string][]float64
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
		if err := s.check(); err != nil {
			return nil, err
		}
		worths = append(worths, s.worth(causes, total))
	}
	rate := func(w Worth) float64 { return w.Bits / math.Max(w.Step.Cost.Hours(), 1.0/60) }
	sort.SliceStable(worths, func(i, j int) bool { return rate(worths[i]) > rate(worths[j]) })
	return worths, nil
}

// check refuses a step that cannot be weighed.
func (s Step) check() error {
	for _, sigma := range s.Sigma {
		if !(sigma > 0) {
			return fmt.Errorf("step %q sees with the uncertainty %v, expected above zero", s.Name, sigma)
		}
	}
	for _, m := range []map[string][]float64{s.Effect, s.Doubt} {
		for name, e := range m {
			if len(e) != len(s.Sigma) {
				return fmt.Errorf("step %q: %d effects of %q for %d observed values", s.Name, len(e), name, len(s.Sigma))
			}
		}
	}
	return nil
}

func (s Step) worth(causes []Finding, total float64) Worth {
	rng := rand.New(rand.NewPCG(1, 2))
	w := Worth{Step: s}
	z := make([]float64, len(s.Sigma))
	logs := make([]float64, len(causes))
	for c, f := range causes {
		effect, doubt := s.of(f)
		for range drawsPerCause {
			amount := f.Amount + f.AmountSigma*rng.NormFloat64()
			for k := range z {
				z[k] = effect[k]*amount + s.Sigma[k]*rng.NormFloat64()
				if doubt[k] > 0 {
					z[k] += amount * doubt[k] * rng.NormFloat64()
				}
			}
			most := math.Inf(-1)
			for i, g := range causes {
				logs[i] = math.Log(g.Probability/total) + s.weigh(g, z).evidence
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
			w.Bits += weight * math.Log2(math.Max(after, 1e-300)/(f.Probability/total))
			w.Certain += weight * best / sum
		}
	}
	w.Bits = math.Max(w.Bits, 0)
	return w
}

// of returns what a unit of the finding's cause does to the values, and how
// badly that is known.
func (s Step) of(f Finding) (effect, doubt []float64) {
	effect, doubt = s.Effect[f.Cause.Name], s.Doubt[f.Cause.Name]
	if effect == nil {
		effect = make([]float64, len(s.Sigma))
	}
	if doubt == nil {
		doubt = make([]float64, len(s.Sigma))
	}
	return effect, doubt
}

func (s Step) weigh(f Finding, z []float64) weighed {
	effect, doubt := s.of(f)
	return weigh(f.Amount, f.AmountSigma, effect, doubt, z, s.Sigma)
}

// Told returns what is to be believed after the step was taken and its values
// seen: the findings of before, weighed again, most probable first. What
// nobody thought of may have moved every value by as much as a usual amount of
// any cause would.
func (s Step) Told(findings []Finding, seen []float64) ([]Finding, error) {
	if err := s.check(); err != nil {
		return nil, err
	}
	if len(seen) != len(s.Sigma) {
		return nil, fmt.Errorf("step %q: %d values seen, expected %d", s.Name, len(seen), len(s.Sigma))
	}
	if len(findings) == 0 {
		return nil, ErrNoEvidence
	}
	broad := make([]float64, len(s.Sigma))
	for _, f := range findings {
		effect, _ := s.of(f)
		for k := range broad {
			broad[k] = math.Max(broad[k], math.Abs(elseReach*effect[k]*f.Cause.Size))
		}
	}
	told := append([]Finding(nil), findings...)
	logs := make([]float64, len(told))
	most := math.Inf(-1)
	for i := range told {
		f := &told[i]
		logs[i] = math.Log(f.Probability)
		if f.Cause.Name == elseName {
			for k, y := range seen {
				v := square(s.Sigma[k]) + square(broad[k])
				logs[i] -= (y*y/v + math.Log(v)) / 2
			}
		} else {
			w := s.weigh(*f, seen)
			f.Amount, f.AmountSigma, f.Left = w.amount, w.sigma, math.Hypot(f.Left, w.left)
			logs[i] += w.evidence
		}
		most = math.Max(most, logs[i])
	}
	sum := 0.0
	for i := range told {
		told[i].Probability = math.Exp(logs[i] - most)
		sum += told[i].Probability
	}
	for i := range told {
		told[i].Probability /= sum
	}
	sort.SliceStable(told, func(i, j int) bool { return told[i].Probability > told[j].Probability })
	return told, nil
}

// Elsewhere is the step of looking at the same observables in another state
// of the bench, such as at another pressure or with all valves shut: slopes and
// state are those there. Observables whose sigma is zero are not looked at.
func Elsewhere(name string, cost time.Duration, there Slopes, b State, sigma [ObservableCount]float64) Step {
	s := Step{Name: name, Cost: cost, Effect: map[string][]float64{}, Doubt: map[string][]float64{}}
	for k := range sigma {
		if sigma[k] > 0 {
			s.Sigma = append(s.Sigma, sigma[k])
		}
	}
	for _, c := range Causes(there, b) {
		var e, d []float64
		for k := range sigma {
			if sigma[k] > 0 {
				e, d = append(e, c.Effect[k]), append(d, c.Doubt[k])
			}
		}
		s.Effect[c.Name], s.Doubt[c.Name] = e, d
	}
	return s
}
