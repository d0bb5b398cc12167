package fit

import (
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// stackLoss is the oxidation of ammonia of Brownlee, Statistical Theory and
// Methodology in Science and Engineering, 2nd ed. (1965), p. 454: air flow,
// water temperature, acid concentration, loss.
var stackLoss = [][4]float64{
	{80, 27, 89, 42}, {80, 27, 88, 37}, {75, 25, 90, 37}, {62, 24, 87, 28}, {62, 22, 87, 18}, {62, 23, 87, 18}, {62, 24, 93, 19},
	{62, 24, 93, 20}, {58, 23, 87, 15}, {58, 18, 80, 14}, {58, 18, 89, 14}, {58, 17, 88, 13}, {58, 18, 82, 11}, {58, 19, 93, 12},
	{50, 18, 89, 8}, {50, 18, 86, 7}, {50, 19, 72, 8}, {50, 19, 79, 8}, {50, 20, 80, 9}, {56, 20, 82, 15}, {70, 20, 91, 15},
}

func stackLossProblem() *Problem {
	p := &Problem{Parameters: []Parameter{{Name: "intercept"}, {Name: "air"}, {Name: "water"}, {Name: "acid"}}}
	for _, row := range stackLoss {
		p.Measured = append(p.Measured, row[3])
	}
	p.Model = func(dst, b []float64) error {
		for i, row := range stackLoss {
			dst[i] = b[0] + b[1]*row[0] + b[2]*row[1] + b[3]*row[2]
		}
		return nil
	}
	return p
}

// The published values are those of Venables & Ripley, Modern Applied
// Statistics with S, 4th ed. (2002), sections 6.2 and 6.5 (from memory), to
// the digits printed: least squares, and Huber's M-estimate with corner 1.345
// at the scale 2.441 that was found there.
func TestStackLoss(t *testing.T) {
	agree := func(what string, got, want []float64, tolerance float64) {
		t.Helper()
		for i := range want {
			if math.Abs(got[i]-want[i]) > tolerance {
				t.Errorf("%s %d is %.6f, published %v", what, i, got[i], want[i])
			}
		}
	}
	r, err := Solve(stackLossProblem())
	if err != nil {
		t.Fatal(err)
	}
	agree("least squares", r.Parameters, []float64{-39.9197, 0.7156, 1.2953, -0.1521}, 6e-5)
	agree("its deviation", r.Sigma, []float64{11.8960, 0.1349, 0.3680, 0.1563}, 6e-5)
	agree("residual deviation", []float64{r.Scatter}, []float64{3.243}, 6e-4)

	p := stackLossProblem()
	p.Loss = Huber()
	for range p.Measured {
		p.Sigma = append(p.Sigma, 2.441)
	}
	if r, err = Solve(p); err != nil {
		t.Fatal(err)
	}
	agree("Huber", r.Parameters, []float64{-41.0265, 0.8294, 0.9261, -0.1278}, 6e-4)
	if r.Weights[20] > 0.4 || r.Weights[3] > 0.6 || r.Weights[9] != 1 {
		t.Errorf("weights of the outliers 4 and 21: %.3f, %.3f", r.Weights[3], r.Weights[20])
	}

	p.Sigma = nil
	if r, err = Solve(p); err != nil {
		t.Fatal(err)
	}
	// Huber's estimating equations hold at the scale that was found.
	var sum [4]float64
	for i, row := range stackLoss {
		psi := r.Weights[i] * r.Residuals[i] / r.Scatter
		for j, x := range []float64{1, row[0], row[1], row[2]} {
			sum[j] += psi * x
		}
	}
	agree("Huber, scale found: equation", sum[:], []float64{0, 0, 0, 0}, 1e-4)
	agree("Huber, scale found: scale", []float64{spread(r.Residuals, 4)}, []float64{r.Scatter}, 1e-4)
}

// line is y = a + b x at x = 0 … n−1.
func line(y []float64, sigma []float64, a, b Parameter) *Problem {
	return &Problem{Parameters: []Parameter{a, b}, Measured: y, Sigma: sigma, Model: func(dst, p []float64) error {
		for i := range dst {
			dst[i] = p[0] + p[1]*float64(i)
		}
		return nil
	}}
}

func near(t *testing.T, what string, got, want, relative float64) {
	t.Helper()
	if !(math.Abs(got-want) <= relative*math.Abs(want)) {
		t.Errorf("%s is %v, want %v", what, got, want)
	}
}

// The weighted straight line has a closed form (Press et al., Numerical
// Recipes, 3rd ed., section 15.2).
func TestWeightedLine(t *testing.T) {
	y, sigma := []float64{1.1, 2.7, 5.2, 6.8, 9.4, 10.7}, []float64{0.1, 0.3, 0.1, 0.5, 0.2, 0.7}
	var s, sx, sy, sxx, sxy float64
	for i := range y {
		w, x := 1/(sigma[i]*sigma[i]), float64(i)
		s, sx, sy, sxx, sxy = s+w, sx+w*x, sy+w*y[i], sxx+w*x*x, sxy+w*x*y[i]
	}
	d := s*sxx - sx*sx
	a, b := (sxx*sy-sx*sxy)/d, (s*sxy-sx*sy)/d
	r, err := Solve(line(y, sigma, Parameter{Name: "a"}, Parameter{Name: "b"}))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "a", r.Parameters[0], a, 1e-9)
	near(t, "b", r.Parameters[1], b, 1e-9)
	near(t, "sigma of a", r.Sigma[0], math.Sqrt(sxx/d), 1e-8)
	near(t, "sigma of b", r.Sigma[1], math.Sqrt(s/d), 1e-8)
	near(t, "correlation", r.Correlation(0, 1), -sx/math.Sqrt(s*sxx), 1e-8)
	if r.Freedom != 4 || r.Scattered {
		t.Errorf("freedom %d, scattered %v", r.Freedom, r.Scattered)
	}
	relative := line(y, sigma, Parameter{Name: "a"}, Parameter{Name: "b"})
	relative.Relative = true
	q, err := Solve(relative)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "sigma of a, ratios only", q.Sigma[0], r.Sigma[0]*math.Sqrt(r.SumOfSquares/4), 1e-8)
}

