package flow

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"barline/model/unit"
)

func TestSlope(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 5))
	inside, sigma := 0, 0.0
	for range 200 {
		s := Slope{Window: 8 * time.Second}
		for at := time.Duration(0); at < 20*time.Second; at += 100 * time.Millisecond {
			// A bend at 10 s: only the last eight seconds count.
			p := 9e5 + 40*at.Seconds()
			if at < 10*time.Second {
				p -= 500 * (10 - at.Seconds())
			}
			if err := s.See(at, unit.Pascal(p+100*random.NormFloat64())); err != nil {
				t.Fatal(err)
			}
		}
		e, ok := s.Estimate()
		if !ok {
			t.Fatal("no estimate")
		}
		if math.Abs(e.Value-40) < 2*e.Sigma {
			inside++
		}
		sigma += e.Sigma / 200
	}
	// White noise on N readings over W: σ·√(12/(N·W²)).
	near(t, "mean sigma", sigma, 100*math.Sqrt(12.0/(80*64)), 0.06)
	if inside < 180 { // 95 % of 200, less chance
		t.Errorf("two sigma hold the truth in %d of 200", inside)
	}
}

func TestSlopeRefuses(t *testing.T) {
	var s Slope
	if _, ok := s.Estimate(); ok {
		t.Error("an estimate from nothing")
	}
	for i := range 100 {
		if err := s.See(time.Duration(i)*200*time.Millisecond, 9e5); err != nil {
			t.Fatal(err)
		}
	}
	was := s
	for _, err := range []error{s.See(time.Second, 9e5), s.See(time.Hour, unit.Pascal(math.NaN())), s.See(time.Hour, unit.Pascal(math.Inf(1)))} {
		if err == nil || s != was {
			t.Error("accepted, or moved")
		}
	}
	if e, ok := s.Estimate(); !ok || e != (Estimate{}) {
		t.Errorf("flat: %v, %v", e, ok)
	}
	// After an hour of silence the old readings say nothing.
	if err := s.See(time.Hour, 2e5); err != nil {
		t.Fatal(err)
	}
	if _, ok := s.Estimate(); ok {
		t.Error("a slope across an hour of silence")
	}
}

func TestSettledJudge(t *testing.T) {
	s := Settled{Slope: 100, Lag: 50, Excess: 0.2}
	good := Condition{Slope: Estimate{20, 10}, SlopeKnown: true, Lag: -20, LagKnown: true}
	cases := []struct {
		name   string
		change func(*Condition)
		want   string // part of the text, empty where settled
	}{
		{"settled", func(*Condition) {}, ""},
		{"no slope yet", func(c *Condition) { c.SlopeKnown = false }, "enough readings"},
		{"rising", func(c *Condition) { c.Slope = Estimate{95, 10} }, "rising at 0.95 ± 0.1 mbar/s"},
		{"falling", func(c *Condition) { c.Slope.Value = -320 }, "falling"},
		{"slope is NaN", func(c *Condition) { c.Slope.Value = math.NaN() }, "enough readings"},
		{"lag is NaN", func(c *Condition) { c.Lag = unit.Pascal(math.NaN()) }, "not known"},
		{"lag unknown", func(c *Condition) { c.LagKnown = false }, "not known"},
		{"core behind", func(c *Condition) { c.Lag = 1234 }, "12.34 mbar below"},
		{"core ahead", func(c *Condition) { c.Lag = -1234 }, "above"},
		{"held cell may be warm", func(c *Condition) { c.Excess, c.ExcessKnown = 3, true }, ""},
		{"shut and warm", func(c *Condition) { c.Shut, c.Excess, c.ExcessKnown = true, 3, true }, "3 K warmer"},
		{"shut and cold", func(c *Condition) { c.Shut, c.Excess, c.ExcessKnown = true, -3, true }, "3 K colder"},
		{"shut, unknown, early", func(c *Condition) { c.Shut, c.Still, c.WallTime = true, 20*time.Second, 12*time.Second }, "another 40s"},
		{"shut, unknown, late", func(c *Condition) { c.Shut, c.Still, c.WallTime = true, time.Minute, 12*time.Second }, ""},
	}
	for _, c := range cases {
		condition := good
		c.change(&condition)
		settled, why := s.Judge(condition)
		if settled != (c.want == "") || !strings.Contains(why, c.want) || settled != (why == "") {
			t.Errorf("%s: %v, %q, want %q", c.name, settled, why, c.want)
		}
		if strings.Contains(why, "NaN") {
			t.Errorf("%s: %q", c.name, why)
		}
	}
}
