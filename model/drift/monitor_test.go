package drift

import (
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"barline/model/unit"
)

var testWatch = Watch{Matters: [ObservableCount]float64{
	Wavelength: 0.2e-9, Strength: 0.05, Width: 0.05, Disagreement: 2000, Decay: 1,
}}

// run of means of ten seconds: a residual of 1.3 nm, 0.03 nm of scatter, and
// what happens besides.
type stretch struct {
	m   Monitor
	at  time.Duration
	rng *rand.Rand
}

func newStretch(seed uint64) *stretch { return &stretch{rng: rand.New(rand.NewPCG(seed, 2))} }

// go adds means for a time and returns the verdicts with their times.
func (s *stretch) run(d time.Duration, change func(since time.Duration, x *Means)) map[Verdict]time.Duration {
	said := map[Verdict]time.Duration{}
	for from := s.at; s.at < from+d; {
		s.at += 10 * time.Second
		x := Means{At: s.at, Pressure: 9 * unit.Bar}
		for o, v := range [...][2]float64{Wavelength: {1.3e-9, 0.03e-9}, Strength: {0.06, 3e-4}, Width: {14e-9, 0.1e-9}, Disagreement: {500, 100}} {
			x.Value[o], x.Count[o] = v[0]+v[1]*s.rng.NormFloat64(), 40
		}
		if change != nil {
			change(s.at-from, &x)
		}
		if v := s.m.Add(testWatch, x); v != NoChange {
			if _, before := said[v]; !before {
				said[v] = s.at
			}
		}
	}
	return said
}

func TestMonitorFindsAStepAndWhen(t *testing.T) {
	soon := 0
	for seed := range uint64(20) {
		s := newStretch(seed)
		at, ok := s.run(20*time.Minute, nil)[Learnt]
		if !ok { // where the correlation looks long by chance it takes longer than ten minutes
			t.Fatalf("seed %d: nothing is learnt in 20 min", seed)
		}
		if at <= 11*time.Minute {
			soon++
		}
		began := s.at
		said := s.run(10*time.Minute, func(_ time.Duration, x *Means) { x.Value[Wavelength] += 0.4e-9 })
		at, ok = said[Drifting]
		if !ok || at-began > 2*time.Minute {
			t.Fatalf("seed %d: a step of 0.4 nm is found at %v, %v", seed, at-began, ok)
		}
		by, since, ok := s.m.Standing()
		if !ok || by != Wavelength || (since-began).Abs() > time.Minute {
			t.Errorf("seed %d: %v since %v, it came at %v", seed, by, since, began)
		}
		o := s.m.Observation()
		if math.Abs(o.Shift[Wavelength]-0.4e-9) > 4*o.Sigma[Wavelength] || o.Sigma[Wavelength] > 0.05e-9 {
			t.Errorf("seed %d: shift %.3g ± %.3g m, put in 0.4 nm", seed, o.Shift[Wavelength], o.Sigma[Wavelength])
		}
		if math.Abs(o.Shift[Disagreement]) > 5*o.Sigma[Disagreement] {
			t.Errorf("seed %d: the gauges moved by %.3g ± %.3g Pa, and nothing was done to them", seed, o.Shift[Disagreement], o.Sigma[Disagreement])
		}
		if _, ok := s.run(20*time.Minute, nil)[Returned]; !ok {
			t.Errorf("seed %d: it went back and nothing was said", seed)
		}
	}
	if soon < 12 {
		t.Errorf("%d of 20 benches were learnt within 11 min, expected most", soon)
	}
}

// What never stood still is said so, and from where it began.
func TestMonitorSaysThatItRunsAway(t *testing.T) {
	for seed := range uint64(20) {
		s := newStretch(seed)
		said := s.run(25*time.Minute, func(since time.Duration, x *Means) { x.Value[Wavelength] -= 2e-9 * since.Hours() })
		at, ok := said[Drifting]
		if _, learnt := said[Learnt]; learnt || !ok || at > 12*time.Minute {
			t.Errorf("seed %d: 2 nm/h is found at %v, %v; learnt as quiet %v", seed, at, ok, learnt)
		}
		if o := s.m.Observation(); !s.m.RunsAway() || math.Abs(o.Shift[Wavelength]+0.8e-9) > 0.1e-9 {
			t.Errorf("seed %d: shift %.3g m after 25 min, put in -0.8 nm less what the first minutes moved", seed, o.Shift[Wavelength])
		}
	}
}

// A closed shutter takes the light away and leaves no trace.
func TestMonitorKnowsNoShutter(t *testing.T) {
	a, b := newStretch(3), newStretch(3)
	a.run(20*time.Minute, nil)
	b.run(20*time.Minute, nil)
	dark := func(_ time.Duration, x *Means) {
		x.Value[Wavelength], x.Count[Wavelength] = math.NaN(), 0
		x.Value[Strength], x.Count[Strength] = 0, 0
		x.Value[Width], x.Count[Width] = 0, 0
	}
	if said := b.run(5*time.Minute, dark); len(said) > 0 {
		t.Errorf("in the dark it says %v", said)
	}
	a.at = b.at
	a.rng, b.rng = rand.New(rand.NewPCG(1, 1)), rand.New(rand.NewPCG(1, 1))
	if x, y := a.run(time.Hour, nil), b.run(time.Hour, nil); len(x)+len(y) > 0 {
		t.Errorf("afterwards it says %v and %v", x, y)
	}
}

