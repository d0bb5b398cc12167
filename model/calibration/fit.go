package calibration

import (
	"errors"
	"fmt"
	"math"
	"time"

	"gonum.org/v1/gonum/stat/distuv"

	"barline/model/emission"
	"barline/model/fit"
	"barline/model/reading"
	"barline/model/unit"
)

// ErrPoints says that too few points can be used.
var ErrPoints = errors.New("too few points")

// Point is one measured emission.
type Point struct {
	At     time.Time
	Input  emission.Input // pressure in the core, as measured
	Value  unit.Metre     // centroid, vacuum
	Sigma  unit.Metre     // standard uncertainty; 0: unknown
	Status reading.Status
}

// Request says what to fit.
type Request struct {
	Points []Point
	Peaks  bool // the spectrometer reports peaks
	Free   []Parameter
	// Prior is the standard uncertainty of each correction before; zero
	// fields of free parameters mean that nothing is known.
	Prior [ParameterCount]float64
	// Discrepancy is how far the model itself may be off, smoothly over
	// pressure, whatever its corrections; zero takes DefaultDiscrepancy.
	Discrepancy unit.Metre
	// Start is where the fit starts and what stays for what is not free,
	// such as the calibration in use.
	Start Corrections
}

const (
	// farthest is how far a point may lie from a branch to belong to it.
	farthest = 20 * unit.Nanometre
	// unknownSigma stands in where a point brings no uncertainty.
	unknownSigma = 0.1 * unit.Nanometre
)

// DefaultDiscrepancy is the standard uncertainty of the anchored answer that
// no correction takes up: what a real fibre does beyond the propagation's idea
// of it, and that the slopes of κ are taken at one density. Seen over 150
// simulated benches between 8 and 12 bar: 0.85 nm rms.
const DefaultDiscrepancy = 0.8 * unit.Nanometre

// Fit finds corrections from measured points. That the model is off by itself
// is part of the fit: a bend of the answer, smooth over pressure and energy, is found
// together with the corrections, so that these are not pulled to make up for
// what they cannot, and their uncertainty is honest (Kennedy & O'Hagan, J. R.
// Stat. Soc. B 63, 425 (2001), doi:10.1111/1467-9868.00294). Uncertainties of points are
// joined with the error of the nodes' interpolation; where the points scatter
// more than one in twenty times by chance, all uncertainties of the result are
// raised by the square root of χ² per degree of freedom (Birge, Phys. Rev. 40,
// 207 (1932), doi:10.1103/PhysRev.40.207).
func Fit(m *Model, r Request) (*Calibration, error) {
	if r.Peaks {
		return nil, errors.New("the spectrometer reports peaks and the anchored answer gives centroids: like cannot be compared with like")
	}
	if len(r.Free) == 0 {
		return nil, errors.New("no correction is to be fitted")
	}
	c := &Calibration{Corrections: r.Start, Digest: m.nodes.Bench().Spec().Digest()}
	used, branches := c.choose(m, r)
	if len(used) < 2 {
		return nil, fmt.Errorf("%d of %d points can be used, expected at least 2: %w%s", len(used), len(r.Points), ErrPoints, c.firstReason())
	}
	problem := &fit.Problem{Loss: fit.Huber()}
	interpolation := m.interpolation()
	for _, p := range used {
		sigma := p.Sigma
		if sigma == 0 {
			sigma = unknownSigma
		}
		problem.Measured = append(problem.Measured, float64(p.Value))
		problem.Sigma = append(problem.Sigma, math.Hypot(float64(sigma), float64(interpolation)))
	}
	typical := DefaultPrior()
	for _, q := range r.Free {
		problem.Parameters = append(problem.Parameters, fit.Parameter{
			Name: q.String(), Start: r.Start[q], PriorSigma: r.Prior[q], Typical: typical[q],
		})
	}
	discrepancy := r.Discrepancy
	if discrepancy == 0 {
		discrepancy = DefaultDiscrepancy
	}
	for k := range bendTerms {
		problem.Parameters = append(problem.Parameters, fit.Parameter{
			Name: fmt.Sprintf("bend %d", k), PriorSigma: bendPrior(k) * float64(discrepancy),
		})
	}
	c.rangeOf(used)
	at := r.Start
	problem.Model = func(dst, free []float64) error {
		for i, q := range r.Free {
			at[q] = free[i]
		}
		for i, p := range used {
			w, err := m.on(branches[i], p.Input, &at)
			if err != nil {
				return err
			}
			dst[i] = float64(w) + c.bent(free[len(r.Free):], p.Input)
		}
		return nil
	}
	before := make([]float64, len(used))
	start := make([]float64, len(problem.Parameters))
	for i, q := range r.Free {
		start[i] = r.Start[q]
	}
	if err := problem.Model(before, start); err != nil {
		return nil, err
	}
	result, err := fit.Solve(problem)
	if err != nil {
		return nil, err
	}
	c.fill(r, used, result, before, problem)
	return c, nil
}

