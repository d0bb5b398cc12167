package live

import (
	"encoding/json"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/drift"
	"barline/model/emission"
	"barline/model/reading"
	"barline/model/unit"
)

// sloped is straight with slopes as an argon bench at 9 bar has them.
type sloped struct{ straight }

func (sloped) Slopes(emission.Prediction) (drift.Slopes, bool) {
	return drift.Slopes{
		Pressure: 8e-14, Temperature: -0.27e-9, Energy: 3.6e-9, Duration: -4.8e-9, Core: 130e-9, Air: 20e-9,
		StrengthEnergy: 1.7, StrengthDuration: -2.6, WidthEnergy: 0.8, WidthDuration: -0.8,
	}, false
}

// watched is a bench at 9 bar whose readings come once a second.
type watchedBench struct {
	*story
	rng     *rand.Rand
	records []Record
	rings   []string
	off     map[reading.Role]float64
	shutter bool

	valvesShut bool
}

func newWatched(t *testing.T, seed uint64) *watchedBench {
	b := testBench()
	b.Drift = bench.Drift{Learn: 600, FalseAlarm: 3.6e6, Wavelength: 0.2 * unit.Nanometre, Strength: 0.05, Width: 0.05, Gauges: 10 * unit.Millibar, Leak: 1}
	core, state, err := New(b, sloped{})
	if err != nil {
		t.Fatal(err)
	}
	w := &watchedBench{story: &story{t: t, core: core, state: state, mono: time.Second}, rng: rand.New(rand.NewPCG(seed, 9)), off: map[reading.Role]float64{}}
	w.take(RecordChanged{At: w.stamp(), Health: RecordHealth{Writing: true}})
	for _, l := range []string{"gauges", "controller"} {
		w.take(LinkChanged{At: w.stamp(), Instrument: l, Up: true})
	}
	return w
}

func (w *watchedBench) take(e Event) {
	for _, f := range w.core.Step(&w.state, e, nil) {
		switch f := f.(type) {
		case Record:
			w.records = append(w.records, f)
		case Call:
			w.rings = append(w.rings, f.Alarm)
		}
	}
}

func (w *watchedBench) live(d time.Duration, each func(since time.Duration)) {
	for from := w.mono; w.mono < from+d; {
		w.mono += time.Second
		if each != nil {
			each(w.mono - from)
		}
		for _, r := range []struct {
			name  string
			role  reading.Role
			value float64
			sigma float64
		}{
			{"cell A", reading.CellAPressure, 9e5, 30}, {"cell B", reading.CellBPressure, 9e5, 30}, {"fibre", reading.FibreTemperature, 295.15, 0.005},
			{"setpoint", reading.Setpoint, 9e5, 0}, {"inlet", reading.InletValve, 0.2, 0.01},
			{"emission", reading.Emission, 272e-9, 0.1e-9}, {"strength", reading.EmissionStrength, 0.06, 6e-4}, {"width", reading.EmissionWidth, 14e-9, 0.1e-9},
		} {
			if r.role == reading.InletValve && w.valvesShut {
				r.value, r.sigma = 0, 0
			}
			status := reading.Good
			v := r.value + w.off[r.role] + r.sigma*w.rng.NormFloat64()
			if w.shutter && (r.role == reading.Emission || r.role == reading.EmissionWidth) {
				status = reading.FunctionCheck
			}
			if w.shutter && r.role == reading.EmissionStrength {
				v = 0
			}
			w.take(w.reading(r.name, r.role, v, status))
		}
		w.take(Tick{At: w.stamp()})
	}
}

func (w *watchedBench) verdicts() (all []DriftData) {
	for _, r := range w.records {
		if d, ok := r.Data.(DriftData); ok {
			all = append(all, d)
		}
	}
	return all
}

func TestDriftRingsAndNamesTheGauge(t *testing.T) {
	w := newWatched(t, 1)
	w.live(15*time.Minute, nil)
	if v := w.verdicts(); len(v) != 1 || v[0].Verdict != "quiet stretch learnt" || len(w.rings) > 0 {
		t.Fatalf("after a quarter of an hour of quiet: %+v, rings %v", v, w.rings)
	}
	// Cell A's gauge reads 60 mbar low: the prediction falls by half of that
	// at 8 nm/bar, and the residual rises.
	w.off[reading.CellAPressure] = -6000
	w.live(5*time.Minute, nil)
	v := w.verdicts()
	last := v[len(v)-1]
	if len(v) < 2 || len(w.rings) != 1 {
		t.Fatalf("rings %v, verdicts %+v", w.rings, v)
	}
	if f := last.Findings[0]; !strings.HasPrefix(f.Cause, "cell A gauge") {
		t.Errorf("names %s first: %s", f.Cause, last.Text)
	}
	t.Log(last.Text)
	alarms := w.core.Alarms(&w.state)
	if len(alarms) == 0 || alarms[0].Cause != last.Text {
		t.Errorf("the alarm says %+v", alarms)
	}
	w.rederive(v)
}

// rederive finds every verdict again from what its record holds.
func (w *watchedBench) rederive(all []DriftData) {
	w.t.Helper()
	for _, d := range all {
		text, err := json.Marshal(d)
		if err != nil {
			w.t.Fatal(err)
		}
		var back DriftData
		if err := json.Unmarshal(text, &back); err != nil {
			w.t.Fatal(err)
		}
		again, err := back.Again()
		if err != nil || len(again) != len(d.Findings) {
			w.t.Fatalf("%d findings again, recorded %d: %v", len(again), len(d.Findings), err)
		}
		for i, f := range again {
			if f.Cause.Name != d.Findings[i].Cause || f.Probability != d.Findings[i].Probability || f.Amount != d.Findings[i].Amount {
				w.t.Errorf("again %s %v, recorded %+v", f.Cause.Name, f.Probability, d.Findings[i])
			}
		}
	}
}

