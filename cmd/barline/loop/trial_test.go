package loop_test

import (
	"errors"
	"fmt"
	"maps"
	"math"
	"math/rand/v2"
	"os"
	"runtime"
	"slices"
	"strconv"
	"sync"
	"testing"
	"time"

	"barline/cmd/barline/loop"
	"barline/device/instrument"
	"barline/model/bench"
	"barline/model/clock"
	"barline/model/emission"
	"barline/model/limit"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/simulate"
)

// A trial is the real core and loop, the real drivers and the simulated bench
// in memory, all on one fake clock and one goroutine: a minute of bench time
// takes some milliseconds, and a seed gives the same minute again.
type trial struct {
	t    testing.TB
	seed uint64
	rng  *rand.Rand

	clk   *clock.Fake
	sim   *simulate.Bench
	loop  *loop.Loop
	core  *live.Core
	start live.State
	seats []*seat
	disk  memory

	tamper  func(r reading.Reading)     // takes readings instead of the loop
	obeying func(command uint64) string // "lose", "refuse" or "delay"
	later   []delayed

	seen    []live.Event
	faulty  bool      // wire faults of this trial
	gauges  []float64 // Pa, of the last two seconds
	alarmed map[string]time.Duration
	sent    struct {
		any      bool
		setpoint unit.Pascal
		at       time.Duration
	}
	under   bool          // the last command on the wire was a setpoint
	heldAt  time.Duration // when HOLD last reached the wire; 0 before the first
	askedAt time.Duration // when somebody last asked for gas to move
}

// delayed is a command that is still on its way.
type delayed struct {
	at time.Duration
	do func()
}

// seat is one instrument and its line.
type seat struct {
	in    *instrument.Instrument
	name  string
	every time.Duration
	next  time.Duration
	line  *simulate.Line
	down  bool
	buf   []reading.Reading
}

func newTrial(t testing.TB, seed uint64, pressure unit.Pascal) *trial {
	t.Helper()
	tr := &trial{t: t, seed: seed, rng: rand.New(rand.NewPCG(seed, 1)), alarmed: map[string]time.Duration{}}
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	if tr.sim, err = simulate.New(simulate.Options{Seed: seed, Scenario: "quiet", Pressure: pressure}); err != nil {
		t.Fatal(err)
	}
	tr.clk = clock.NewFake(time.Date(2026, 12, 1, 11, 0, 0, 0, time.UTC))
	tr.clk.Advance(time.Second) // an instant of zero means never
	tr.sim.Follow(tr.clk)
	if tr.core, tr.start, err = live.New(b, predictor(t)); err != nil {
		t.Fatal(err)
	}
	for i := range b.Instrument {
		in, err := instrument.New(b.Instrument[i], b.Panel.Ambient)
		if err != nil {
			t.Fatal(err)
		}
		tr.seats = append(tr.seats, &seat{in: in, name: b.Instrument[i].Name, every: b.Instrument[i].Every.Duration(), down: true})
	}
	tr.loop = loop.New(loop.Options{
		Bench: b, Core: tr.core, State: tr.start, Clock: tr.clk, Book: &tr.disk, Wire: tr,
		Seen: func(e live.Event) { tr.seen = append(tr.seen, e) },
		Call: func(c live.Call) {
			if _, known := tr.alarmed[c.Alarm]; !known {
				tr.alarmed[c.Alarm] = tr.clk.Now().Mono
			}
		},
	})
	return tr
}

// shared is built once; each trial takes a copy.
var shared = sync.OnceValues(func() (*emission.Predictor, error) {
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		return nil, err
	}
	setup, err := emission.SetupFromBench(b)
	if err != nil {
		return nil, err
	}
	return emission.NewPredictor(setup)
})

func predictor(t testing.TB) *emission.Predictor {
	t.Helper()
	p, err := shared()
	if err != nil {
		t.Fatal(err)
	}
	return p.Clone()
}

func (tr *trial) fail(format string, args ...any) {
	tr.t.Helper()
	tr.t.Fatalf("seed %d at %v: %s", tr.seed, tr.clk.Now().Mono, fmt.Sprintf(format, args...))
}

