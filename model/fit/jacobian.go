package fit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// work is the memory of one fit.
type work struct {
	*Problem
	loss          Loss      // of this descent
	scale         float64   // of the residuals where their size comes from the data
	model         []float64 // at the present parameters
	triedModel    []float64
	plus, minus   []float64
	shifted       []float64
	jacobian      *mat.Dense // of the residuals, rows points then priors
	residual      []float64  // at the present parameters: (measured − model)/σ, then scale·(prior − p)/σ_prior
	tried         []float64  // the same at parameters that may be refused
	priors        []int      // parameters that have one
	evaluations   int
	lower, higher []float64
}

func newWork(p *Problem) *work {
	n, m := len(p.Measured), len(p.Parameters)
	w := &work{
		Problem: p, loss: p.Loss, scale: 1, model: make([]float64, n), triedModel: make([]float64, n), plus: make([]float64, n), minus: make([]float64, n),
		shifted: make([]float64, m), lower: make([]float64, m), higher: make([]float64, m),
	}
	for j, q := range p.Parameters {
		w.lower[j], w.higher[j] = math.Inf(-1), math.Inf(1)
		if q.bounded() {
			w.lower[j], w.higher[j] = q.Lower, q.Upper
		}
		if q.PriorSigma > 0 {
			w.priors = append(w.priors, j)
		}
	}
	w.residual, w.tried = make([]float64, n+len(w.priors)), make([]float64, n+len(w.priors))
	w.jacobian = mat.NewDense(n+len(w.priors), m, nil)
	return w
}

func (w *work) sigma(i int) float64 {
	if w.Sigma == nil {
		return 1
	}
	return w.Sigma[i]
}

// ask evaluates the model.
func (w *work) ask(dst, p []float64) error {
	w.evaluations++
	if err := w.Model(dst, p); err != nil {
		return err
	}
	for i, v := range dst {
		if !finite(v) {
			return fmt.Errorf("the model gives no number at point %d", i+1)
		}
	}
	return nil
}

// try fills tried for the parameters p and returns the cost. Residuals of
// points are in units of σ; those of priors are multiplied by scale, so that
// a prior keeps its meaning where σ is in units of the scatter.
func (w *work) try(p []float64) (cost float64, err error) {
	if err := w.ask(w.triedModel, p); err != nil {
		return math.Inf(1), err
	}
	n := len(w.Measured)
	for i, y := range w.Measured {
		r := (y - w.triedModel[i]) / w.sigma(i)
		w.tried[i] = r
		cost += w.scale * w.scale * w.loss.value(r/w.scale)
	}
	for k, j := range w.priors {
		q := w.Parameters[j]
		r := w.scale * (q.Prior - p[j]) / q.PriorSigma
		w.tried[n+k] = r
		cost += r * r
	}
	if !finite(cost) {
		return math.Inf(1), fmt.Errorf("the residuals are too large to be squared")
	}
	return cost, nil
}

// take makes what was tried the present.
func (w *work) take() {
	w.residual, w.tried = w.tried, w.residual
	w.model, w.triedModel = w.triedModel, w.model
}

// at tries p and takes it.
func (w *work) at(p []float64) (cost float64, err error) {
	cost, err = w.try(p)
	if err == nil {
		w.take()
	}
	return cost, err
}

// differentiate fills jacobian at p by central differences, one-sided at a
// bound. The step is the cube root of the machine's resolution relative to
// the parameter, where rounding and curvature take about the same share.
func (w *work) differentiate(p []float64) error {
	const relative = 6.055454452393343e-06 // (2⁻⁵²)^(1/3)
	n := len(w.Measured)
	for j, q := range w.Parameters {
		h := relative * math.Max(math.Abs(p[j]), 1e-3*q.typical())
		up, down := math.Min(p[j]+h, w.higher[j]), math.Max(p[j]-h, w.lower[j])
		copy(w.shifted, p)
		w.shifted[j] = up
		errUp := w.ask(w.plus, w.shifted)
		w.shifted[j] = down
		errDown := w.ask(w.minus, w.shifted)
		switch { // where the model ends on one side, take the other
		case errUp != nil && errDown != nil:
			return fmt.Errorf("no derivative by %s at %v: %w", q.Name, p[j], errUp)
		case errUp != nil:
			copy(w.plus, w.model)
			up = p[j]
		case errDown != nil:
			copy(w.minus, w.model)
			down = p[j]
		}
		if up == down {
			return fmt.Errorf("no room for a derivative by %s at %v", q.Name, p[j])
		}
		for i := range n {
			w.jacobian.Set(i, j, -(w.plus[i]-w.minus[i])/(up-down)/w.sigma(i))
		}
	}
	for k, j := range w.priors {
		for c := range w.Parameters {
			w.jacobian.Set(n+k, c, 0)
		}
		w.jacobian.Set(n+k, j, -w.scale/w.Parameters[j].PriorSigma)
	}
	return nil
}

// weights returns the square root of the robust weight of each row.
func (w *work) weights(dst []float64) {
	n := len(w.Measured)
	for i := range dst {
		dst[i] = 1
		if i < n {
			dst[i] = math.Sqrt(w.loss.weight(w.residual[i] / w.scale))
		}
	}
}
