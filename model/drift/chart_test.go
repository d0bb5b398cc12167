package drift

import (
	"errors"
	"math"
	"math/rand/v2"
	"os"
	"testing"
	"time"
)

// walk is a reading that forgets itself with the time constant tau: exact
// samples of an Ornstein–Uhlenbeck process plus white noise.
type walk struct {
	rng         *rand.Rand
	tau         time.Duration
	slow, white float64 // standard deviations
	now         time.Duration
	x           float64
}

func newWalk(seed uint64, tau time.Duration, slow, white float64) *walk {
	w := &walk{rng: rand.New(rand.NewPCG(seed, 5)), tau: tau, slow: slow, white: white}
	w.x = slow * w.rng.NormFloat64()
	return w
}

func (w *walk) next(dt time.Duration) Sample {
	w.now += dt
	if w.tau > 0 {
		keep := math.Exp(-float64(dt) / float64(w.tau))
		w.x = keep*w.x + w.slow*math.Sqrt(1-keep*keep)*w.rng.NormFloat64()
	}
	return Sample{w.now, 265 + w.x + w.white*w.rng.NormFloat64()}
}

func (w *walk) stretch(d, dt time.Duration) []Sample {
	var s []Sample
	for end := w.now + d; w.now < end; {
		s = append(s, w.next(dt))
	}
	return s
}

func within(t *testing.T, what string, got, want, relative float64) {
	t.Helper()
	if !(math.Abs(got-want) <= relative*math.Abs(want)) {
		t.Errorf("%s is %v, want %v within %v %%", what, got, want, 100*relative)
	}
}

// For an exponentially correlated quantity the integral of the correlation is
// its time constant, up to the spacing: dt/2·coth(dt/2τ).
func TestLearnFindsScatterAndCorrelation(t *testing.T) {
	const seeds = 8
	for _, tau := range []time.Duration{0, 30 * time.Second, 2 * time.Minute} {
		want := 5.0
		if tau > 0 {
			want = 5 / math.Tanh(5/tau.Seconds())
		}
		var sigma, correlation, group, lag float64
		for seed := range uint64(seeds) {
			w := newWalk(seed, tau, 0.2, 0)
			if tau == 0 {
				w = newWalk(seed, 0, 0, 0.2)
			}
			q, err := Learn(w.stretch(24*time.Hour, 10*time.Second))
			if err != nil {
				t.Fatal(err)
			}
			sigma += q.Sigma / seeds
			correlation += q.Correlation.Seconds() / seeds
			real, neighbours := groups(w, q, 30000)
			group += q.GroupSigma / real / seeds
			lag = math.Max(lag, neighbours)
		}
		within(t, "scatter", sigma, 0.2, 0.05)
		within(t, "correlation time", correlation, want, 0.15)
		within(t, "scatter of groups as a share of the real one", group, 1, 0.08)
		if lag > 0.2 {
			t.Errorf("groups correlate by %.2f at %v", lag, tau)
		}
		t.Logf("%v: correlation time %.1f s, expected %.1f s; groups scatter %.3f of the real, neighbours correlate by up to %.2f", tau, correlation, want, group, lag)
	}
}

// groups returns the long-run scatter of means over q.Group as it is, and the
// correlation of neighbours.
func groups(w *walk, q Quiet, values int) (sigma, lag float64) {
	var means []float64
	per := int(q.Group / (10 * time.Second))
	for range values / per {
		sum := 0.0
		for range per {
			sum += w.next(10*time.Second).Value / float64(per)
		}
		means = append(means, sum-265)
	}
	var v, c float64
	for i, m := range means {
		v += m * m / float64(len(means))
		if i > 0 {
			c += m * means[i-1] / float64(len(means))
		}
	}
	return math.Sqrt(v + 2*c), c / v
}

func TestLearnRefuses(t *testing.T) {
	quiet := newWalk(1, 0, 0, 0.1).stretch(2*time.Hour, 10*time.Second)
	with := func(change func(i int, s *Sample)) []Sample {
		out := append([]Sample(nil), quiet...)
		for i := range out {
			change(i, &out[i])
		}
		return out
	}
	for name, c := range map[string]struct {
		samples []Sample
		err     error
	}{
		"few":      {quiet[:59], ErrShort},
		"NaN":      {with(func(i int, s *Sample) { s.Value = map[bool]float64{true: math.NaN(), false: s.Value}[i == 50] }), ErrNotQuiet},
		"frozen":   {with(func(_ int, s *Sample) { s.Value = 265 }), ErrNotQuiet},
		"runaway":  {with(func(i int, s *Sample) { s.Value += 0.0005 * float64(i) }), ErrNotQuiet},
		"step":     {with(func(i int, s *Sample) { s.Value += map[bool]float64{true: 1, false: 0}[i > 300] }), ErrNotQuiet},
		"unsorted": {with(func(i int, s *Sample) { s.At = map[bool]time.Duration{true: 0, false: s.At}[i == 50] }), ErrNotQuiet},
		"slow":     {newWalk(2, time.Hour, 0.2, 0).stretch(2*time.Hour, 10*time.Second), ErrNotQuiet},
	} {
		if q, err := Learn(c.samples); !errors.Is(err, c.err) {
			t.Errorf("%s: %+v, %v; want %v", name, q, err, c.err)
		}
	}
	if _, err := Learn(quiet); err != nil {
		t.Errorf("a quiet stretch: %v", err)
	}
	gap := append(append([]Sample(nil), quiet[:300]...), quiet[400:]...)
	if q, err := Learn(gap); err != nil || q.Spacing != 10*time.Second {
		t.Errorf("a stretch with a gap: %+v, %v", q, err)
	}
}