// Setpoint implements loop.Wire and holds the laws of what reaches the wire.
func (tr *trial) Setpoint(command uint64, sp limit.Setpoint) {
	now := tr.clk.Now()
	p, ok := sp.Pressure()
	low := tr.core.Limits().Lowest().Max
	if !ok || !(p >= 0 && p <= low) {
		tr.fail("setpoint %v (valid %v) reached the wire", p, ok)
	}
	if tr.heldAt != 0 && tr.askedAt <= tr.heldAt {
		tr.fail("a setpoint reached the wire after HOLD, and nobody asked")
	}
	if tr.disk.lost {
		tr.fail("setpoint %v reached the wire with the disk lost", p)
	}
	const rate, slack = 0.2e5, 0.05e5 // Pa/s; a gauge and the core may differ from the wire by this
	jump := math.Abs(float64(p - tr.sent.setpoint))
	fromGas := math.Inf(1)
	for _, x := range tr.gauges { // of the time in which a reading may stand
		fromGas = min(fromGas, math.Abs(float64(p)-x))
	}
	// An intent is stamped when it was asked, up to one turn before it is folded.
	if tr.sent.any && now.Mono-tr.sent.at < time.Second-turnEvery && p != tr.sent.setpoint {
		tr.fail("setpoint %v came %v after %v", p, now.Mono-tr.sent.at, tr.sent.setpoint)
	}
	if (!tr.sent.any || jump > rate+1e-6) && fromGas > rate+slack {
		tr.fail("setpoint %v is %.0f Pa from the last and %.0f Pa from the gas", p, jump, fromGas)
	}
	tr.sent.any, tr.sent.setpoint, tr.sent.at, tr.under = true, p, now.Mono, true
	tr.obey(command, func(s *seat) error { return s.in.Set(s.line, sp) })
}

// Hold implements loop.Wire.
func (tr *trial) Hold(command uint64, sp limit.Setpoint) {
	tr.heldAt, tr.under = tr.clk.Now().Mono, false
	tr.obey(command, func(s *seat) error { return s.in.Hold(s.line, sp) })
}

// Order implements loop.Wire and holds the laws of what moves a valve or the
// attenuator.
func (tr *trial) Order(command uint64, o limit.Order) {
	if tr.disk.lost {
		tr.fail("%T reached the wire with the disk lost", o)
	}
	if tr.heldAt != 0 && tr.askedAt <= tr.heldAt {
		tr.fail("%T reached the wire after HOLD, and nobody asked", o)
	}
	switch o := o.(type) {
	case limit.EnergyOrder:
		if e, _, ok := o.Order(); !ok || !(e > 0 && e <= tr.core.Limits().MostEnergy) {
			tr.fail("pulse energy %v (valid %v) reached the wire", e, ok)
		}
	default:
		tr.fail("%T reached the wire, and nobody asked", o)
	}
	tr.obeyBy(command, func(s *seat) bool { return s.in.Takes(o) }, func(s *seat) error { return s.in.Move(s.line, o) })
}

// obey lets the controller carry out a command; a faulty wire loses some.
func (tr *trial) obey(command uint64, do func(*seat) error) {
	tr.obeyBy(command, func(s *seat) bool { return s.in.TakesSetpoint() }, do)
}

// obeyBy lets those instruments carry out a command that takes picks.
func (tr *trial) obeyBy(command uint64, takes func(*seat) bool, do func(*seat) error) {
	if tr.faulty && tr.rng.IntN(12) == 0 {
		return // lost on the way, and so is its answer
	}
	for _, s := range tr.seats {
		if !takes(s) {
			continue
		}
		act := func() {
			err := errors.New("no line to " + s.name)
			if !s.down {
				err = do(s)
			}
			tr.loop.Answer(command, err, tr.clk.Now())
		}
		fate := ""
		if tr.obeying != nil {
			fate = tr.obeying(command)
		}
		switch fate {
		case "lose":
		case "refuse":
			tr.loop.Answer(command, errors.New("-222 data out of range"), tr.clk.Now())
		case "delay":
			tr.later = append(tr.later, delayed{tr.clk.Now().Mono + 2*time.Second, act})
		default:
			act()
		}
	}
}

func (tr *trial) ask(in live.Intent) {
	switch in.(type) {
	case live.GoTo, live.Run, live.Resume, live.Skip, live.Tune, live.Confirm:
		tr.askedAt = tr.clk.Now().Mono
		tr.heldAt = min(tr.heldAt, tr.askedAt-1)
	}
	tr.loop.Do(in)
}

// arm arms the bench, all cautions read.
func (tr *trial) arm() {
	tr.ask(live.Arm{})
	for _, c := range []live.Caution{live.Filling, live.Venting} {
		tr.ask(live.Understood{Caution: c})
	}
}

// gaugesKept is how many cell readings come in while one does not go stale.
const gaugesKept = 2 * 20

