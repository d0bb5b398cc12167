package flow

import (
	"fmt"
	"math"
	"strings"
	"time"

	"gonum.org/v1/gonum/mat"

	"barline/model/unit"
)

// RisePoint is one reading of a closed volume.
type RisePoint struct {
	At          time.Duration // bench time, ascending
	Pressure    unit.Pascal
	Temperature unit.Kelvin // of the gas as measured, or of the wall
}

// RiseSpec says what is known about the volume.
type RiseSpec struct {
	Volume    unit.CubicMetre
	Reference unit.Kelvin // pV flows are given at this temperature; 0 is 293.15 K
	// Gas gives the amount from its virial equation. Zero counts as ideal: in
	// argon at 10 bar that mistakes 3 % of what temperature does for a leak,
	// in xenon a fifth.
	Gas Medium
	// Age is how long the walls have been under vacuum at the first reading:
	// outgassing goes as 1/t from there. Zero leaves outgassing out, as in a
	// vessel under pressure.
	Age time.Duration
	// WallTime is the time constant of the gas for the wall's temperature.
	// Zero leaves cooling out, as where the gas itself is measured.
	WallTime time.Duration
	// Noise is the standard deviation of one pressure reading; zero takes it
	// from the scatter about the fit.
	Noise unit.Pascal
}

// Estimate is a value with its standard uncertainty.
type Estimate struct{ Value, Sigma float64 }

// Significant reports whether e is more than k sigma from zero.
func (e Estimate) Significant(k float64) bool { return math.Abs(e.Value) > k*e.Sigma }

// Rise is what a rate-of-rise test says. Flows are positive into the volume,
// in Pa m³/s at the reference temperature.
type Rise struct {
	Total      Estimate // mean over the test, from first and last amounts
	Leak       Estimate // the straight part
	Outgassing Estimate // the part that goes as 1/t, as it is at the last reading
	// Excess is by how many kelvin the gas was warmer than measured at the
	// first reading: positive cools down and looks like a loss.
	Excess Estimate
	// LeakOutgassing and LeakCooling are the correlations of the estimates in
	// the best fit. Near ±1 the data cannot tell them apart: measure longer.
	LeakOutgassing, LeakCooling float64
	Residual                    unit.Pascal // root mean square about the fit
	Points                      int
	Verdict                     Verdict
}

// Verdict names the cause of a pressure that changes in a closed volume.
type Verdict uint8

const (
	Tight      Verdict = iota // nothing beyond the noise
	Leaking                   // a straight line
	Outgassing                // flattening
	Cooling                   // temperature still moving
	Undecided                 // something, but these data do not tell what
)

var verdictText = [...]string{"tight", "leak", "outgassing", "temperature still settling", "cannot be told apart yet"}

// String returns the verdict as the screen and the record write it.
func (v Verdict) String() string { return verdictText[v] }

// MolarRise returns the mean flow into a closed volume in mol/s:
//
//	ṅ = (V/R)·(p₂/T₂ − p₁/T₁)/(t₂ − t₁)
//
// Source: 40 CFR 1065.644, vacuum-decay leak rate. It refuses readings that do
// not follow each other in time.
func MolarRise(v unit.CubicMetre, first, last RisePoint) (float64, error) {
	dt := (last.At - first.At).Seconds()
	if !(dt > 0) {
		return 0, fmt.Errorf("readings at %v and %v: %w: time does not rise", first.At, last.At, ErrRange)
	}
	for _, p := range [...]RisePoint{first, last} {
		if err := checkState(p.Pressure, p.Temperature); err != nil {
			return 0, err
		}
	}
	if !(v > 0) {
		return 0, fmt.Errorf("volume %v m3: %w: wanted above zero", float64(v), ErrRange)
	}
	return float64(v)/GasConstant*float64(last.Pressure)/float64(last.Temperature)/dt -
		float64(v)/GasConstant*float64(first.Pressure)/float64(first.Temperature)/dt, nil
}

