package drift

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"barline/model/unit"
)

// wandering is a bench on which everything wanders a little over many minutes,
// beside its noise.
func wandering(seed uint64) func() Means {
	rng := rand.New(rand.NewPCG(seed, 8))
	var at time.Duration
	var x [ObservableCount]float64
	for o := range x {
		x[o] = rng.NormFloat64()
	}
	return func() Means {
		at += 10 * time.Second
		m := Means{At: at, Pressure: 9 * unit.Bar}
		keep := math.Exp(-10.0 / 1200)
		for o, v := range [...][3]float64{
			Wavelength: {1.3e-9, 0.02e-9, 0.02e-9}, Strength: {0.06, 5e-4, 6e-4}, Width: {14e-9, 1e-10, 1e-10}, Disagreement: {500, 60, 10}} {
			x[o] = keep*x[o] + math.Sqrt(1-keep*keep)*rng.NormFloat64()
			m.Value[o], m.Count[o] = v[0]+v[1]*x[o]+v[2]*rng.NormFloat64(), 40
		}
		return m
	}
}

// What wanders too slowly to be learnt properly within half an hour is charted
// all the same: else nobody would hear of it.
func TestMonitorChartsWhatWanders(t *testing.T) {
	alarms, hours := 0, 0.0
	for seed := range uint64(24) {
		next := wandering(seed)
		var m Monitor
		for range 180 { // half an hour
			m.Add(testWatch, next())
		}
		for o := range Decay {
			if track, _ := m.Track(o); testWatch.Matters[o] > 0 && !track.Charted {
				t.Errorf("seed %d: after half an hour %v is not charted", seed, o)
			}
		}
		for range 6 * 360 {
			if m.Add(testWatch, next()) == Drifting {
				alarms++
				by, _, _ := m.Standing()
				t.Logf("seed %d: a false alarm by %v", seed, by)
			}
		}
		hours += 6
		var found time.Duration
		for i := range 60 {
			x := next()
			x.Value[Strength] *= 0.8
			if m.Add(testWatch, x) == Drifting {
				found = time.Duration(i) * 10 * time.Second
				break
			}
		}
		if by, _, ok := m.Standing(); !ok || by != Strength || found > 6*time.Minute {
			t.Errorf("seed %d: a fifth of the strength is gone, found %v after %v", seed, by, found)
		}
	}
	if alarms > 1 {
		t.Errorf("%d false alarms in %.0f h, want less than one in 100 h", alarms, hours)
	}
}

func TestLearnRoughly(t *testing.T) {
	slow := newWalk(2, 20*time.Minute, 0.2, 0.05).stretch(30*time.Minute, 10*time.Second)
	if _, err := Learn(slow); !errors.Is(err, ErrNotQuiet) {
		t.Fatalf("learnt properly, or %v", err)
	}
	q, err := LearnRoughly(slow, 10)
	if err != nil {
		t.Fatal(err)
	}
	if q.GroupSigma < q.Sigma || q.Group != roughGroup || q.Values != len(slow) || !(q.MeanSigma > 0 && q.MeanSigma <= q.Sigma) {
		t.Errorf("learnt %+v", q)
	}
	line := newWalk(3, 0, 0, 0.05).stretch(30*time.Minute, 10*time.Second)
	for i := range line {
		line[i].Value += 0.01 * float64(i)
	}
	if _, err := LearnRoughly(line, 1); !errors.Is(err, ErrNotQuiet) {
		t.Errorf("a line that changes by 1.8, 1 tolerated: %v", err)
	}
	if _, err := LearnRoughly(line, 2); err != nil {
		t.Errorf("a line that changes by 1.8, 2 tolerated: %v", err)
	}
	if _, err := LearnRoughly(line[:59], 2); !errors.Is(err, ErrShort) {
		t.Errorf("59 values: %v", err)
	}
}

// A gauge that creeps looks like a leak of the volume it stands on. The other
// gauge, which does not follow, must settle it.
func TestACreepingGaugeIsNoLeak(t *testing.T) {
	o := Observation{Sigma: testSigma}
	o.Shift[Wavelength], o.Shift[Disagreement], o.Shift[Decay] = 0.13e-9, -1800, -2
	findings, err := Attribute(Causes(testSlopes, testState), o)
	if err != nil {
		t.Fatal(err)
	}
	if c := findings[0].Cause.Name; c != "cell A gauge zero" && c != "cell A gauge span" {
		t.Errorf("it is called %s", c)
	}
	o.Shift[Wavelength], o.Shift[Disagreement] = 0, 0
	if findings, err = Attribute(Causes(testSlopes, testState), o); err != nil || findings[0].Cause.Name != "slow leak" {
		t.Errorf("a leak is called %s, %v", findings[0].Cause.Name, err)
	}
}

// A metered energy that the prediction follows leaves what the slope is off by.
func TestMeteredEnergyMayLeaveAResidual(t *testing.T) {
	state := testState
	state.EnergyMetered = true
	o := Observation{Sigma: testSigma}
	o.Shift[Wavelength], o.Shift[Strength], o.Shift[Width], o.Shift[Metered] = 0.07e-9, -0.18, -0.036, -0.06
	findings, err := Attribute(Causes(testSlopes, state), o)
	if err != nil || findings[0].Cause.Name != "pulse energy" {
		t.Errorf("it is called %s, %v", findings[0].Cause.Name, err)
	}
}
