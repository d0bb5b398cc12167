package drift

import (
	"errors"
	"math"
	"testing"
)

// NIST/SEMATECH e-Handbook of Statistical Methods, section 6.3.2.4 (2012).
func TestEWMAOfTheHandbook(t *testing.T) {
	data := []float64{52.0, 47.0, 53.0, 49.3, 50.1, 47.0, 51.0, 50.1, 51.2, 50.5, 49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1}
	printed := []float64{50.60, 49.52, 50.56, 50.18, 50.16, 49.21, 49.75, 49.85, 50.26, 50.33, 50.11, 49.36, 49.52, 50.05, 49.38, 49.92, 50.73, 51.23, 51.94, 51.99}
	e := EWMA{Target: 50, Sigma: 2.0539, Lambda: 0.3, Limit: 3}
	if e.Value() != 50 {
		t.Errorf("starts at %v", e.Value())
	}
	for i, x := range data {
		if e.Add(x) {
			t.Errorf("signal at %d", i+1)
		}
		if math.Abs(e.Value()-printed[i]) > 0.00501 {
			t.Errorf("average %d is %.4f, printed %v", i+1, e.Value(), printed[i])
		}
	}
	if lower, upper := e.Limits(); math.Abs(upper-52.5884) > 1e-4 || math.Abs(lower-47.4115) > 1.5e-4 {
		t.Errorf("limits %.5f and %.5f, printed 47.4115 and 52.5884", lower, upper)
	}
}

// Same handbook, section 6.3.2.3: means of four, σ of single values 1.27. The
// sums are printed to two decimals, half-way cases rounded either way.
func TestCUSUMOfTheHandbook(t *testing.T) {
	c := CUSUM{Target: 325, Slack: 0.3175, Threshold: 4.1959}
	for i, row := range [][3]float64{
		{324.925, 0, 0}, {324.675, 0, 0.01}, {324.725, 0, 0}, {324.350, 0, 0.33}, {325.350, 0.03, 0}, {325.225, 0, 0}, {324.125, 0, 0.56},
		{324.525, 0, 0.72}, {325.225, 0, 0.17}, {324.600, 0, 0.26}, {324.625, 0, 0.31}, {325.150, 0, 0}, {328.325, 3.01, 0}, {327.250, 4.94, 0},
		{327.825, 7.45, 0}, {328.500, 10.63, 0}, {326.675, 11.99, 0}, {327.775, 14.44, 0}, {326.875, 16.00, 0}, {328.350, 19.04, 0},
	} {
		signal := c.Add(row[0])
		high, low := c.Sums()
		if math.Abs(high-row[1]) > 0.00501 || math.Abs(low-row[2]) > 0.00501 {
			t.Errorf("group %d: %.4f and %.4f, printed %v and %v", i+1, high, low, row[1], row[2])
		}
		if signal != (i >= 13) {
			t.Errorf("group %d: signal %v", i+1, signal)
		}
	}
	// The mean moved before group 13, eight groups ago, by what the eight show.
	shift, values := c.Change()
	if mean := (3.325 + 2.25 + 2.825 + 3.5 + 1.675 + 2.775 + 1.875 + 3.35) / 8; values != 8 || math.Abs(shift-mean) > 0.01 {
		t.Errorf("changed by %.3f, %d groups ago; want %.3f, 8", shift, values, mean)
	}
}

func TestCUSUMDownwards(t *testing.T) {
	c := CUSUM{Target: 10, Slack: 0.5, Threshold: 4}
	if shift, values := c.Change(); shift != 0 || values != 0 {
		t.Errorf("nothing happened, and it changed by %v %d ago", shift, values)
	}
	for _, x := range []float64{10.2, 9.9, 8, 8, 8} {
		c.Add(x)
	}
	if shift, values := c.Change(); math.Abs(shift+2) > 1e-12 || values != 3 {
		t.Errorf("changed by %v, %d values ago; want -2, 3", shift, values)
	}
}

// Same handbook, section 6.3.2.2.
func TestIndividualsOfTheHandbook(t *testing.T) {
	mean, lower, upper, err := Individuals([]float64{49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1})
	if err != nil || math.Abs(mean-50.81) > 5e-5 || math.Abs(upper-55.8041) > 5e-5 || math.Abs(lower-45.8159) > 5e-5 {
		t.Errorf("%v, %v, %v, %v; printed 50.81, 45.8159, 55.8041", mean, lower, upper, err)
	}
	if _, _, _, err := Individuals([]float64{1}); !errors.Is(err, ErrShort) {
		t.Errorf("one value: %v", err)
	}
}

