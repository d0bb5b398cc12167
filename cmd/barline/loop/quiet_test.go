package loop_test

import (
	"math"
	"math/rand/v2"
	"os"
	"strconv"
	"sync"
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// A quiet bench is made of readings alone, one of each channel every ten
// seconds: what a bench shows whose gas stands, whose room warms and cools with
// the day, and whose light only scatters. It goes through the real core;
// the model is the real one, made straight round the working point: it is asked
// nowhere else, and is ten times as fast so.
type quiet struct {
	t     testing.TB
	rng   *rand.Rand
	core  *live.Core
	state live.State
	now   reading.Stamp
	fx    []live.Effect

	wander                     [4]float64 // slow noise of unit variance: gauges, room, light, strength
	model                      tangent
	raised                     map[string][]time.Duration // when, by alarm
	setpoints, holds, readings int
}

const (
	quietEvery       = 10 * time.Second
	quietPressure    = 9 * unit.Bar
	quietTemperature = unit.Kelvin(295.15)
)

// tangent is a model made straight round one point.
type tangent struct {
	at                    emission.Prediction
	pascal, kelvin, joule float64 // m per each
}

func tangentOf(p *emission.Predictor, in emission.Input) tangent {
	t := tangent{at: p.Predict(in, nil)}
	slope := func(more emission.Input, by float64) float64 {
		return float64(p.Predict(more, nil).Emission-t.at.Emission) / by
	}
	more := in
	more.Pressure += 1e3
	t.pascal = slope(more, 1e3)
	more = in
	more.Temperature += 0.5
	t.kelvin = slope(more, 0.5)
	more = in
	more.Energy *= 1.01
	t.joule = slope(more, float64(more.Energy-in.Energy))
	return t
}

// Predict implements live.Predictor.
func (t tangent) Predict(in emission.Input, _ *emission.Prediction) emission.Prediction {
	out := t.at
	out.Input = in
	out.Emission += unit.Metre(t.pascal*float64(in.Pressure-t.at.Input.Pressure) +
		t.kelvin*float64(in.Temperature-t.at.Input.Temperature) + t.joule*float64(in.Energy-t.at.Input.Energy))
	return out
}

func newQuiet(t testing.TB, seed uint64) *quiet {
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	b.Limits.Stale = 30 // three readings missing
	q := &quiet{t: t, rng: rand.New(rand.NewPCG(seed, 7)), raised: map[string][]time.Duration{}}
	q.model = tangentOf(predictor(t), emission.Input{Pressure: quietPressure, Temperature: quietTemperature, Energy: b.Pulse.Energy, Air: b.Gas.Air})
	if q.core, q.state, err = live.New(b, q.model); err != nil {
		t.Fatal(err)
	}
	q.now = reading.Stamp{UTC: time.Date(2026, 12, 1, 11, 0, 0, 0, time.UTC)}
	q.pass(0)
	q.step(live.RecordChanged{At: q.now, Health: live.RecordHealth{Writing: true}})
	for i := range b.Instrument {
		q.step(live.LinkChanged{At: q.now, Instrument: b.Instrument[i].Name, Up: true})
	}
	q.turn()
	for _, intent := range []live.Intent{live.Arm{}, live.Understood{Caution: live.Filling}, live.GoTo{Target: quietPressure}} {
		q.step(live.Asked{At: q.now, Intent: intent})
	}
	return q
}

func (q *quiet) step(e live.Event) {
	q.fx = q.core.Step(&q.state, e, q.fx[:0])
	var answers []uint64
	for _, f := range q.fx {
		switch f := f.(type) {
		case live.Call:
			q.raised[f.Alarm] = append(q.raised[f.Alarm], q.now.Mono)
		case live.SendSetpoint:
			q.setpoints++
			answers = append(answers, f.Command)
		case live.SendHold:
			q.holds++
			answers = append(answers, f.Command)
		}
	}
	for _, id := range answers {
		q.step(live.Answered{At: q.now, Command: id})
	}
}

// pass lets time pass.
func (q *quiet) pass(d time.Duration) {
	q.now.Mono += d
	q.now.UTC = q.now.UTC.Add(d)
}

// turn gives the core one reading of each channel, and a tick.
func (q *quiet) turn() {
	q.pass(quietEvery)
	tau := [...]time.Duration{5 * time.Minute, 30 * time.Minute, time.Minute, 2 * time.Minute}
	for i := range q.wander {
		keep := math.Exp(-float64(quietEvery) / float64(tau[i]))
		q.wander[i] = keep*q.wander[i] + math.Sqrt(1-keep*keep)*q.rng.NormFloat64()
	}
	day := math.Sin(2 * math.Pi * float64(q.now.Mono) / float64(24*time.Hour))
	warmer := 0.15*day + 0.03*q.wander[1] // K, of the fibre
	away := 30 * q.wander[0]              // Pa, as the controller keeps it
	noise := func(sigma float64) float64 { return sigma * q.rng.NormFloat64() }
	light := float64(q.model.at.Emission) + 12e-9 + q.model.pascal*away + q.model.kelvin*warmer
	q.read("cell A", reading.CellAPressure, float64(quietPressure)+away+noise(50))
	q.read("cell B", reading.CellBPressure, float64(quietPressure)-200+away+noise(50))
	q.read("fibre", reading.FibreTemperature, float64(quietTemperature)+warmer+noise(0.01))
	q.read("room", reading.RoomTemperature, float64(quietTemperature)-0.3+0.5*day+noise(0.02))
	q.read("setpoint", reading.Setpoint, float64(q.state.Setpoint))
	q.read("controller", reading.ControllerSensor, float64(quietPressure)+100+away+noise(50))
	q.read("inlet", reading.InletValve, math.Max(0, 0.01+noise(0.003)))
	q.read("vent", reading.VentValve, 0)
	q.read("pump", reading.PumpValve, 0)
	q.read("shutter", reading.ShutterOpen, 1)
	q.read("attenuator", reading.Attenuator, 0.5)
	q.read("emission", reading.Emission, light+0.03e-9*q.wander[2]+noise(0.05e-9))
	q.read("width", reading.EmissionWidth, 7e-9+noise(0.05e-9))
	q.read("strength", reading.EmissionStrength, 0.05*(1+0.004*q.wander[3]+noise(0.005)))
	q.step(live.Tick{At: q.now})
}

func (q *quiet) read(channel string, role reading.Role, v float64) {
	q.readings++
	q.step(live.Read{Reading: reading.Reading{Channel: channel, Role: role, Value: v, Taken: q.now, Status: reading.Good}})
}

// Hours in which nothing happens raise no alarm, move no gas and are not held.
// BARLINE_QUIET is how many.
func TestQuietHours(t *testing.T) {
	hours := 30
	if n, err := strconv.Atoi(os.Getenv("BARLINE_QUIET")); err == nil {
		hours = n
	}
	const stretch = 1000 // hours of one seed
	var mu sync.Mutex
	var raised, readings int
	parts := make([]uint64, (hours+stretch-1)/stretch)
	for i := range parts {
		parts[i] = uint64(i)
	}
	each(t, parts, func(t *testing.T, seed uint64) {
		q := newQuiet(t, seed)
		end := time.Duration(min(stretch, hours-stretch*int(seed))) * time.Hour
		for q.now.Mono < end {
			q.turn()
		}
		mu.Lock()
		defer mu.Unlock()
		readings += q.readings
		for name, times := range q.raised {
			raised += len(times)
			t.Errorf("seed %d: %q was raised %d times in %v, first at %v", seed, name, len(times), end, times[0])
		}
		if q.setpoints != 1 || q.holds != 0 || q.state.Mode != live.Steady {
			t.Errorf("seed %d: %d setpoints, %d HOLDs, %v (%s) in the end; want 1, 0 and steady", seed, q.setpoints, q.holds, q.state.Mode, q.state.Why)
		}
	})
	t.Cleanup(func() { t.Logf("%d h, %d readings: %d alarms", hours, readings, raised) })
}
