package fit

import (
	"fmt"
	"math"
	"strings"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// Result is a fit that came to an end.
type Result struct {
	Names      []string
	Parameters []float64
	// Sigma is the standard uncertainty of each parameter; zero where AtBound.
	Sigma   []float64
	AtBound []bool // held by a bound, and so without an uncertainty
	// Covariance has a row and column of zeros where AtBound. With a robust
	// loss it counts every point by its weight, which is a few per cent
	// cautious where all points are normal.
	Covariance *mat.SymDense

	SumOfSquares float64 // of the weighted residuals of points, each in units of its Sigma
	Freedom      int     // degrees of freedom: points and priors less free parameters
	// Scatter is the standard deviation of residuals in units of Sigma, as
	// found. With a robust loss an outlier adds to it no more than the loss
	// lets it pull.
	Scatter   float64
	Scattered bool      // the uncertainties lean on Scatter
	Residuals []float64 // measured − model, in units of Sigma
	Weights   []float64 // robust weight of each point, 1 where it counts in full

	Seen        []Combination // the best known first
	Steps       int
	Evaluations int
}

// Reduced returns χ² per degree of freedom, or 0 where none is left.
func (r *Result) Reduced() float64 {
	if r.Freedom == 0 {
		return 0
	}
	return r.Scatter * r.Scatter
}

// Correlation returns the correlation of two parameters, 0 where one is held
// by a bound.
func (r *Result) Correlation(i, j int) float64 {
	if r.Sigma[i] == 0 || r.Sigma[j] == 0 {
		return 0
	}
	return r.Covariance.At(i, j) / (r.Sigma[i] * r.Sigma[j])
}

// Interval returns how far the parameter may be from its value to either side
// with the given probability, such as 0.68. Where the scatter was learnt from
// few points Student's distribution widens it.
func (r *Result) Interval(i int, probability float64) float64 {
	q := (1 + probability) / 2
	if r.Scattered && r.Freedom > 0 {
		return r.Sigma[i] * distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(r.Freedom)}.Quantile(q)
	}
	return r.Sigma[i] * distuv.UnitNormal.Quantile(q)
}

// result reads uncertainties off the Jacobian at the minimum x.
func (w *work) result(x []float64, steps int) (*Result, error) {
	n, m := len(w.Measured), len(x)
	root := make([]float64, len(w.residual))
	w.weights(root)
	free := w.free(x, root)
	r := &Result{
		Parameters: append([]float64(nil), x...), Sigma: make([]float64, m), AtBound: make([]bool, m),
		Covariance: mat.NewSymDense(m, nil), Freedom: n + len(w.priors) - len(free), Scattered: w.scattered(),
		Residuals: append([]float64(nil), w.residual[:n]...), Weights: make([]float64, n), Steps: steps, Evaluations: w.evaluations,
	}
	for j, q := range w.Parameters {
		r.Names = append(r.Names, q.Name)
		r.AtBound[j] = true
	}
	var squares float64 // with priors, in units of the scale
	for i, res := range w.residual {
		if i < n {
			r.Weights[i] = root[i] * root[i]
			r.SumOfSquares += res * res
			squares += w.loss.influence(res / w.scale)
		} else {
			squares += res * res / (w.scale * w.scale)
		}
	}
	unit := w.scale // of the residuals, for the covariance
	switch {
	case w.loss.c > 0 && w.scattered():
		r.Scatter = w.scale
	case w.scattered() && len(w.priors) > 0:
		r.Scatter = w.scale
	case r.Freedom > 0:
		r.Scatter = math.Sqrt(squares / float64(r.Freedom))
		if w.scattered() {
			unit = r.Scatter
		}
	}
	if len(free) == 0 {
		return r, nil
	}
	if err := w.known(r, free, root, unit); err != nil {
		return r, err
	}
	return r, nil
}

// Combination is a direction among the parameters: what one sees of it in the
// data, and what is known of it in the end.
type Combination struct {
	// Weights are the parts of the parameters, in units of the prior's sigma
	// or else of the typical size; their squares sum to one. Zero: not in it.
	Weights []float64
	// Sigma is the standard uncertainty along the direction, in the same units.
	Sigma float64
	// Told is the share of what is known that the data told, from 0, all of
	// it was known before, to 1.
	Told float64
}

// Text names the parameters of the combination, the largest part first and
// those below a tenth left out.
func (c Combination) Text(names []string) string {
	left := append([]float64(nil), c.Weights...)
	var parts []string
	for {
		most := 0
		for j := range left {
			if math.Abs(left[j]) > math.Abs(left[most]) {
				most = j
			}
		}
		if math.Abs(left[most]) < 0.1 {
			return strings.Join(parts, ", ")
		}
		parts = append(parts, fmt.Sprintf("%s (%+.2f)", names[most], c.Weights[most]))
		left[most] = 0
	}
}

// known fills in covariance and combinations from the Jacobian of the free
// parameters, whose residuals have the size unit.
func (w *work) known(r *Result, free []int, root []float64, unit float64) error {
	n, rows := len(w.Measured), len(w.residual)
	size := make([]float64, len(free)) // of a parameter, to make all comparable
	whole := mat.NewDense(rows, len(free), nil)
	for c, j := range free {
		r.AtBound[j] = false
		if size[c] = w.Parameters[j].PriorSigma; size[c] == 0 {
			size[c] = w.Parameters[j].typical()
		}
		for i := range rows {
			if unit > 0 {
				whole.Set(i, c, root[i]*w.jacobian.At(i, j)*size[c]/unit)
			}
		}
	}
	if unit == 0 { // the model meets every point, nothing is uncertain
		return nil
	}
	var svd mat.SVD
	if !svd.Factorize(whole, mat.SVDThin) {
		return fmt.Errorf("the derivatives of the model cannot be decomposed: %w", ErrDiverged)
	}
	values := svd.Values(nil)
	var v mat.Dense
	svd.VTo(&v)
	for k, s := range values {
		c := Combination{Weights: make([]float64, len(w.Parameters))}
		prior := 0.0
		for q, j := range free {
			c.Weights[j] = v.At(q, k)
			if w.Parameters[j].PriorSigma > 0 {
				prior += v.At(q, k) * v.At(q, k)
			}
		}
		if s > 0 {
			c.Sigma, c.Told = 1/s, math.Min(math.Max(1-prior/(s*s), 0), 1)
		}
		r.Seen = append(r.Seen, c)
		if !(s > unseen*values[0]) {
			names := make([]string, len(w.Parameters))
			for j, p := range w.Parameters {
				names[j] = p.Name
			}
			text := c.Text(names)
			if strings.Contains(text, ",") {
				text += " apart"
			}
			return fmt.Errorf("%d points: %w %s; hold one fast or give it a prior", n, ErrUnseen, text)
		}
	}
	for a, ja := range free {
		for b, jb := range free[:a+1] {
			sum := 0.0
			for k, s := range values {
				sum += v.At(a, k) * v.At(b, k) / (s * s)
			}
			r.Covariance.SetSym(ja, jb, sum*size[a]*size[b])
		}
		r.Sigma[ja] = math.Sqrt(r.Covariance.At(ja, ja))
	}
	return nil
}

// unseen is the share of the best seen combination below which one is not
// seen at all: a numerical derivative has about ten good digits.
const unseen = 1e-8
