package live

import (
	"math"
	"time"

	"barline/model/bench"
	"barline/model/drift"
	"barline/model/emission"
	"barline/model/reading"
	"barline/model/unit"
)

// Sloped is a Predictor that knows how its answer turns. rough says that
// some of the slopes have not been measured by full-field runs.
type Sloped interface {
	Slopes(p emission.Prediction) (s drift.Slopes, rough bool)
}

// LearnAnew takes what is now as good: what was learnt of quiet stretches is
// forgotten, and learning begins.
type LearnAnew struct{}

func (LearnAnew) intent() {}

const (
	// BinEvery is how long readings are averaged before drift sees them.
	BinEvery = 10 * time.Second
	// A drift that stands is weighed again after a fifth of the time that it
	// has stood, between these.
	weighSoonest = 2 * time.Minute
	weighLatest  = 30 * time.Minute
)

// drifting is what is known of the drift of the light.
type drifting struct {
	monitor  drift.Monitor
	bin      bin
	told     bool // means come from a record, see Told
	weighed  time.Duration
	findings []drift.Finding // never changed after they were made
	alike    map[string][]string
	text     string // what stands, for a person
	steps    []NextStep
	seen     []seenStep        // steps that were taken since, oldest first
	observed drift.Observation // what the findings stand on
	slopes   drift.Slopes
	rough    bool
	sloped   bool
}

// bin is what ten seconds of readings come to.
type bin struct {
	from     time.Duration
	moved    bool // the bench was not at rest all the time
	pressure mean
	emission mean
	sums     [drift.ObservableCount]mean
	bad      [drift.ObservableCount]bool // a reading was not usable
	open     bool                        // a valve was open, or nothing is known of it
}

// WatchOf is what the bench file asks to be watched; nothing where it says
// nothing of drift.
func WatchOf(b *bench.Bench) drift.Watch {
	d := b.Drift
	w := drift.Watch{Learn: d.Learn.Duration(), FalseAlarm: d.FalseAlarm.Duration()}
	w.Matters[drift.Wavelength] = float64(d.Wavelength)
	w.Matters[drift.Strength] = float64(d.Strength)
	w.Matters[drift.Width] = float64(d.Width)
	w.Matters[drift.Disagreement] = float64(d.Gauges)
	w.Matters[drift.Decay] = float64(d.Leak)
	return w
}

// atRest reports whether gas and core stand still.
func (s *State) atRest() bool {
	return s.CoreKnown && math.Abs(float64(s.Lag)) <= float64(settledWithin) &&
		s.Mode != Ramping && !(s.Mode == Settling && s.run.settledAt == 0)
}

// average adds a reading to the bin.
func (c *Core) average(s *State, r reading.Reading) {
	if c.driftOf.Matters[drift.Wavelength] == 0 || s.drift.told {
		return
	}
	b := &s.drift.bin
	usable := r.Status.Usable()
	add := func(o drift.Observable, v float64) {
		if usable {
			b.sums[o].add(v)
		} else {
			b.bad[o] = true
		}
	}
	switch r.Role {
	case reading.Emission:
		add(drift.Wavelength, float64(s.Residual))
		if usable && s.ResidualAt != r.Taken.Mono { // nothing was predicted
			b.bad[drift.Wavelength] = true
		}
		if usable {
			b.emission.add(r.Value)
		} else { // in the dark there is no strength either
			b.bad[drift.Strength], b.bad[drift.Width] = true, true
		}
	case reading.EmissionStrength:
		add(drift.Strength, r.Value)
	case reading.EmissionWidth:
		add(drift.Width, r.Value)
	case reading.PulseEnergy:
		add(drift.Metered, r.Value)
	case reading.FibreTemperature:
		add(drift.Warmth, r.Value)
	case reading.CellAPressure:
		other := s.Reading(reading.CellBPressure, c.stale)
		if other.Status.Usable() {
			add(drift.Disagreement, r.Value-other.Value)
		}
		add(drift.Decay, r.Value*float64(assumedTemperature)/float64(c.cellTemperature(s)))
	case reading.CellBPressure:
		b.bad[drift.Disagreement] = b.bad[drift.Disagreement] || !usable
	}
}

// cellTemperature is that of the gas in the cells, as far as it is measured.
func (c *Core) cellTemperature(s *State) unit.Kelvin {
	for _, role := range [...]reading.Role{reading.CellTemperature, reading.FibreTemperature} {
		if r := s.Reading(role, c.stale); r.Status.Usable() && r.Value > 0 {
			return unit.Kelvin(r.Value)
		}
	}
	return assumedTemperature
}