const turnEvery = 50 * time.Millisecond

// turn carries everything on by one tick of the loop.
func (tr *trial) turn() {
	tr.clk.Advance(turnEvery)
	now := tr.clk.Now()
	if err := tr.sim.Advance(now.Mono); err != nil {
		tr.fail("%v", err)
	}
	for len(tr.later) > 0 && tr.later[0].at <= now.Mono {
		act := tr.later[0].do
		tr.later = tr.later[1:]
		act()
	}
	for _, s := range tr.seats {
		tr.poll(s, now)
	}
	tr.loop.Turn()
	tr.laws()
}

func (tr *trial) poll(s *seat, now reading.Stamp) {
	if s.down {
		line := tr.sim.Lines()[s.name]
		if _, err := line.Write(nil); err != nil {
			return
		}
		s.line, s.down = line, false
		s.in.Opened()
		tr.loop.Link(s.name, true, "", now)
	}
	var err error
	switch {
	case s.in.Streams():
		s.buf, err = s.in.Drain(s.line, tr.clk.Now, s.buf[:0])
	case now.Mono >= s.next:
		s.next = now.Mono + s.every
		s.buf, err = s.in.Poll(s.line, tr.clk.Now, s.buf[:0])
	default:
		return
	}
	for _, r := range s.buf {
		if tr.tamper != nil {
			tr.tamper(r)
		} else {
			tr.loop.Reading(r)
		}
		if r.Role == reading.CellAPressure || r.Role == reading.CellBPressure {
			tr.gauges = append(tr.gauges, r.Value)
			tr.gauges = tr.gauges[max(0, len(tr.gauges)-gaugesKept):]
		}
	}
	if err != nil {
		s.down = true
		tr.loop.Link(s.name, false, err.Error(), now)
	}
}

// laws hold at every instant of every trial.
func (tr *trial) laws() {
	s := tr.loop.Snapshot()
	if tr.disk.bad != nil {
		tr.fail("%v", tr.disk.bad)
	}
	moving := s.Mode == live.Ramping || s.Mode == live.Settling || s.Mode == live.Isolated
	if moving {
		a := s.Latest[reading.CellAPressure]
		if a.Channel != "" && s.Now.Mono-a.Taken.Mono > tr.core.Stale()+time.Second {
			tr.fail("cell A was last read %v ago and the bench is %v", s.Now.Mono-a.Taken.Mono, s.Mode)
		}
		if tr.disk.lost {
			tr.fail("the disk is lost and the bench is %v", s.Mode)
		}
	}
	tr.pairs()
	if s.Mode == live.Steady && !tr.under {
		tr.fail("steady at %v (%s), which the controller was never given", s.Setpoint, s.Why)
	}
	for _, v := range []float64{float64(s.Core), float64(s.Lag), float64(s.Prediction.Emission), float64(s.Prediction.Sigma), float64(s.Residual)} {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			tr.fail("a number on the screen is %v", v)
		}
	}
}

// pairs holds that no two of inlet, vent and pump are ever open at once, as the
// bench truly is.
func (tr *trial) pairs() {
	inlet, vent, pump := tr.sim.Openings()
	if inlet > 0 && vent > 0 || inlet > 0 && pump > 0 || vent > 0 && pump > 0 {
		tr.fail("inlet %.3f, vent %.3f, pump %.3f open at once", inlet, vent, pump)
	}
}