// choose returns the points that can be used, and the branch of each.
func (c *Calibration) choose(m *Model, r Request) (used []Point, branches []int) {
	aside := func(i int, why string) { c.SetAside = append(c.SetAside, SetAside{i + 1, why}) }
	for i, p := range r.Points {
		switch {
		case !p.Status.Usable():
			aside(i, p.Status.String())
			continue
		case !(p.Value > 0) || math.IsInf(float64(p.Value), 0) || !(p.Sigma >= 0):
			aside(i, "the measured emission is no wavelength")
			continue
		}
		e, err := m.nearest(p.Input, &r.Start, p.Value)
		switch {
		case err != nil:
			aside(i, err.Error())
		case math.Abs(float64(e.Wavelength-p.Value)) > float64(farthest):
			aside(i, fmt.Sprintf("measured %v, the nearest branch is at %v", p.Value, e.Wavelength))
		default:
			used, branches = append(used, p), append(branches, e.Branch)
		}
	}
	return used, branches
}

func (c *Calibration) firstReason() string {
	if len(c.SetAside) == 0 {
		return ""
	}
	return fmt.Sprintf("; point %d: %s", c.SetAside[0].Point, c.SetAside[0].Why)
}

// fill writes down what was found.
func (c *Calibration) fill(r Request, used []Point, f *fit.Result, before []float64, problem *fit.Problem) {
	c.Points, c.Freedom, c.Reduced = len(used), f.Freedom, f.Reduced()
	raise := 1.0
	if f.Freedom > 0 && f.Reduced()*float64(f.Freedom) > (distuv.ChiSquared{K: float64(f.Freedom)}).Quantile(0.95) {
		raise = f.Scatter
	}
	for i, q := range r.Free {
		c.Corrections[q] = f.Parameters[i]
		v := Value{Parameter: q.String(), Unit: q.Unit(), Value: f.Parameters[i], Sigma: raise * f.Sigma[i], Prior: r.Prior[q]}
		if r.Prior[q] > 0 {
			v.Told = math.Max(0, 1-f.Sigma[i]*f.Sigma[i]/(r.Prior[q]*r.Prior[q]))
		} else {
			v.Told = 1
		}
		c.Values = append(c.Values, v)
		for j := range i {
			if k := f.Correlation(i, j); math.Abs(k) > 0.95 {
				c.Alike = append(c.Alike, Pair{r.Free[j].String(), q.String(), k})
			}
		}
	}
	for i := range f.Parameters {
		row := make([]float64, len(f.Parameters))
		for j := range row {
			row[j] = raise * raise * f.Covariance.At(i, j)
		}
		c.Covariance = append(c.Covariance, row)
	}
	copy(c.BendM[:], f.Parameters[len(r.Free):])
	for i, p := range used {
		was := float64(p.Value) - before[i]
		now := f.Residuals[i] * problem.Sigma[i]
		c.Before += was * was / float64(len(used))
		c.After += now * now / float64(len(used))
		if f.Weights[i] < 0.5 {
			c.Doubtful = append(c.Doubtful, fmt.Sprintf("%v: %+.2f nm off", p.Input.Pressure, 1e9*now))
		}
	}
	c.Before, c.After = math.Sqrt(c.Before), math.Sqrt(c.After)
}

// rangeOf notes what the points span.
func (c *Calibration) rangeOf(used []Point) {
	for i, p := range used {
		pressure, energy := float64(p.Input.Pressure), float64(p.Input.Energy)
		if i == 0 {
			c.From, c.To = p.At, p.At
			c.PressurePa, c.EnergyJ = [2]float64{pressure, pressure}, [2]float64{energy, energy}
		}
		if p.At.Before(c.From) {
			c.From = p.At
		}
		if p.At.After(c.To) {
			c.To = p.At
		}
		c.PressurePa = [2]float64{min(c.PressurePa[0], pressure), max(c.PressurePa[1], pressure)}
		c.EnergyJ = [2]float64{min(c.EnergyJ[0], energy), max(c.EnergyJ[1], energy)}
	}
}