// The false alarms of a chart over quiet days, after learning from four hours,
// and how soon it finds what there is to find. BARLINE_SOAK=1 makes the runs
// ten times as many.
func TestChartFindsDriftAndSleepsOtherwise(t *testing.T) {
	const dt = 10 * time.Second
	quietRuns, driftRuns := uint64(16), uint64(6)
	if os.Getenv("BARLINE_SOAK") != "" {
		quietRuns, driftRuns = 160, 60
	}
	chart := func(seed uint64) (*walk, Chart) {
		w := newWalk(seed, time.Minute, 0.1, 0.1)
		q, err := Learn(w.stretch(4*time.Hour, dt))
		if err != nil {
			t.Fatal(err)
		}
		c, err := NewChart(q, Design{FalseAlarm: 400 * time.Hour})
		if err != nil {
			t.Fatal(err)
		}
		return w, c
	}
	falseAlarms, hours := 0, 0.0
	for seed := range quietRuns {
		w, c := chart(seed)
		for from := w.now; w.now < from+50*time.Hour; {
			if p, ok := c.Add(w.next(dt)); ok && p.Alarm {
				falseAlarms++
				c.Restart()
			}
		}
		hours += 50
	}
	t.Logf("%d false alarms in %.0f h", falseAlarms, hours)
	// Designed for one in 400 h; the learnt baseline is an estimate.
	if float64(falseAlarms) >= hours/100 {
		t.Errorf("%d false alarms in %.0f h, want fewer than one in 100 h", falseAlarms, hours)
	}
	for _, c := range []struct {
		name  string
		drift func(since time.Duration) float64 // nm
		most  time.Duration
	}{
		{"step of 0.3 nm", func(time.Duration) float64 { return 0.3 }, 20 * time.Minute},
		{"step of -0.15 nm", func(time.Duration) float64 { return -0.15 }, 80 * time.Minute},
		{"0.2 nm an hour", func(d time.Duration) float64 { return 0.2 * d.Hours() }, 80 * time.Minute},
	} {
		var late time.Duration
		var shift, blamed float64
		runs := time.Duration(driftRuns)
		for seed := range driftRuns {
			w, ch := chart(100 + seed)
			for range 720 {
				ch.Add(w.next(dt))
			}
			ch.Restart()
			from := w.now
			for {
				s := w.next(dt)
				s.Value += c.drift(s.At - from)
				if p, ok := ch.Add(s); ok && p.Alarm {
					late += (p.At - from) / runs
					shift += p.Shift / float64(runs)
					blamed += (p.Changed - from).Minutes() / float64(runs)
					break
				}
			}
		}
		t.Logf("%s: found after %v on average, said to be %+.2f nm since %+.1f min", c.name, late.Round(time.Second), shift, blamed)
		if late > c.most {
			t.Errorf("%s: found after %v on average, want at most %v", c.name, late, c.most)
		}
		if got := c.drift(late); shift*got <= 0 || math.Abs(blamed) > 40 {
			t.Errorf("%s: said to be %v nm since %v min", c.name, shift, blamed)
		}
	}
}

func TestChartKeepsItsAlarmAndDropsHalfGroups(t *testing.T) {
	q := Quiet{Mean: 10, Sigma: 1, GroupSigma: 0.5, Group: time.Minute, Spacing: 10 * time.Second, MeanSigma: 0.01}
	c, err := NewChart(q, Design{})
	if err != nil {
		t.Fatal(err)
	}
	var got []Point
	add := func(from, n int, v float64) {
		for i := range n {
			if p, ok := c.Add(Sample{time.Duration(from+10*i) * time.Second, v}); ok {
				got = append(got, p)
			}
		}
	}
	add(0, 6, 10)
	add(60, 2, 99) // the shutter closed after 20 s: dropped
	add(120, 6, 10)
	add(180, 12, 15)
	add(300, 7, math.NaN())
	add(370, 12, 10)
	if len(got) != 5 {
		t.Fatalf("%d groups, want 5: %+v", len(got), got)
	}
	for i, want := range []bool{false, false, true, true, true} {
		if got[i].Alarm != want {
			t.Errorf("group %d: %+v", i+1, got[i])
		}
	}
	if p := got[3]; p.Changed != 180*time.Second || p.Shift < 4 || p.Shift > 5.1 {
		t.Errorf("changed by %v at %v, want 5 at 180 s", p.Shift, p.Changed)
	}
	kept := c
	c.Restart()
	if c.Last().Alarm || !kept.Last().Alarm {
		t.Error("restart, or a copy, is not a value of its own")
	}
	for _, d := range []Design{{Lambda: 2}, {Shift: -1}, {FalseAlarm: time.Minute}, {Shift: math.NaN()}} {
		if _, err := NewChart(q, d); err == nil {
			t.Errorf("accepted %+v", d)
		}
	}
	if _, err := NewChart(Quiet{}, Design{}); !errors.Is(err, ErrNotQuiet) {
		t.Errorf("a chart of nothing: %v", err)
	}
}

func TestAddDoesNotAllocate(t *testing.T) {
	c, err := NewChart(Quiet{Mean: 1, Sigma: 1, GroupSigma: 1, Group: time.Minute, Spacing: time.Second}, Design{})
	if err != nil {
		t.Fatal(err)
	}
	at := time.Duration(0)
	if n := testing.AllocsPerRun(1000, func() {
		at += 7 * time.Second
		c.Add(Sample{at, 1})
	}); n != 0 {
		t.Errorf("%v allocations a value", n)
	}
}