// NIST SP 1065 (2008), tables 30 and 31, pages 107 and 108.
func TestAllanOfTheHandbook(t *testing.T) {
	small := []float64{892, 809, 823, 798, 671, 644, 883, 903, 677}
	large := make([]float64, 1000)
	for i, n := 0, int64(1234567890); i < len(large); i, n = i+1, 16807*n%2147483647 {
		large[i] = float64(n) / 2147483647
	}
	for _, c := range []struct {
		name   string
		f      func([]float64, int) (float64, error)
		values []float64
		m      int
		want   float64
	}{
		{"Allan", Allan, small, 1, 91.22945}, {"Allan", Allan, small, 2, 115.8082},
		{"overlapping", AllanOverlapping, small, 1, 91.22945}, {"overlapping", AllanOverlapping, small, 2, 85.95287},
		{"modified", AllanModified, small, 1, 91.22945}, {"modified", AllanModified, small, 2, 74.78849},
		{"Allan", Allan, large, 1, 2.922319e-01}, {"Allan", Allan, large, 10, 9.965736e-02}, {"Allan", Allan, large, 100, 3.897804e-02},
		{"overlapping", AllanOverlapping, large, 1, 2.922319e-01}, {"overlapping", AllanOverlapping, large, 10, 9.159953e-02}, {"overlapping", AllanOverlapping, large, 100, 3.241343e-02},
		{"modified", AllanModified, large, 1, 2.922319e-01}, {"modified", AllanModified, large, 10, 6.172376e-02}, {"modified", AllanModified, large, 100, 2.170921e-02},
	} {
		got, err := c.f(c.values, c.m)
		if err != nil || math.Abs(got-c.want) > 5.1e-7*c.want {
			t.Errorf("%s over %d of %d: %.7g, %v; printed %v", c.name, c.m, len(c.values), got, err, c.want)
		}
	}
	for _, f := range []func([]float64, int) (float64, error){Allan, AllanOverlapping, AllanModified} {
		for _, m := range []int{-1, 0, 5, 100} {
			if got, err := f(small, m); !errors.Is(err, ErrShort) {
				t.Errorf("means over %d of 9 values: %v, %v", m, got, err)
			}
		}
		if got, err := f(nil, 1); !errors.Is(err, ErrShort) {
			t.Errorf("no values: %v, %v", got, err)
		}
	}
}

// Run lengths: NIST/SEMATECH e-Handbook, section 6.3.2.3.1 for CUSUM; Lucas &
// Saccucci, Technometrics 32, 1 (1990), doi:10.1080/00401706.1990.10484583, for
// EWMA (both from memory, to the digits that are printed).
func TestRunLengthsOfTheTables(t *testing.T) {
	for _, c := range []struct{ slack, threshold, shift, want, tolerance float64 }{
		{0.5, 4, 0, 168, 0.5}, {0.5, 4, 1, 8.38, 0.02}, {0.5, 4, 2, 3.34, 0.01},
		{0.5, 5, 0, 465, 1}, {0.5, 5, 1, 10.4, 0.05}, {0.5, 5, 0.5, 38.0, 0.1},
	} {
		if got := RunLengthCUSUM(c.slack, c.threshold, c.shift); math.Abs(got-c.want) > c.tolerance {
			t.Errorf("CUSUM slack %v threshold %v shift %v: %.3f, printed %v", c.slack, c.threshold, c.shift, got, c.want)
		}
	}
	for _, c := range []struct{ lambda, limit, shift, want, tolerance float64 }{
		{0.4, 3.054, 0, 500, 2}, {0.25, 2.998, 0, 500, 2}, {0.2, 2.962, 0, 500, 2}, {0.1, 2.814, 0, 500, 2}, {0.05, 2.615, 0, 500, 3},
		{0.25, 2.998, 1, 11.1, 0.06}, {0.1, 2.814, 1, 10.3, 0.06}, {0.1, 2.814, 0.5, 31.3, 0.1}, {0.05, 2.615, 0.25, 84.1, 0.4},
	} {
		if got := RunLengthEWMA(c.lambda, c.limit, c.shift); math.Abs(got-c.want) > c.tolerance {
			t.Errorf("EWMA λ %v limit %v shift %v: %.3f, printed %v", c.lambda, c.limit, c.shift, got, c.want)
		}
	}
	if h, err := ThresholdCUSUM(0.5, 465.4); err != nil || math.Abs(h-5) > 0.002 {
		t.Errorf("threshold for 465 is %v, %v; want 5", h, err)
	}
	if l, err := LimitEWMA(0.1, 500); err != nil || math.Abs(l-2.814) > 0.002 {
		t.Errorf("limit for 500 is %v, %v; want 2.814", l, err)
	}
	if _, err := ThresholdCUSUM(0.5, math.NaN()); err == nil {
		t.Error("a threshold for no number of values")
	}
}