// FitRise fits the amount of gas in a closed volume over time,
//
//	n·R·T_ref = y₀ + Q·t + K·ln(1 + t/age) + A·(e^(−t/τ) − 1)
//
// by linear least squares: a leak is straight, outgassing as 1/t flattens,
// gas that is warmer than what the thermometer sees decays with the wall's
// time constant. Every choice of terms is fitted and weighted by its Bayesian
// information criterion, so that what these data cannot tell apart shows as
// uncertainty. Scatter or stated noise, whichever is larger, is widened by the
// correlation of successive residuals. It wants at least eight readings.
func FitRise(spec RiseSpec, points []RisePoint) (Rise, error) {
	const fewest = 8
	if len(points) < fewest {
		return Rise{}, fmt.Errorf("rate of rise from %d readings: %w: wanted at least %d", len(points), ErrRange, fewest)
	}
	reference := spec.Reference
	if reference == 0 {
		reference = referenceTemperature
	}
	if !(spec.Volume > 0) {
		return Rise{}, fmt.Errorf("volume %v m3: %w: wanted above zero", float64(spec.Volume), ErrRange)
	}
	n := len(points)
	y, t := make([]float64, n), make([]float64, n)
	for i, p := range points {
		if err := checkState(p.Pressure, p.Temperature); err != nil {
			return Rise{}, fmt.Errorf("reading %d: %w", i+1, err)
		}
		if i > 0 && p.At <= points[i-1].At {
			return Rise{}, fmt.Errorf("reading %d at %v: %w: not after the one before, at %v", i+1, p.At, ErrRange, points[i-1].At)
		}
		t[i] = (p.At - points[0].At).Seconds()
		amount := float64(p.Pressure) / (GasConstant * float64(p.Temperature))
		if spec.Gas.Virial != nil {
			rho, err := spec.Gas.Density(p.Pressure, p.Temperature)
			if err != nil {
				return Rise{}, fmt.Errorf("reading %d: %w", i+1, err)
			}
			amount = float64(rho)
		}
		y[i] = amount * float64(spec.Volume) * GasConstant * float64(reference)
	}
	noise := float64(spec.Noise) * float64(spec.Volume)
	tau, age := spec.WallTime.Seconds(), spec.Age.Seconds()
	terms := []func(float64) float64{func(t float64) float64 { return t }}
	kinds := []int{0}
	if age > 0 {
		terms, kinds = append(terms, func(t float64) float64 { return math.Log1p(t / age) }), append(kinds, 1)
	}
	if tau > 0 {
		terms, kinds = append(terms, func(t float64) float64 { return math.Expm1(-t / tau) }), append(kinds, 2)
	}
	var fits []fitted
	for subset := range 1 << len(terms) {
		if f, ok := leastSquares(t, y, terms, kinds, subset, noise); ok {
			fits = append(fits, f)
		}
	}
	if len(fits) == 0 {
		return Rise{}, fmt.Errorf("rate of rise over %v: %w: the fit is singular", points[n-1].At-points[0].At, ErrRange)
	}
	best := fits[0] // the constant
	for _, f := range fits {
		if f.score < best.score {
			best = f
		}
	}
	last := t[n-1]
	r := Rise{Points: n, Residual: unit.Pascal(best.rms / float64(spec.Volume))}
	r.Total = Estimate{(y[n-1] - y[0]) / last, math.Sqrt2 * best.sigma / last}
	r.Leak = average(fits, best.score, 0, 1)
	if age > 0 {
		r.Outgassing = average(fits, best.score, 1, 1/(age+last))
	}
	kelvin := float64(points[0].Temperature) / y[0]
	if tau > 0 {
		r.Excess = average(fits, best.score, 2, kelvin)
	}
	r.LeakOutgassing, r.LeakCooling = best.correlation(0, 1), best.correlation(0, 2)
	switch {
	case fits[0].terms == 0 && fits[0].score < best.score+decisive:
		r.Verdict = Tight
	default:
		r.Verdict = Undecided
		most := 0.0
		for _, c := range []struct {
			v     Verdict
			e     Estimate
			moved float64 // Pa m³ over the test
		}{
			{Leaking, r.Leak, r.Leak.Value * last},
			{Outgassing, r.Outgassing, r.Outgassing.Value * (age + last) * math.Log1p(last/max(age, 1e-9))},
			{Cooling, r.Excess, r.Excess.Value / kelvin * math.Expm1(-last/max(tau, 1e-9))},
		} {
			if c.e.Significant(3) && math.Abs(c.moved) > most {
				r.Verdict, most = c.v, math.Abs(c.moved)
			}
		}
	}
	return r, nil
}

// decisive is the difference of the information criterion that counts as
// strong evidence: A.E. Raftery, Sociol. Methodol. 25, 111 (1995).
const decisive = 6

// average returns the coefficient of a kind times factor over all fits, each
// weighted by exp(−Δ/2) of its criterion. A fit without the term counts as
// zero, so that the uncertainty holds what the data leave open.
func average(fits []fitted, best float64, kind int, factor float64) Estimate {
	weight, sum, square := 0.0, 0.0, 0.0
	for _, f := range fits {
		w := math.Exp(-(f.score - best) / 2)
		weight += w
		if j := f.index[kind]; j != 0 {
			v := f.coefficient[j] * factor
			sum += w * v
			square += w * (v*v + f.covariance.At(j, j)*factor*factor)
		}
	}
	mean := sum / weight
	return Estimate{mean, math.Sqrt(max(0, square/weight-mean*mean))}
}

