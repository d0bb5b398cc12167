package drift

import (
	"errors"
	"fmt"
	"math"
	"sort"

	"gonum.org/v1/gonum/mat"
)

// ErrNoEvidence is returned where nothing was observed.
var ErrNoEvidence = errors.New("nothing was observed that could tell")

// Cause is one thing that may have happened.
type Cause struct {
	Name string
	// Odds is how often it happens compared with the other causes; only
	// ratios count.
	Odds float64
	// Size is the standard deviation of the amounts in which it happens, in
	// a unit of the cause's own.
	Size float64
	// Effect is what one unit of the amount does to each observable.
	Effect [ObservableCount]float64
	// Doubt is the standard uncertainty of each effect, in the same unit; zero:
	// it is known exactly, as that of a gauge on itself is.
	Doubt [ObservableCount]float64
	// Text writes an amount for a person, such as "moved by -0.13 bar".
	Text func(amount float64) string
}

// Observation is how far each observable stands from where it was in the
// quiet stretch.
type Observation struct {
	Shift [ObservableCount]float64
	// Sigma is the standard uncertainty of each shift; zero: not observed.
	Sigma [ObservableCount]float64
}

// Finding is what the observation says of one cause.
type Finding struct {
	Cause       Cause
	Probability float64
	Amount      float64 // most likely, given that it was this cause
	AmountSigma float64
	// Left is how far the observation stands from what the cause can explain,
	// in standard deviations, all observables together.
	Left float64
}

// elseName is the cause that nobody thought of: it may move every observable on
// its own, by several times what is usual.
const elseName = "something else"

// elseOdds is the share of all odds that is kept for what nobody thought of,
// and elseReach how far it moves each observable, in the largest standard
// deviation that a known cause gives it.
const (
	elseOdds  = 0.05
	elseReach = 1.5
)

// Attribute weighs the causes against each other. Each explains the shift by
// an amount a ~ N(0, Size²) of its own, so that
//
//	shift ~ N(0, diag(Sigma²) + Size²·Effect·Effectᵀ)
//
// and its probability follows from Bayes' rule: a cause that would need an
// amount it hardly ever comes in loses to one that needs a usual amount, and
// one that would have moved what stood still loses to one that would not. The
// last finding in rank order may be "something else", which explains all and
// so little. Findings come most probable first; they sum to one.
func Attribute(causes []Cause, o Observation) ([]Finding, error) {
	seen := o.seen()
	if len(seen) == 0 {
		return nil, ErrNoEvidence
	}
	all, err := withElse(causes)
	if err != nil {
		return nil, err
	}
	findings := make([]Finding, len(all))
	weights := make([]float64, len(all))
	most := math.Inf(-1)
	for i, c := range all {
		f := Finding{Cause: c.Cause}
		evidence := 0.0
		if c.broad != nil {
			for _, k := range seen {
				v := o.Sigma[k]*o.Sigma[k] + c.broad[k]*c.broad[k]
				evidence -= (o.Shift[k]*o.Shift[k]/v + math.Log(v)) / 2
			}
		} else {
			evidence = f.explain(o, seen)
		}
		weights[i] = evidence + math.Log(c.Odds)
		most = math.Max(most, weights[i])
		findings[i] = f
	}
	sum := 0.0
	for i := range weights {
		weights[i] = math.Exp(weights[i] - most)
		sum += weights[i]
	}
	for i := range findings {
		findings[i].Probability = weights[i] / sum
	}
	sort.SliceStable(findings, func(i, j int) bool { return findings[i].Probability > findings[j].Probability })
	return findings, nil
}

// explain fills in the most likely amount and returns the logarithm of the
// evidence, up to a constant that all causes share.
func (f *Finding) explain(o Observation, seen []Observable) float64 {
	effect, shift, sigma, doubt := make([]float64, len(seen)), make([]float64, len(seen)), make([]float64, len(seen)), make([]float64, len(seen))
	for i, k := range seen {
		effect[i], shift[i], sigma[i], doubt[i] = f.Cause.Effect[k], o.Shift[k], o.Sigma[k], f.Cause.Doubt[k]
	}
	w := weigh(0, f.Cause.Size, effect, doubt, shift, sigma)
	f.Amount, f.AmountSigma, f.Left = w.amount, w.sigma, w.left
	return w.evidence
}