// With a normal prior the posterior of a mean is known in closed form.
func TestPriorIsWeighedAgainstTheData(t *testing.T) {
	y := []float64{10.2, 9.9, 10.4}
	p := &Problem{
		Parameters: []Parameter{{Name: "mean", Start: 5, Prior: 9, PriorSigma: 0.2}}, Measured: y, Sigma: []float64{0.3, 0.3, 0.3},
		Model: func(dst, b []float64) error {
			for i := range dst {
				dst[i] = b[0]
			}
			return nil
		},
	}
	r, err := Solve(p)
	if err != nil {
		t.Fatal(err)
	}
	data, prior := 3/0.09, 1/0.04
	near(t, "mean", r.Parameters[0], (30.5/3*data+9*prior)/(data+prior), 1e-10)
	near(t, "sigma", r.Sigma[0], 1/math.Sqrt(data+prior), 1e-9)
	near(t, "share told by the data", r.Seen[0].Told, data/(data+prior), 1e-9)
}

func TestPriorHoldsWhatTheDataCannotSee(t *testing.T) {
	p := line([]float64{2, 2, 2.1, 1.9}, []float64{0.1, 0.1, 0.1, 0.1}, Parameter{Name: "index-scale", Start: 1}, Parameter{Name: "core-radius", Start: 1})
	p.Model = func(dst, b []float64) error { // only the product is seen
		for i := range dst {
			dst[i] = b[0] * b[1]
		}
		return nil
	}
	r, err := Solve(p)
	if !errors.Is(err, ErrUnseen) || !strings.Contains(err.Error(), "index-scale") || !strings.Contains(err.Error(), "core-radius") || !strings.Contains(err.Error(), "apart") {
		t.Fatalf("a product was taken apart: %v", err)
	}
	if r == nil || len(r.Seen) != 2 || r.Seen[0].Told != 1 {
		t.Errorf("what the data could tell: %+v", r)
	}
	t.Log(err)
	for j := range p.Parameters {
		p.Parameters[j].Prior, p.Parameters[j].PriorSigma = 1.4, 0.2
	}
	r, err = Solve(p)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "product", r.Parameters[0]*r.Parameters[1], 2, 0.01)
	if c := r.Correlation(0, 1); c > -0.9 {
		t.Errorf("correlation %v, want near -1", c)
	}
	if last := r.Seen[1]; last.Told > 0.01 || math.Abs(last.Sigma-1) > 0.01 {
		t.Errorf("the ratio is known from the prior alone: %+v", last)
	}
}