// fitted is one least-squares fit of y₀ and some of the three terms.
type fitted struct {
	score       float64 // Bayesian information criterion
	rms, sigma  float64 // about the fit; of one reading as it counts, in Pa m³
	terms       int
	index       [3]int // column of each kind, 0 where it is left out
	coefficient []float64
	covariance  *mat.SymDense
}

func leastSquares(t, y []float64, terms []func(float64) float64, kinds []int, subset int, noise float64) (fitted, bool) {
	n := len(t)
	f := fitted{}
	var columns []func(float64) float64
	for k, term := range terms {
		if subset&(1<<k) != 0 {
			columns = append(columns, term)
			f.index[kinds[k]] = len(columns)
		}
	}
	f.terms = len(columns)
	m := f.terms + 1
	if n <= m+1 {
		return f, false
	}
	// Columns scaled to a largest value of one keep the system well conditioned.
	scale := make([]float64, m)
	a := mat.NewDense(n, m, nil)
	for j := range m {
		scale[j] = 1
		if j > 0 {
			scale[j] = math.Abs(columns[j-1](t[n-1]))
		}
		for i := range n {
			v := 1.0
			if j > 0 {
				v = columns[j-1](t[i]) / scale[j]
			}
			a.Set(i, j, v)
		}
	}
	offset := y[0]
	b := mat.NewVecDense(n, nil)
	for i := range n {
		b.SetVec(i, y[i]-offset)
	}
	var qr mat.QR
	qr.Factorize(a)
	if c := qr.Cond(); !(c < 1e6) {
		return f, false
	}
	var x mat.VecDense
	if err := qr.SolveVecTo(&x, false, b); err != nil {
		return f, false
	}
	sum, cross, previous := 0.0, 0.0, 0.0
	for i := range n {
		e := b.AtVec(i)
		for j := range m {
			e -= a.At(i, j) * x.AtVec(j)
		}
		sum += e * e
		cross += e * previous
		previous = e
	}
	f.rms = math.Sqrt(sum / float64(n-m))
	f.sigma = max(f.rms, noise)
	floor := 1e-12 * math.Abs(offset) // where the data are exact, rounding is what is left
	if noise > 0 {
		f.score = sum/(noise*noise) + float64(m)*math.Log(float64(n))
	} else {
		f.score = float64(n)*math.Log(sum/float64(n)+floor*floor) + float64(m)*math.Log(float64(n))
	}
	// Readings that follow each other count for less: a first-order process
	// widens by (1+r)/(1−r).
	if r := cross / (sum + 1e-300); r > 0 && sum > 0 {
		f.sigma *= math.Sqrt((1 + min(r, 0.95)) / (1 - min(r, 0.95)))
	}
	var normal mat.SymDense
	normal.SymOuterK(1, a.T())
	var ch mat.Cholesky
	if !ch.Factorize(&normal) {
		return f, false
	}
	f.covariance = mat.NewSymDense(m, nil)
	if err := ch.InverseTo(f.covariance); err != nil {
		return f, false
	}
	f.coefficient = make([]float64, m)
	for j := range m {
		f.coefficient[j] = x.AtVec(j) / scale[j]
		for k := j; k < m; k++ {
			f.covariance.SetSym(j, k, f.covariance.At(j, k)*f.sigma*f.sigma/(scale[j]*scale[k]))
		}
	}
	return f, true
}

func (f fitted) correlation(a, b int) float64 {
	i, j := f.index[a], f.index[b]
	if i == 0 || j == 0 {
		return 0
	}
	return f.covariance.At(i, j) / math.Sqrt(f.covariance.At(i, i)*f.covariance.At(j, j))
}

// String writes the result on one line, with the leak in both units.
func (r Rise) String() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%v: ", r.Verdict)
	say := func(what string, e Estimate) {
		fmt.Fprintf(&b, "%s %s ± %.1g Pa m3/s", what, LeakText(unit.PascalCubicMetrePerSecond(e.Value)), e.Sigma)
	}
	say("total", r.Total)
	if r.Leak != (Estimate{}) {
		b.WriteString("; ")
		say("leak", r.Leak)
	}
	if r.Outgassing != (Estimate{}) {
		b.WriteString("; ")
		say("outgassing now", r.Outgassing)
	}
	if r.Excess != (Estimate{}) {
		fmt.Fprintf(&b, "; gas %.2g ± %.1g K warmer than measured at the start", r.Excess.Value, r.Excess.Sigma)
	}
	return b.String()
}