// A sag of the energy is seen by strength, width and wavelength together. From
// here nobody can tell it from coupling, and that is said.
func TestDriftOfEnergyIsSaidWithWhatLooksTheSame(t *testing.T) {
	w := newWatched(t, 2)
	w.live(15*time.Minute, nil)
	sag := func(since time.Duration) {
		e := -0.15 * since.Hours()
		w.off[reading.Emission], w.off[reading.EmissionStrength], w.off[reading.EmissionWidth] = 3.6e-9*e, 0.06*1.7*e, 14e-9*0.8*e
	}
	w.live(40*time.Minute, sag)
	v := w.verdicts()
	last := v[len(v)-1]
	if len(last.Findings) == 0 || !strings.Contains(last.Text, "pulse energy") || !strings.Contains(last.Text, "cannot be told apart from here") {
		t.Errorf("says %s", last.Text)
	}
	if len(w.rings) != 1 || w.rings[0] != alarmLight {
		t.Errorf("rings %v", w.rings)
	}
	for _, f := range last.Findings {
		if f.Cause == "pulse energy" && !(f.Amount < -0.06 && f.Amount > -0.12) { // weighed some minutes before the end
			t.Errorf("the energy changed by %.3f, put in up to -0.10", f.Amount)
		}
	}
	if len(last.Steps) == 0 || !last.Steps[0].ByHand {
		t.Errorf("offers %+v", last.Steps)
	}
	t.Log(last.Text, last.Steps)
}

func TestDriftLeavesNoTraceOfAShutter(t *testing.T) {
	w := newWatched(t, 3)
	w.live(15*time.Minute, nil)
	before := len(w.verdicts())
	w.shutter = true
	w.live(10*time.Minute, nil)
	w.shutter = false
	w.live(20*time.Minute, nil)
	if v := w.verdicts(); len(v) != before || len(w.rings) > 0 {
		t.Errorf("a shutter left %+v, rings %v", v[before:], w.rings)
	}
}

// What a record holds brings another core to the same verdicts.
func TestDriftIsFoundAgainFromTheRecord(t *testing.T) {
	w := newWatched(t, 4)
	w.live(15*time.Minute, nil)
	w.off[reading.Emission] = 0.6e-9
	w.live(10*time.Minute, nil)
	follower := newWatched(t, 4)
	follower.state.Follow()
	for _, r := range w.records {
		if e, ok := ToldBy(r.At, r.Data); ok && (e.Means != nil || e.Drift != nil) {
			follower.core.Step(&follower.state, e, nil)
		}
	}
	a, b := w.core.Drift(&w.state), follower.core.Drift(&follower.state)
	if a.Text != b.Text || a.Standing != b.Standing || a.By != b.By || !a.Standing {
		t.Errorf("the follower says %q %v %v, the first %q %v %v", b.Text, b.Standing, b.By, a.Text, a.Standing, a.By)
	}
	ta, tb := a.Tracks[drift.Wavelength], b.Tracks[drift.Wavelength]
	if !reflect.DeepEqual(ta.Last, tb.Last) || ta.Quiet.Mean != tb.Quiet.Mean {
		t.Errorf("the chart of the follower stands at %+v, that of the first at %+v", tb.Last, ta.Last)
	}
}

func TestLearnAnewTakesWhatIsAsGood(t *testing.T) {
	w := newWatched(t, 5)
	w.live(15*time.Minute, nil)
	w.off[reading.Emission] = 0.6e-9
	w.live(5*time.Minute, nil)
	if v := w.core.Drift(&w.state); !v.Standing {
		t.Fatal("nothing stands")
	}
	w.take(Asked{At: w.stamp(), Intent: LearnAnew{}})
	w.live(15*time.Minute, nil)
	if v := w.core.Drift(&w.state); v.Standing || !v.Learnt {
		t.Errorf("after learning anew %+v", v)
	}
	for _, a := range w.core.Alarms(&w.state) {
		if a.Name == alarmLight && a.Active {
			t.Error("it still rings")
		}
	}
}

// While gas leaks the light moves with the pressure, and that is no second
// cause.
func TestALeakStaysALeakWhileTheLightFollows(t *testing.T) {
	w := newWatched(t, 6)
	w.live(2*time.Second, nil)
	w.valvesShut = true
	w.live(20*time.Minute, func(since time.Duration) {
		fallen := -35 * since.Seconds()
		w.off[reading.CellAPressure], w.off[reading.CellBPressure] = fallen, fallen
		w.off[reading.Emission], w.off[reading.EmissionStrength] = 9e-14*fallen, 2e-7*fallen
	})
	if len(w.rings) != 1 || w.rings[0] != alarmLeak {
		t.Errorf("rings %v", w.rings)
	}
	for _, d := range w.verdicts() {
		if len(d.Findings) > 0 && (d.Findings[0].Cause != "slow leak" || d.Findings[0].Probability < 0.9) {
			t.Errorf("says %s", d.Text)
		}
	}
	w.rederive(w.verdicts())
}