func TestOneValueOfXSeesNoSlope(t *testing.T) {
	p := line([]float64{2, 2.1, 1.9}, nil, Parameter{Name: "a"}, Parameter{Name: "slope"})
	p.Model = func(dst, b []float64) error { // all at one pressure
		for i := range dst {
			dst[i] = b[0] + 3*b[1]
		}
		return nil
	}
	if _, err := Solve(p); !errors.Is(err, ErrUnseen) {
		t.Errorf("error %v", err)
	}
	p.Model = func(dst, b []float64) error { // no influence at all
		for i := range dst {
			dst[i] = b[0]
		}
		return nil
	}
	if _, err := Solve(p); !errors.Is(err, ErrUnseen) || !strings.Contains(err.Error(), "slope") || strings.Contains(err.Error(), "apart") {
		t.Errorf("error %v", err)
	}
}

func TestBoundsHold(t *testing.T) {
	y := []float64{1, 3, 5, 7} // a = 1, b = 2
	r, err := Solve(line(y, []float64{1, 1, 1, 1}, Parameter{Name: "a"}, Parameter{Name: "b", Start: 1, Lower: 0, Upper: 1.5}))
	if err != nil {
		t.Fatal(err)
	}
	if r.Parameters[1] != 1.5 || !r.AtBound[1] || r.Sigma[1] != 0 || r.Freedom != 3 {
		t.Errorf("b = %v, at bound %v, sigma %v, freedom %d", r.Parameters[1], r.AtBound[1], r.Sigma[1], r.Freedom)
	}
	near(t, "a beside it", r.Parameters[0], 4-1.5*1.5, 1e-9)
	near(t, "its sigma", r.Sigma[0], 0.5, 1e-8)
	inside, err := Solve(line(y, []float64{1, 1, 1, 1}, Parameter{Name: "a"}, Parameter{Name: "b", Start: 0, Lower: 0, Upper: math.Inf(1)}))
	if err != nil || inside.AtBound[1] {
		t.Fatalf("a start at the bound sticks: %v", err)
	}
	near(t, "b", inside.Parameters[1], 2, 1e-9)
}

func TestAModelThatEndsIsKeptInside(t *testing.T) {
	y := []float64{math.Sqrt(0.1), math.Sqrt(1.1), math.Sqrt(2.1), math.Sqrt(3.1), math.Sqrt(4.1)}
	refused := 0
	for _, start := range [][2]float64{{3, 8}, {0.1, 1}, {10, 0.01}, {0.1, 50}} {
		p := line(y, nil, Parameter{Name: "scale", Start: start[0]}, Parameter{Name: "shift", Start: start[1]})
		p.Model = func(dst, b []float64) error {
			if b[1] < 0 {
				refused++
				return errors.New("root of a negative number")
			}
			for i := range dst {
				dst[i] = b[0] * math.Sqrt(float64(i)+b[1])
			}
			return nil
		}
		r, err := Solve(p)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "scale", r.Parameters[0], 1, 1e-6)
		near(t, "shift", r.Parameters[1], 0.1, 1e-6)
	}
	if refused == 0 {
		t.Error("the model's end was never met: the test proves nothing")
	}
}

func TestRefused(t *testing.T) {
	good := func() *Problem { return line([]float64{1, 2, 3}, nil, Parameter{Name: "a"}, Parameter{Name: "b"}) }
	for name, change := range map[string]func(*Problem){
		"no points":           func(p *Problem) { p.Measured = nil },
		"no model":            func(p *Problem) { p.Model = nil },
		"no parameters":       func(p *Problem) { p.Parameters = nil },
		"NaN measured":        func(p *Problem) { p.Measured[1] = math.NaN() },
		"too few":             func(p *Problem) { p.Measured = p.Measured[:1] },
		"none for scatter":    func(p *Problem) { p.Measured = p.Measured[:2] },
		"sigma of zero":       func(p *Problem) { p.Sigma = []float64{1, 0, 1} },
		"sigma of NaN":        func(p *Problem) { p.Sigma = []float64{1, math.NaN(), 1} },
		"sigmas missing":      func(p *Problem) { p.Sigma = []float64{1} },
		"bounds reversed":     func(p *Problem) { p.Parameters[0].Lower, p.Parameters[0].Upper = 1, -1 },
		"start outside":       func(p *Problem) { p.Parameters[0].Lower, p.Parameters[0].Upper = 1, 2 },
		"negative prior":      func(p *Problem) { p.Parameters[0].PriorSigma = -1 },
		"start of NaN":        func(p *Problem) { p.Parameters[0].Start = math.NaN() },
		"model ends at start": func(p *Problem) { p.Model = func([]float64, []float64) error { return errors.New("no") } },
		"model gives NaN":     func(p *Problem) { p.Model = func(d, _ []float64) error { d[0] = math.NaN(); return nil } },
	} {
		p := good()
		change(p)
		if r, err := Solve(p); !errors.Is(err, ErrProblem) {
			t.Errorf("%s: %+v, %v", name, r, err)
		}
	}
	p := good()
	p.MaxIterations = 1
	p.Model = nistSets(t)[0].problem(nil).Model
	p.Measured = nistSets(t)[0].Y
	p.Parameters[0].Start, p.Parameters[1].Start = 500, 1e-4
	if _, err := Solve(p); !errors.Is(err, ErrDiverged) {
		t.Errorf("one step is enough: %v", err)
	}
}

