package fit

import (
	"encoding/json"
	"math"
	"os"
	"testing"
)

// certified is a data set of the NIST Statistical Reference Datasets,
// nonlinear regression, with its two starts (www.itl.nist.gov/div898/strd/nls).
type certified struct {
	Name         string
	Source       string
	X, Y         []float64
	Starts       [2][]float64
	Parameters   []float64
	Deviations   []float64
	SumOfSquares float64
	Freedom      int
}

var nistModels = map[string]func(x float64, b []float64) float64{
	"Misra1a": func(x float64, b []float64) float64 { return b[0] * (1 - math.Exp(-b[1]*x)) },
	"Thurber": func(x float64, b []float64) float64 {
		return (b[0] + x*(b[1]+x*(b[2]+x*b[3]))) / (1 + x*(b[4]+x*(b[5]+x*b[6])))
	},
	"MGH09": func(x float64, b []float64) float64 { return b[0] * (x*x + x*b[1]) / (x*x + x*b[2] + b[3]) },
}

func nistSets(t testing.TB) []certified {
	t.Helper()
	data, err := os.ReadFile("testdata/nist-strd.json")
	if err != nil {
		t.Fatal(err)
	}
	var sets []certified
	if err := json.Unmarshal(data, &sets); err != nil {
		t.Fatal(err)
	}
	if len(sets) != 3 {
		t.Fatalf("%d sets, want 3", len(sets))
	}
	return sets
}

func (c certified) problem(start []float64) *Problem {
	p := &Problem{Measured: c.Y, Model: func(dst, b []float64) error {
		for i, x := range c.X {
			dst[i] = nistModels[c.Name](x, b)
		}
		return nil
	}}
	for j, s := range start {
		p.Parameters = append(p.Parameters, Parameter{Name: string(rune('a' + j)), Start: s})
	}
	return p
}

// digits is the number of digits in which got agrees with the certified value.
func digits(got, want float64) float64 {
	if got == want {
		return 16
	}
	return -math.Log10(math.Abs(got-want) / math.Abs(want))
}

func TestCertifiedValuesFromBothStarts(t *testing.T) {
	for _, c := range nistSets(t) {
		for s, start := range c.Starts {
			r, err := Solve(c.problem(start))
			if err != nil {
				t.Errorf("%s from start %d: %v", c.Name, s+1, err)
				continue
			}
			worst, worstSD := 16.0, 16.0
			for j := range c.Parameters {
				worst = math.Min(worst, digits(r.Parameters[j], c.Parameters[j]))
				worstSD = math.Min(worstSD, digits(r.Sigma[j], c.Deviations[j]))
			}
			rss := digits(r.SumOfSquares, c.SumOfSquares)
			t.Logf("%s from start %d: %.1f digits, deviations %.1f, sum of squares %.1f, %d steps, %d evaluations", c.Name, s+1, worst, worstSD, rss, r.Steps, r.Evaluations)
			if worst < 6 || worstSD < 4 || rss < 8 || r.Freedom != c.Freedom {
				t.Errorf("%s from start %d: %v ± %v, sum of squares %v, freedom %d; certified %v ± %v", c.Name, s+1, r.Parameters, r.Sigma, r.SumOfSquares, r.Freedom, c.Parameters, c.Deviations)
			}
		}
	}
}