// operator asks for anything at any time.
func (tr *trial) operator() {
	switch tr.rng.IntN(40) {
	case 0:
		tr.ask(live.Arm{})
	case 1, 2:
		tr.ask(live.GoTo{Target: unit.Pascal(tr.rng.Float64()*20-2) * unit.Bar})
	case 3:
		tr.ask(live.Hold{})
	case 4:
		tr.ask(live.Pause{})
	case 5:
		tr.ask(live.Resume{})
	case 6:
		tr.ask(live.Skip{})
	case 7:
		tr.ask(live.Stop{})
	case 8:
		tr.ask(live.Disarm{})
	case 9:
		p := &live.Program{Name: "storm"}
		for range 1 + tr.rng.IntN(4) {
			p.Phases = append(p.Phases, live.Phase{
				Label: "leg", Action: live.Action(tr.rng.IntN(4)), Target: unit.Pascal(tr.rng.Float64()*17) * unit.Bar,
				Dwell: time.Duration(tr.rng.IntN(8)) * time.Second, Row: true,
				Floor: unit.PascalPerSecond(max(0, tr.rng.IntN(400)-200)), Energy: unit.Joule(1+tr.rng.IntN(3)) * 0.5 * unit.Microjoule,
			})
		}
		tr.ask(live.Run{Program: p})
	case 10:
		if names := slices.Sorted(maps.Keys(tr.alarmed)); len(names) > 0 {
			tr.ask(live.Acknowledge{Alarm: names[0]})
		}
	case 11:
		tr.ask(live.GoTo{Target: unit.Pascal(math.NaN())})
		tr.ask(live.Tune{Emission: unit.Metre(math.NaN())})
	case 13:
		tr.ask(live.Tune{Emission: unit.Metre(200+100*tr.rng.Float64()) * unit.Nanometre, Hold: tr.rng.IntN(2) == 0})
	case 14:
		tr.ask(live.Understood{Caution: live.Caution(tr.rng.IntN(4))})
	case 15:
		tr.ask(live.Confirm{})
	case 12:
		tr.arm()
		tr.ask(live.GoTo{Target: unit.Pascal(1+10*tr.rng.Float64()) * unit.Bar})
	}
}

// misfortune lets something go wrong, or right again.
func (tr *trial) misfortune() {
	switch tr.rng.IntN(120) {
	case 0:
		tr.disk.lost = !tr.disk.lost
	case 1:
		tr.clk.Step(time.Duration(tr.rng.IntN(7200)-3600) * time.Second)
	case 2, 3, 4:
		kinds := []simulate.Kind{
			simulate.Leak, simulate.Stuck, simulate.Zero, simulate.Sag, simulate.Warm,
			simulate.Dead, simulate.Garbage, simulate.Unplugged, simulate.Shutter,
		}
		k := kinds[tr.rng.IntN(len(kinds))]
		where := k.Places()
		if err := tr.sim.Inject(simulate.Fault{Kind: k, Where: where[tr.rng.IntN(len(where))], Over: tr.rng.IntN(2) == 0}); err != nil {
			tr.fail("%v", err)
		}
	}
}

// replay folds what the core was given once more and wants the same end.
func (tr *trial) replay() {
	state := tr.start
	state.Now, state.Record = reading.Stamp{UTC: time.Date(2026, 12, 1, 11, 0, 1, 0, time.UTC), Mono: time.Second}, live.RecordHealth{Writing: true}
	var fx []live.Effect
	for _, e := range tr.seen {
		fx = tr.core.Step(&state, e, fx[:0])
	}
	if got := tr.loop.State(); !live.Same(got, state) {
		tr.fail("replayed, the state is not the same: mode %v for %v, setpoint %v for %v", state.Mode, got.Mode, state.Setpoint, got.Setpoint)
	}
}

// seeds returns those that a test tries: as many as the environment variable
// says, from BARLINE_FROM on or from 0, or the one that BARLINE_SEED names.
func seeds(variable string, short int) []uint64 {
	if one, err := strconv.ParseUint(os.Getenv("BARLINE_SEED"), 10, 64); err == nil {
		return []uint64{one}
	}
	if n, err := strconv.Atoi(os.Getenv(variable)); err == nil {
		short = n
	}
	from, err := strconv.ParseUint(os.Getenv("BARLINE_FROM"), 10, 64)
	if err != nil {
		from = 0
	}
	all := make([]uint64, short)
	for i := range all {
		all[i] = from + uint64(i)
	}
	return all
}

// each runs f for every seed, on as many goroutines as there are processors.
func each(t *testing.T, seeds []uint64, f func(t *testing.T, seed uint64)) {
	workers := min(runtime.GOMAXPROCS(0), len(seeds))
	for w := range workers {
		t.Run(fmt.Sprintf("part %d", w+1), func(t *testing.T) {
			t.Parallel()
			for i := w; i < len(seeds); i += workers {
				f(t, seeds[i])
			}
		})
	}
}

// Anything may go wrong while anybody presses anything: the laws hold, and the
// same events give the same state.
func TestStorms(t *testing.T) {
	each(t, seeds("BARLINE_STORMS", 8), func(t *testing.T, seed uint64) {
		tr := newTrial(t, seed, unit.Pascal(1.1+float64(seed%10))*unit.Bar)
		tr.faulty = seed%3 == 0
		if seed%8 == 5 {
			inject(simulate.Fault{Kind: simulate.Supply, Size: float64(20 * (seed % 7))})(tr)
		}
		for tr.clk.Now().Mono < 120*time.Second {
			tr.operator()
			tr.misfortune()
			tr.turn()
		}
		tr.replay()
		if seed%16 == 3 { // a real folder costs more than the trial
			tr.verifies()
		}
	})
}