// TestIntervalsCoverAsOftenAsTheySay fits a decay whose truth is known many
// times over, with the scatter known, unknown, and robustly found.
func TestIntervalsCoverAsOftenAsTheySay(t *testing.T) {
	const runs, points, sigma = 600, 8, 0.02
	truth := []float64{1.3, 0.45}
	for _, c := range []struct {
		name     string
		known    bool
		loss     Loss
		low, top float64 // of the share covered
	}{
		// 68.3 % within four standard deviations of a count of 1200; the two
		// parameters of a run are correlated, so of 600.
		{"scatter known", true, Loss{}, 0.607, 0.759},
		{"scatter from the fit", false, Loss{}, 0.607, 0.759},
		{"robust, scatter known", true, Huber(), 0.607, 0.80},
	} {
		rng := rand.New(rand.NewPCG(7, 11))
		covered := 0
		for range runs {
			p := &Problem{Parameters: []Parameter{{Name: "amplitude", Start: 1}, {Name: "rate", Start: 1}}, Loss: c.loss, Model: func(dst, b []float64) error {
				for i := range dst {
					dst[i] = b[0] * math.Exp(-b[1]*float64(i))
				}
				return nil
			}}
			for i := range points {
				p.Measured = append(p.Measured, truth[0]*math.Exp(-truth[1]*float64(i))+sigma*rng.NormFloat64())
				if c.known {
					p.Sigma = append(p.Sigma, sigma)
				}
			}
			r, err := Solve(p)
			if err != nil {
				t.Fatal(err)
			}
			for j := range truth {
				if math.Abs(r.Parameters[j]-truth[j]) <= r.Interval(j, 0.6827) {
					covered++
				}
			}
		}
		share := float64(covered) / (2 * runs)
		t.Logf("%s: the 68 %% interval covers %.1f %%", c.name, 100*share)
		if share < c.low || share > c.top {
			t.Errorf("%s: the 68 %% interval covers %.1f %%, want %.1f to %.1f %%", c.name, 100*share, 100*c.low, 100*c.top)
		}
	}
}

// A prior keeps its size in absolute terms where the scatter is learnt.
func TestPriorBesideUnknownScatter(t *testing.T) {
	y := []float64{10.2, 9.9, 10.4, 10.1, 9.8, 10.2}
	var mean, squares float64
	for _, v := range y {
		mean += v / 6
	}
	p := &Problem{Parameters: []Parameter{{Name: "mean", Start: 5, Prior: 12, PriorSigma: 0.5}}, Measured: y, Model: func(dst, b []float64) error {
		for i := range dst {
			dst[i] = b[0]
		}
		return nil
	}}
	r, err := Solve(p)
	if err != nil {
		t.Fatal(err)
	}
	for _, v := range y {
		squares += (v - r.Parameters[0]) * (v - r.Parameters[0])
	}
	s2 := squares / 6 // one parameter, one prior: none of the points is used up
	near(t, "mean", r.Parameters[0], (mean*6/s2+12/0.25)/(6/s2+4), 1e-5)
	near(t, "sigma", r.Sigma[0], 1/math.Sqrt(6/s2+4), 1e-5)
}

func BenchmarkMisra1a(b *testing.B) {
	c := nistSets(b)[0]
	for b.Loop() {
		if _, err := Solve(c.problem(c.Starts[1])); err != nil {
			b.Fatal(err)
		}
	}
}