// weighed is what values seen say of an amount.
type weighed struct{ amount, sigma, left, evidence float64 }

// weigh finds the most likely amount of a cause that was believed to be
// amount ± size, from values seen. The covariance of the values is diagonal
// plus one direction, so its inverse and determinant are known (Sherman &
// Morrison, Ann. Math. Stat. 21, 124 (1950)). What is not known of an effect
// grows with the amount: it is taken at the most likely one, which is found by
// going round a few times.
func weigh(amount, size float64, effect, doubt, seen, sigma []float64) weighed {
	var w weighed
	w.amount = amount
	for round := range 4 {
		var ee, ey, yy, logs float64 // effect·effect, effect·shift … in units of sigma
		for k, e := range effect {
			v := sigma[k] * sigma[k]
			if round > 0 { // the first round takes the effects for known
				v += square(w.amount * doubt[k])
			}
			y := seen[k] - amount*e
			ee, ey, yy = ee+e*e/v, ey+e*y/v, yy+y*y/v
			logs += math.Log(v)
		}
		size2 := size * size
		more := ey * size2 / (1 + ee*size2)
		w.amount = amount + more
		w.sigma = size / math.Sqrt(1+ee*size2)
		w.left = math.Sqrt(math.Max(yy-2*more*ey+more*more*ee, 0))
		w.evidence = -(yy - ey*more + logs + math.Log1p(size2*ee)) / 2
	}
	return w
}

func square(x float64) float64 { return x * x }

func (o Observation) seen() []Observable {
	var seen []Observable
	for k := range o.Sigma {
		if o.Sigma[k] > 0 && !math.IsNaN(o.Shift[k]) {
			seen = append(seen, Observable(k))
		}
	}
	return seen
}

// candidate is a cause, or the one that moves every observable by itself.
type candidate struct {
	Cause
	broad *[ObservableCount]float64
}

func withElse(causes []Cause) ([]candidate, error) {
	if len(causes) == 0 {
		return nil, errors.New("no causes are given to choose from")
	}
	var all []candidate
	broad, odds := new([ObservableCount]float64), 0.0
	for _, c := range causes {
		if !(c.Odds > 0) || !(c.Size > 0) || math.IsInf(c.Odds+c.Size, 0) {
			return nil, fmt.Errorf("cause %q has the odds %v and the size %v, expected both above zero", c.Name, c.Odds, c.Size)
		}
		for k, e := range c.Effect {
			if math.IsNaN(e) || math.IsInf(e, 0) {
				return nil, fmt.Errorf("the effect of %q on %v is not a number", c.Name, Observable(k))
			}
			broad[k] = math.Max(broad[k], elseReach*c.Size*math.Abs(e))
		}
		odds += c.Odds
		all = append(all, candidate{Cause: c})
	}
	return append(all, candidate{Cause: Cause{Name: elseName, Odds: odds * elseOdds / (1 - elseOdds)}, broad: broad}), nil
}

// Alike returns for each finding those others that the observables seen cannot
// tell from it: whose effects, in units of sigma, point the same way or the
// opposite within the given cosine, such as 0.99.
func Alike(findings []Finding, o Observation, cosine float64) map[string][]string {
	seen := o.seen()
	direction := func(f Finding) *mat.VecDense {
		v := mat.NewVecDense(max(len(seen), 1), nil)
		for i, k := range seen {
			v.SetVec(i, f.Cause.Effect[k]/o.Sigma[k])
		}
		return v
	}
	alike := map[string][]string{}
	for i, a := range findings {
		for _, b := range findings[i+1:] {
			va, vb := direction(a), direction(b)
			if na, nb := mat.Norm(va, 2), mat.Norm(vb, 2); na > 0 && nb > 0 && math.Abs(mat.Dot(va, vb)) >= cosine*na*nb {
				alike[a.Cause.Name] = append(alike[a.Cause.Name], b.Cause.Name)
				alike[b.Cause.Name] = append(alike[b.Cause.Name], a.Cause.Name)
			}
		}
	}
	return alike
}