// A quiet bench that fills and steps raises no alarm, does not overshoot, and
// arrives.
func TestQuietFills(t *testing.T) {
	worst := 0.0
	for _, seed := range seeds("BARLINE_FILLS", 8) {
		tr := newTrial(t, seed, 5*unit.Bar)
		target := unit.Pascal(6.5+0.1*float64(seed%20)) * unit.Bar
		for tr.clk.Now().Mono < 4*time.Second {
			tr.turn()
		}
		tr.arm()
		tr.ask(live.GoTo{Target: target})
		for tr.clk.Now().Mono < 60*time.Second && tr.loop.Snapshot().Outcome != live.Completed {
			tr.turn()
			for _, r := range []reading.Role{reading.CellAPressure, reading.CellBPressure} {
				worst = max(worst, tr.loop.Snapshot().Latest[r].Value/float64(target)-1)
			}
		}
		if s := tr.loop.Snapshot(); s.Outcome != live.Completed || s.Mode != live.Steady {
			tr.fail("the fill to %v ended in %v: %s", target, s.Mode, s.Why)
		}
		if len(tr.alarmed) != 0 {
			tr.fail("a quiet fill raised %v", tr.alarmed)
		}
	}
	t.Logf("largest overshoot %.3f %% of the setpoint", 100*worst)
	if worst > 0.005 {
		t.Errorf("overshoot %.3f %% of the setpoint, allowed 0.5 %%", 100*worst)
	}
}

// Tuning arrives at the wanted wavelength although the model is off, and
// holding keeps it there while the pulse energy sags.
func TestTuneAndHold(t *testing.T) {
	for _, seed := range seeds("BARLINE_FAULTS", 1) {
		tr := newTrial(t, seed, 8*unit.Bar)
		for tr.clk.Now().Mono < 4*time.Second {
			tr.turn()
		}
		tr.arm()
		tr.ask(live.Tune{Emission: 252 * unit.Nanometre, Hold: true})
		for tr.clk.Now().Mono < 90*time.Second {
			tr.turn()
		}
		s := tr.loop.Snapshot()
		before := s.Latest[reading.Emission].Value*1e9 - 252
		if s.Mode != live.Steady || math.Abs(before) > 0.5 {
			tr.fail("ninety seconds after it was asked for 252 nm it is %+.2f nm away, %v: %s %s", before, s.Mode, s.Why, s.Notice)
		}
		begun := s.Setpoint
		if err := tr.sim.Inject(simulate.Fault{Kind: simulate.Sag, Size: 0.4}); err != nil {
			t.Fatal(err)
		}
		for tr.clk.Now().Mono < 8*time.Minute {
			tr.turn()
		}
		s = tr.loop.Snapshot()
		after := s.Latest[reading.Emission].Value*1e9 - 252
		t.Logf("seed %d: %+.2f nm away at %v, after a sag of energy %+.2f nm at %v (%s)", seed, before, begun, after, s.Setpoint, s.Why)
		if math.Abs(after) > 0.5 || math.Abs(float64(s.Setpoint-begun)) > 0.3e5+1 {
			tr.fail("held at %+.2f nm with %v: %s", after, s.Setpoint, s.Why)
		}
		if err := tr.sim.Inject(simulate.Fault{Kind: simulate.Shutter}); err != nil {
			t.Fatal(err)
		}
		stands := s.Setpoint
		for tr.clk.Now().Mono < 9*time.Minute {
			tr.turn()
		}
		if s = tr.loop.Snapshot(); s.Setpoint != stands {
			tr.fail("the shutter is closed and the setpoint moved from %v to %v", stands, s.Setpoint)
		}
	}
}