// shut reports whether every valve is known to be shut, and stays so: a
// controller that keeps a setpoint opens its inlet for moments that nobody
// sees, and a pressure that it keeps tells of no leak.
func (c *Core) shut(s *State) bool {
	switch {
	case s.Mode == Isolated:
		return true
	case s.Mode != Held && s.Setpoint != 0:
		return false
	}
	for _, role := range [...]reading.Role{reading.InletValve, reading.PumpValve, reading.VentValve} {
		const shutBelow = 0.005
		r := s.Reading(role, c.stale)
		if fitted := s.Latest[role].Channel != ""; !fitted && role != reading.InletValve {
			continue
		}
		if !r.Status.Usable() || r.Value > shutBelow {
			return false
		}
	}
	return true
}

// watchDrift closes the bin when its time is over and judges it.
func (c *Core) watchDrift(s *State, fx []Effect) []Effect {
	if c.driftOf.Matters[drift.Wavelength] == 0 || s.drift.told {
		return fx
	}
	b := &s.drift.bin
	if b.from == 0 {
		*b = bin{from: s.Now.Mono}
	}
	b.moved = b.moved || !s.atRest()
	b.open = b.open || !c.shut(s)
	if s.CoreKnown {
		b.pressure.add(float64(s.Core))
	}
	if s.Now.Mono-b.from < BinEvery {
		return fx
	}
	x, some := b.close(s.Now.Mono)
	emission := b.emission
	*b = bin{from: s.Now.Mono}
	if !some {
		return fx
	}
	fx = append(fx, Record{At: s.Now, Kind: KindMeans, Data: meansData(s, x, emission)})
	return c.judge(s, x, fx)
}

// close returns what the bin comes to; some is false where it comes to nothing.
func (b *bin) close(at time.Duration) (x drift.Means, some bool) {
	if b.moved || b.pressure.n == 0 {
		return x, false
	}
	x = drift.Means{At: at, Pressure: unit.Pascal(b.pressure.value)}
	for o := range b.sums {
		if b.bad[o] || drift.Observable(o) == drift.Decay && b.open {
			continue
		}
		if n := b.sums[o].n; n > 0 {
			x.Value[o], x.Count[o], some = b.sums[o].value, n, true
		}
	}
	return x, some
}

// watching is the bench's watch, with what counts of temperature and metered
// energy by what they do to the light.
func (c *Core) watching(s *State) drift.Watch {
	w := c.driftOf
	c.turn(s)
	if t := math.Abs(s.drift.slopes.Temperature); t > 0 {
		w.Matters[drift.Warmth] = w.Matters[drift.Wavelength] / t
	}
	if e := math.Abs(s.drift.slopes.Energy); e > 0 {
		w.Matters[drift.Metered] = w.Matters[drift.Wavelength] / e
	}
	return w
}

// judge lets the monitor see new means and says what it found.
func (c *Core) judge(s *State, x drift.Means, fx []Effect) []Effect {
	d := &s.drift
	verdict := d.monitor.Add(c.watching(s), x)
	_, since, standing := d.monitor.Standing()
	again := min(max((s.Now.Mono-since)/5, weighSoonest), weighLatest)
	switch {
	case verdict == drift.Learnt, verdict == drift.Returned:
		d.findings, d.alike, d.steps, d.seen = nil, nil, nil, nil
		fx = append(fx, Record{At: s.Now, Kind: KindDrift, Data: c.driftData(s, verdict)})
		d.weighed = s.Now.Mono
	case verdict == drift.Drifting:
		d.seen = nil
		fx = c.weigh(s, verdict, fx)
	case standing && d.monitor.Here() && s.Now.Mono-d.weighed >= again && !d.told:
		fx = c.weigh(s, verdict, fx)
	}
	return fx
}

// learnAnew forgets what was learnt.
func (c *Core) learnAnew(s *State) {
	told := s.drift.told
	s.drift = drifting{told: told}
}

// rebase tells the monitor that the prediction has moved from was, where the
// bench stands as it did.
func (c *Core) rebase(s *State, was emission.Prediction) {
	d := &s.drift
	d.bin, d.sloped = bin{}, false
	if was.Emission == 0 || !was.Valid {
		return
	}
	now := c.ask(s).Predict(was.Input, nil)
	if !now.Valid || now.Emission == 0 {
		c.learnAnew(s)
		return
	}
	d.monitor.Rebase(float64(was.Emission - now.Emission))
}

// Follow makes the state one that takes means and verdicts from a record and
// makes none of its own, see Told.
func (s *State) Follow() { s.drift.told = true }