// Another pressure is another place; coming back finds what was learnt.
func TestMonitorKeepsPlaces(t *testing.T) {
	s := newStretch(5)
	s.run(15*time.Minute, nil)
	away := func(_ time.Duration, x *Means) {
		x.Pressure, x.Value[Wavelength] = 7*unit.Bar, x.Value[Wavelength]+3e-9
	}
	if said := s.run(5*time.Minute, away); len(said) > 0 || s.m.Learnt() {
		t.Errorf("at another pressure it says %v, learnt %v", said, s.m.Learnt())
	}
	if said := s.run(10*time.Minute, nil); len(said) > 0 || !s.m.Learnt() {
		t.Errorf("back again it says %v, learnt %v", said, s.m.Learnt())
	}
}

// Where the prediction moves, the residual moves the other way: no drift.
func TestMonitorIsRebased(t *testing.T) {
	s := newStretch(6)
	s.run(15*time.Minute, nil)
	s.m.Rebase(-2e-9)
	if said := s.run(30*time.Minute, func(_ time.Duration, x *Means) { x.Value[Wavelength] -= 2e-9 }); len(said) > 0 {
		t.Errorf("it says %v", said)
	}
}

func TestMonitorFindsALeak(t *testing.T) {
	s := newStretch(7)
	shut := func(rate float64) func(time.Duration, *Means) {
		return func(since time.Duration, x *Means) {
			x.Value[Decay], x.Count[Decay] = 9e5+rate*since.Seconds()+20*s.rng.NormFloat64(), 90
			x.Pressure = unit.Pascal(x.Value[Decay])
		}
	}
	if said := s.run(30*time.Minute, shut(0)); said[Drifting] != 0 {
		t.Errorf("a tight volume: %v", said)
	}
	s.run(time.Minute, nil)
	began := s.at
	said := s.run(10*time.Minute, shut(-5))
	if at := said[Drifting]; at == 0 || at-began > 4*time.Minute {
		t.Errorf("5 Pa/s is found after %v", at-began)
	}
	if l, ok := s.m.Decay(); !ok || math.Abs(l.Slope+5) > 0.2 {
		t.Errorf("decay %v, put in 5 Pa/s", l.Slope)
	}
}

// Quiet days in which the light wanders as light does: false alarms are rarer
// than once in 100 h.
func TestMonitorIsQuietOnQuietDays(t *testing.T) {
	hours, alarms := 0.0, 0
	for seed := range uint64(12) {
		s := newStretch(100 + seed)
		slow := 0.0
		const keep = 0.85 // a correlation time of a minute
		wander := func(_ time.Duration, x *Means) {
			slow = keep*slow + 0.05e-9*math.Sqrt(1-keep*keep)*s.rng.NormFloat64()
			x.Value[Wavelength] += slow
		}
		for range 24 {
			if _, ok := s.run(time.Hour, wander)[Drifting]; ok {
				alarms++
			}
			hours++
		}
	}
	t.Logf("%d alarms in %.0f h", alarms, hours)
	if alarms > 2 {
		t.Errorf("%d alarms in %.0f h of quiet, expected fewer than one in 100 h", alarms, hours)
	}
}

// The usual design is what the solver says, also between the figures kept.
func TestUsualDesignIsTheSolved(t *testing.T) {
	for _, values := range []float64{120, 470, 2.4e5, 7e6} {
		threshold, limit, err := design(usualSlack, usualLambda, values)
		if err != nil {
			t.Fatal(err)
		}
		h, _ := ThresholdCUSUM(usualSlack, values)
		l, _ := LimitEWMA(usualLambda, values)
		if math.Abs(threshold/h-1) > 2e-3 || math.Abs(limit/l-1) > 2e-3 {
			t.Errorf("once in %g: %.4f and %.4f, solved %.4f and %.4f", values, threshold, limit, h, l)
		}
	}
}

func TestLineCountsCorrelation(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 8))
	inside, n := 0, 400
	for range n {
		v, keep := 0.0, 0.8
		var s []Sample
		for i := range 150 {
			v = keep*v + rng.NormFloat64()
			s = append(s, Sample{time.Duration(i) * 10 * time.Second, v + 0.01*float64(i)})
		}
		l, err := FitLine(s)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(l.Slope-0.001) < 1.96*l.SlopeSigma {
			inside++
		}
	}
	if share := float64(inside) / float64(n); share < 0.85 || share > 0.99 {
		t.Errorf("the true slope is within 1.96 standard deviations in %.1f %%, expected about 95 %%", 100*share)
	}
	if _, err := FitLine(nil); err == nil {
		t.Error("a line through nothing")
	}
}