// A leak test tells a bench that leaks from one that does not, by its own
// record.
func TestLeakTest(t *testing.T) {
	for _, c := range []struct {
		name  string
		fault *simulate.Fault
		leaks bool
	}{
		{"tight", nil, false},
		{"leaking", &simulate.Fault{Kind: simulate.Leak, Size: 0.5}, true},
	} {
		t.Run(c.name, func(t *testing.T) {
			tr := newTrial(t, 3, 9*unit.Bar)
			if c.fault != nil {
				if err := tr.sim.Inject(*c.fault); err != nil {
					t.Fatal(err)
				}
			}
			for tr.clk.Now().Mono < 4*time.Second {
				tr.turn()
			}
			tr.arm()
			tr.ask(live.Run{Program: &live.Program{Name: "leak test", Phases: []live.Phase{
				{Label: "valves shut", Action: live.Isolate, Dwell: 5 * time.Minute, Row: true},
			}}})
			for tr.clk.Now().Mono < 6*time.Minute && tr.loop.Snapshot().Outcome == live.NoOutcome {
				tr.turn()
			}
			rows := tr.loop.Snapshot().Rows
			if len(rows) != 1 || rows[0].Rise == nil {
				t.Fatalf("rows %v", rows)
			}
			rise := rows[0].Rise
			t.Logf("%v", rise)
			if leaks := rise.LeakPaM3S < -3*rise.LeakSigma && rise.LeakSigma > 0; leaks != c.leaks {
				t.Errorf("leak %.3g ± %.1g Pa m3/s, leaking: want %v", rise.LeakPaM3S, rise.LeakSigma, c.leaks)
			}
		})
	}
}

// A scan up and down with everything in order completes by itself and writes a
// row a step.
func TestScanCompletes(t *testing.T) {
	for _, seed := range seeds("BARLINE_SCANS", 1) {
		tr := newTrial(t, seed, 7*unit.Bar)
		p := &live.Program{Name: "scan"}
		for i := range 41 {
			k := min(i, 40-i)
			p.Phases = append(p.Phases, live.Phase{
				Label: fmt.Sprintf("scan %d of 41", i+1), Target: 7*unit.Bar + unit.Pascal(k)*0.2*unit.Bar,
				Dwell: 3 * time.Second, Row: true,
			})
		}
		for tr.clk.Now().Mono < 4*time.Second {
			tr.turn()
		}
		tr.arm()
		tr.ask(live.Run{Program: p})
		for tr.clk.Now().Mono < 15*time.Minute && tr.loop.Snapshot().Outcome == live.NoOutcome {
			tr.turn()
		}
		rows := 0
		for _, r := range tr.disk.records {
			if len(r) > 5 && r[:5] == "step " {
				rows++
			}
		}
		if s := tr.loop.Snapshot(); s.Outcome != live.Completed || rows != 41 || len(s.Rows) != 41 {
			tr.fail("the scan ended in %v (%s) with %d rows recorded and %d shown, want 41", s.Mode, s.Why, rows, len(s.Rows))
		}
		tr.replay()
	}
}

// A scan over pulse energies turns the attenuator by itself, and its rows say
// at which energy they were taken.
func TestScanOverEnergies(t *testing.T) {
	tr := newTrial(t, 2, 8*unit.Bar)
	p := &live.Program{Name: "energies"}
	for _, e := range []unit.Joule{1.1 * unit.Microjoule, 1.5 * unit.Microjoule} {
		p.Phases = append(p.Phases,
			live.Phase{Label: "energy", Action: live.SetEnergy, Energy: e},
			live.Phase{Label: "measuring", Target: 8.5 * unit.Bar, Dwell: 3 * time.Second, Row: true})
	}
	for tr.clk.Now().Mono < 4*time.Second {
		tr.turn()
	}
	tr.arm()
	tr.ask(live.Run{Program: p})
	for tr.clk.Now().Mono < 3*time.Minute && tr.loop.Snapshot().Outcome == live.NoOutcome {
		tr.turn()
	}
	s := tr.loop.Snapshot()
	if s.Outcome != live.Completed || len(s.Rows) != 2 {
		tr.fail("it ended in %v (%s) with %d rows", s.Mode, s.Why, len(s.Rows))
	}
	if a, b := s.Rows[0], s.Rows[1]; math.Abs(a.EnergyJ-1.1e-6) > 0.01e-6 || math.Abs(b.EnergyJ-1.5e-6) > 0.01e-6 ||
		a.MeasuredM == nil || b.MeasuredM == nil || math.Abs(*a.MeasuredM-*b.MeasuredM) < 0.2e-9 {
		tr.fail("rows %v and %v, want them at 1.1 uJ and 1.5 uJ with different light", a, b)
	}
	tr.replay()
}

// BenchmarkTrial is a minute of bench time with three instruments in memory.
func BenchmarkTrial(b *testing.B) {
	b.ReportAllocs()
	for range b.N {
		tr := newTrial(b, 1, 9*unit.Bar)
		for tr.clk.Now().Mono < time.Minute {
			tr.turn()
		}
	}
	b.ReportMetric(60*float64(b.N)/b.Elapsed().Seconds(), "x_life")
}
