package fit

import (
	"errors"
	"fmt"
	"math"
)

// Errors of Solve, for errors.Is.
var (
	ErrProblem  = errors.New("the problem cannot be fitted")     // refused before the first step
	ErrUnseen   = errors.New("the data cannot tell")             // a combination of parameters is free
	ErrDiverged = errors.New("the fit did not come to a result") // no step helped, or too many were needed
)

// Parameter is one number to be found.
type Parameter struct {
	Name         string
	Start        float64
	Lower, Upper float64 // bounds; both zero: none. One-sided with ±Inf
	// Prior and PriorSigma say what was known before; PriorSigma zero: nothing.
	Prior, PriorSigma float64
	// Typical is the size at which a change of the parameter matters; zero:
	// the size of Start, or 1 where that is zero too.
	Typical float64
}

func (p Parameter) bounded() bool { return p.Lower != 0 || p.Upper != 0 }

func (p Parameter) typical() float64 {
	switch {
	case p.Typical > 0:
		return p.Typical
	case p.Start != 0:
		return math.Abs(p.Start)
	case p.PriorSigma > 0:
		return p.PriorSigma
	}
	return 1
}

// Problem is what is to be fitted.
type Problem struct {
	Parameters []Parameter
	Measured   []float64
	// Sigma is the standard uncertainty of each measured value. Nil: all are
	// equal and unknown, and the scatter about the fit says how large.
	Sigma []float64
	// Relative says that Sigma gives the ratios only and that the scatter
	// about the fit says how large they are.
	Relative bool
	// Model writes the value that the parameters give for each point into
	// dst, which has the length of Measured. An error, or a value that is
	// not finite, means that the model does not hold there: the step is
	// taken shorter.
	Model func(dst, parameters []float64) error
	Loss  Loss
	// MaxIterations bounds the steps; zero: 500.
	MaxIterations int
}

// scattered reports whether the size of the uncertainties comes from the data.
func (p *Problem) scattered() bool { return p.Sigma == nil || p.Relative }

func (p *Problem) check() error {
	refuse := func(format string, args ...any) error {
		return fmt.Errorf("%s: %w", fmt.Sprintf(format, args...), ErrProblem)
	}
	if p.Model == nil || len(p.Parameters) == 0 || len(p.Measured) == 0 {
		return refuse("%d parameters, %d points, model given: %t; expected some of each", len(p.Parameters), len(p.Measured), p.Model != nil)
	}
	if p.Sigma != nil && len(p.Sigma) != len(p.Measured) {
		return refuse("%d uncertainties for %d points", len(p.Sigma), len(p.Measured))
	}
	for i, y := range p.Measured {
		if !finite(y) {
			return refuse("point %d is not a number", i+1)
		}
		if p.Sigma != nil && !(p.Sigma[i] > 0 && finite(p.Sigma[i])) {
			return refuse("point %d has the uncertainty %v, expected above zero", i+1, p.Sigma[i])
		}
	}
	priors := 0
	for _, q := range p.Parameters {
		switch {
		case !finite(q.Start):
			return refuse("%s does not start at a number", q.Name)
		case q.bounded() && !(q.Lower < q.Upper):
			return refuse("%s has the bounds %v to %v", q.Name, q.Lower, q.Upper)
		case q.bounded() && !(q.Start >= q.Lower && q.Start <= q.Upper):
			return refuse("%s starts at %v, outside %v to %v", q.Name, q.Start, q.Lower, q.Upper)
		case q.PriorSigma < 0 || !finite(q.PriorSigma) || !finite(q.Prior):
			return refuse("%s has the prior %v ± %v", q.Name, q.Prior, q.PriorSigma)
		case q.Typical < 0 || !finite(q.Typical):
			return refuse("%s has the typical size %v", q.Name, q.Typical)
		}
		if q.PriorSigma > 0 {
			priors++
		}
	}
	spare := len(p.Measured) + priors - len(p.Parameters)
	if spare < 0 {
		return refuse("%d points and %d priors for %d parameters: too few", len(p.Measured), priors, len(p.Parameters))
	}
	if spare == 0 && p.scattered() {
		return refuse("%d points and %d priors for %d parameters: none is left to tell the scatter", len(p.Measured), priors, len(p.Parameters))
	}
	if p.Loss.c < 0 || !finite(p.Loss.c) {
		return refuse("loss with the corner %v", p.Loss.c)
	}
	return nil
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
