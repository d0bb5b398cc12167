package fit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Solve fits the problem. On error the result is nil, but for ErrUnseen: then
// it says by Seen what the data could tell.
func Solve(p *Problem) (*Result, error) {
	if err := p.check(); err != nil {
		return nil, err
	}
	w := newWork(p)
	x := make([]float64, len(p.Parameters))
	for j, q := range p.Parameters {
		x[j] = q.Start
	}
	if p.Loss.c == 0 && len(w.priors) == 0 || !p.scattered() {
		steps, err := w.descend(x)
		if err != nil {
			return nil, err
		}
		return w.result(x, steps)
	}
	return w.withScatter(x)
}

// withScatter fits where the size of the uncertainties is found together with
// the parameters and the cost depends on it: through the corner of a robust
// loss, or through priors, whose uncertainty is known in absolute terms.
func (w *work) withScatter(x []float64) (*Result, error) {
	loss := w.Loss
	if _, err := w.at(x); err != nil {
		return nil, fmt.Errorf("at the start: %w: %w", err, ErrProblem)
	}
	// The data first: squares, and priors just strong enough to hold what the
	// data do not see.
	first := spread(w.residual[:len(w.Measured)], 0)
	if first == 0 {
		first = 1
	}
	w.scale, w.loss = 1e-3*first, Loss{}
	total, err := w.descend(x)
	if err != nil {
		return nil, err
	}
	w.loss = loss
	for range 50 {
		was := w.scale
		w.scale = math.Max(w.scatter(), 1e-9*first) // the model may meet every point
		if math.Abs(w.scale-was) <= 1e-6*w.scale {
			break
		}
		steps, err := w.descend(x)
		total += steps
		if err != nil {
			return nil, err
		}
	}
	return w.result(x, total)
}

// scatter is the size of the residuals of points relative to their σ.
func (w *work) scatter() float64 {
	n := len(w.Measured)
	taken := float64(len(w.Parameters) - len(w.priors))
	if w.loss.c > 0 {
		return spread(w.residual[:n], math.Max(taken, 0))
	}
	sum := 0.0
	for _, r := range w.residual[:n] {
		sum += r * r
	}
	return math.Sqrt(sum / math.Max(float64(n)-math.Max(taken, 0), 1))
}

// descend runs Levenberg–Marquardt from x to a minimum, in place.
func (w *work) descend(x []float64) (steps int, err error) {
	const (
		enough   = 1e-15 // relative fall of the cost that is no progress any more
		still    = 1e-11 // relative step that is no step any more
		hopeless = 1e+16 // damping at which no step is left
	)
	most := w.MaxIterations
	if most == 0 {
		most = 500
	}
	m, rows := len(x), len(w.residual)
	size := make([]float64, m) // of the columns, the largest met: Marquardt's scaling
	trial, step := make([]float64, m), make([]float64, m)
	root := make([]float64, rows)
	cost, err := w.at(x)
	if err != nil {
		return 0, fmt.Errorf("at the start: %w: %w", err, ErrProblem)
	}
	damping, growth := 1e-3, 2.0
	for steps = 0; steps < most; steps++ {
		if err := w.differentiate(x); err != nil {
			return steps, fmt.Errorf("%w: %w", err, ErrDiverged)
		}
		w.weights(root)
		free := w.free(x, root)
		if len(free) == 0 {
			return steps, nil
		}
		for _, j := range free {
			norm := 0.0
			for i := range rows {
				norm = math.Hypot(norm, root[i]*w.jacobian.At(i, j))
			}
			size[j] = math.Max(size[j], norm)
		}
		for {
			predicted, ok := w.step(step, free, root, size, damping)
			moved := 0.0
			for j := range x {
				trial[j] = math.Min(math.Max(x[j]+step[j], w.lower[j]), w.higher[j])
				moved = math.Max(moved, math.Abs(trial[j]-x[j])/math.Max(math.Abs(x[j]), 1e-8*w.Parameters[j].typical()))
			}
			now, bad := math.Inf(1), error(nil)
			if ok {
				now, bad = w.try(trial)
			}
			gain := (cost - now) / predicted
			if ok && bad == nil && now <= cost && predicted > 0 {
				done := cost-now <= enough*cost && predicted <= enough*cost || moved <= still
				copy(x, trial)
				w.take()
				cost = now
				damping *= math.Max(1.0/3, 1-math.Pow(2*gain-1, 3))
				damping = math.Max(damping, 1e-14)
				growth = 2
				if done {
					return steps + 1, w.settle(x)
				}
				break
			}
			if ok && bad == nil && (predicted <= enough*cost || moved <= still) {
				// The cost cannot tell any more, the step still can: it is
				// right to more digits than the cost's fall.
				if now <= cost*(1+1e-13) {
					copy(x, trial)
					w.take()
				}
				return steps, w.settle(x)
			}
			if damping *= growth; damping > hopeless {
				return steps, fmt.Errorf("no step from %s helps: %w", w.describe(x), ErrDiverged)
			}
			growth *= 2
		}
	}
	return steps, fmt.Errorf("%d steps were not enough, now at %s: %w", most, w.describe(x), ErrDiverged)
}

// settle leaves the jacobian as it is at x.
func (w *work) settle(x []float64) error {
	if err := w.differentiate(x); err != nil {
		return fmt.Errorf("%w: %w", err, ErrDiverged)
	}
	return nil
}

// free returns the parameters that may move: not those at a bound which the
// cost pushes against.
func (w *work) free(x, root []float64) []int {
	var free []int
	for j := range x {
		slope := 0.0 // of half the cost
		for i := range w.residual {
			slope += root[i] * root[i] * w.jacobian.At(i, j) * w.residual[i]
		}
		if x[j] <= w.lower[j] && slope >= 0 || x[j] >= w.higher[j] && slope <= 0 {
			continue
		}
		free = append(free, j)
	}
	return free
}

// step solves the damped linear problem for the free parameters and returns
// the fall of the cost that it predicts; ok is false where it cannot be
// solved.
func (w *work) step(step []float64, free []int, root, size []float64, damping float64) (predicted float64, ok bool) {
	for j := range step {
		step[j] = 0
	}
	rows := len(w.residual)
	a := mat.NewDense(rows+len(free), len(free), nil)
	b := mat.NewVecDense(rows+len(free), nil)
	for i := range rows {
		for c, j := range free {
			if size[j] > 0 {
				a.Set(i, c, root[i]*w.jacobian.At(i, j)/size[j])
			}
		}
		b.SetVec(i, -root[i]*w.residual[i])
	}
	for c := range free {
		a.Set(rows+c, c, math.Sqrt(damping))
	}
	var qr mat.QR
	qr.Factorize(a)
	var z mat.VecDense
	if err := qr.SolveVecTo(&z, false, b); err != nil && z.IsEmpty() {
		return 0, false
	}
	// predicted = |r|² − |r + J·step|², of the linear model.
	var before, after float64
	for i := range rows {
		r := root[i] * w.residual[i]
		linear := r
		for c := range free {
			linear += a.At(i, c) * z.AtVec(c)
		}
		before += r * r
		after += linear * linear
	}
	for c, j := range free {
		if size[j] > 0 {
			step[j] = z.AtVec(c) / size[j]
		}
		if !finite(step[j]) {
			return 0, false
		}
	}
	return before - after, true
}

func (w *work) describe(x []float64) string {
	text := ""
	for j, q := range w.Parameters {
		if j > 0 {
			text += ", "
		}
		text += fmt.Sprintf("%s = %.4g", q.Name, x[j])
	}
	return text
}
