package live

import (
	"strings"
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// panelBench is testBench with valves and an attenuator of its own.
func panelBench() *bench.Bench {
	b := testBench()
	b.Pulse.FullEnergy = 2.6 * unit.Microjoule
	b.Limits.Energy, b.Limits.Zero = 1.6*unit.Microjoule, 50*unit.Millibar
	b.Instrument = append(b.Instrument, bench.Instrument{Name: "panel", Channel: []bench.Channel{
		{Name: "inlet", Role: reading.InletValve, Write: "INL {value}"},
		{Name: "pump", Role: reading.PumpValve, Write: "PUMP {value}"},
		{Name: "vent", Role: reading.VentValve, Write: "VENT {value}"},
		{Name: "attenuator", Role: reading.Attenuator, Write: "ATT {value}"},
	}})
	return b
}

// newPanel is an armed bench at 1 bar whose valves are read back shut.
func newPanel(t *testing.T, p unit.Pascal) *story {
	t.Helper()
	core, state, err := New(panelBench(), straight{})
	if err != nil {
		t.Fatal(err)
	}
	st := &story{t: t, core: core, state: state, wire: p}
	st.step(RecordChanged{At: st.stamp(), Health: RecordHealth{Writing: true}})
	for _, in := range []string{"gauges", "controller", "panel"} {
		st.step(LinkChanged{At: st.stamp(), Instrument: in, Up: true})
	}
	st.show(p)
	st.ask(Arm{})
	return st
}

func (st *story) ask(in Intent) string {
	return strings.Join(st.step(Asked{At: st.stamp(), Intent: in}), ", ")
}

// show reads every gauge at p and every valve shut, and ticks.
func (st *story) show(p unit.Pascal) string {
	for _, role := range []reading.Role{reading.CellAPressure, reading.CellBPressure} {
		st.step(st.reading(role.String(), role, float64(p), reading.Good))
	}
	for v, role := range valveRoles {
		st.step(st.reading(role.String(), role, opened(st.state.hand[v].open), reading.Good))
	}
	return strings.Join(st.step(Tick{At: st.stamp()}), ", ")
}

func opened(open bool) float64 {
	if open {
		return 1
	}
	return 0
}

// pass lets time go by at pressures that p gives.
func (st *story) pass(d time.Duration, p func(time.Duration) unit.Pascal) string {
	var text []string
	for end := st.mono + d; st.mono < end; {
		st.mono += 50 * time.Millisecond
		if got := st.show(p(st.mono)); strings.Contains(got, "hold") {
			text = append(text, got)
		}
	}
	return strings.Join(text, ", ")
}

// confirm lets the instrument take the order on its way and get there.
func (st *story) confirm() {
	a := st.state.aside
	st.step(Answered{At: st.stamp(), Command: a.command})
	switch o := a.order.(type) {
	case limit.ValveOrder:
		v, open, _ := o.Order()
		st.step(st.reading(valveRoles[v].String(), valveRoles[v], opened(open), reading.Good))
	case limit.EnergyOrder:
		_, share, _ := o.Order()
		st.step(st.reading("attenuator", reading.Attenuator, float64(share), reading.Good))
	}
	st.step(Tick{At: st.stamp()})
}

func at(p unit.Pascal) func(time.Duration) unit.Pascal {
	return func(time.Duration) unit.Pascal { return p }
}

func TestValveByHand(t *testing.T) {
	st := newPanel(t, 1*unit.Bar)
	if got := st.ask(MoveValve{limit.Inlet, true}); got != "record intent, record command, valve inlet open true made true" {
		t.Fatal(got)
	}
	if got := st.ask(MoveValve{limit.Vent, true}); got != "record intent" || !strings.Contains(st.state.Notice, "not confirmed yet") {
		t.Fatalf("a second order at once: %s (%s)", got, st.state.Notice)
	}
	st.confirm()
	if got := st.ask(MoveValve{limit.Vent, true}); got != "record intent" || !strings.Contains(st.state.Notice, "inlet is open") {
		t.Errorf("vent beside an open inlet: %s (%s)", got, st.state.Notice)
	}
	if got := st.ask(GoTo{5 * unit.Bar}); got != "record intent" || !strings.Contains(st.state.Notice, "by hand") {
		t.Errorf("a ramp with a valve open by hand: %s (%s)", got, st.state.Notice)
	}
	// 0.1 bar/s is within what a ramp may do.
	slow := func(mono time.Duration) unit.Pascal { return unit.Pascal(1e5 + 1e4*mono.Seconds()) }
	if got := st.pass(20*time.Second, slow); got != "" {
		t.Fatalf("HOLD at %v: %s (%s)", slow(st.mono), got, st.state.Why)
	}
	if got := st.ask(MoveValve{limit.Inlet, false}); !strings.Contains(got, "valve inlet open false made true") {
		t.Fatal(got)
	}
	st.confirm()
	if st.state.hand[limit.Inlet].open || st.state.Mode != Armed {
		t.Errorf("mode %v, %+v", st.state.Mode, st.state.hand)
	}
}

// Whatever goes wrong while a valve stands open by hand ends in HOLD.
func TestOpenValveEndsInHold(t *testing.T) {
	for name, c := range map[string]struct {
		valve limit.Valve
		from  unit.Pascal
		do    func(st *story) string
		why   string
	}{
		"too fast": {limit.Inlet, 1 * unit.Bar, func(st *story) string {
			return st.pass(5*time.Second, func(d time.Duration) unit.Pascal { return unit.Pascal(1e5 + 1e5*d.Seconds()) })
		}, "rises faster than 0.2 bar/s"},
		"falling too fast": {limit.Vent, 8 * unit.Bar, func(st *story) string {
			return st.pass(5*time.Second, func(d time.Duration) unit.Pascal { return unit.Pascal(8e5 - 1e5*d.Seconds()) })
		}, "falls faster than 0.2 bar/s"},
		"above the rating": {limit.Inlet, 15.9 * unit.Bar, func(st *story) string {
			return st.pass(time.Second, at(16.1*unit.Bar))
		}, "above the rating"},
		"too much for the pump": {limit.Pump, 1.1 * unit.Bar, func(st *story) string {
			return st.pass(time.Second, at(1.3*unit.Bar))
		}, "too much for the pump"},
		"gauge lost": {limit.Inlet, 1 * unit.Bar, func(st *story) string {
			st.mono += 3 * time.Second
			return strings.Join(st.step(Tick{At: st.stamp()}), ", ")
		}, "stale"},
		"arming over": {limit.Vent, 1 * unit.Bar, func(st *story) string {
			return st.pass(121*time.Second, at(1*unit.Bar))
		}, "no longer armed"},
		"disarmed": {limit.Vent, 1 * unit.Bar, func(st *story) string {
			st.ask(Disarm{})
			return st.show(1 * unit.Bar)
		}, "no longer armed"},
		"record lost": {limit.Vent, 1 * unit.Bar, func(st *story) string {
			st.step(RecordChanged{At: st.stamp(), Health: RecordHealth{Reason: "disk full"}})
			return st.show(1 * unit.Bar)
		}, "nothing is being recorded"},
	} {
		t.Run(name, func(t *testing.T) {
			st := newPanel(t, c.from)
			st.ask(Understood{Venting})
			if got := st.ask(MoveValve{c.valve, true}); !strings.Contains(got, "made true") {
				t.Fatalf("%s (%s)", got, st.state.Notice)
			}
			st.confirm()
			got := c.do(st)
			if !strings.Contains(got, "hold ") || st.state.Mode != Held || !strings.Contains(st.state.Why, c.why) {
				t.Errorf("%s; %v because %q, want HOLD because %q", got, st.state.Mode, st.state.Why, c.why)
			}
			if st.state.hand != (State{}).hand {
				t.Errorf("%+v stands open after HOLD", st.state.hand)
			}
		})
	}
}

func TestValveThatDoesNotAnswerEndsInHold(t *testing.T) {
	st := newPanel(t, 1*unit.Bar)
	st.ask(MoveValve{limit.Inlet, true})
	if got := st.pass(4*time.Second, at(1*unit.Bar)); !strings.Contains(got, "hold") || !strings.Contains(st.state.Why, "not confirmed within 3s") {
		t.Errorf("%s (%s)", got, st.state.Why)
	}
	st = newPanel(t, 1*unit.Bar)
	st.ask(MoveValve{limit.Inlet, true})
	st.step(Answered{At: st.stamp(), Command: st.state.aside.command, Err: "it reads back 0 %"})
	if st.state.Mode != Held || !strings.Contains(st.state.Why, "did not move") {
		t.Errorf("%v (%s)", st.state.Mode, st.state.Why)
	}
}

// Taken is not there: an actuator that sticks half-way is found by what it
// reads back, and one that takes a while is waited for.
func TestActuatorIsThereWhenItReadsBackSo(t *testing.T) {
	st := newPanel(t, 1*unit.Bar)
	turn := func(share float64) {
		st.step(st.reading("attenuator", reading.Attenuator, share, reading.Good))
		st.step(Tick{At: st.stamp()})
	}
	st.ask(Attenuate{1.3 * unit.Microjoule})
	st.step(Answered{At: st.stamp(), Command: st.state.aside.command})
	for _, share := range []float64{0.2, 0.3, 0.45} {
		st.mono += 500 * time.Millisecond
		st.show(1 * unit.Bar)
		if turn(share); st.state.aside.command == 0 {
			t.Fatalf("at %v it counts as arrived", share)
		}
	}
	st.mono += 500 * time.Millisecond
	if turn(0.499); st.state.aside.command != 0 || st.state.energy != 1.3*unit.Microjoule {
		t.Errorf("there, and not taken for it: %s", st.state.Notice)
	}
	st.ask(MoveValve{limit.Inlet, true})
	st.step(Answered{At: st.stamp(), Command: st.state.aside.command})
	for range 80 {
		st.mono += 50 * time.Millisecond
		for _, role := range []reading.Role{reading.CellAPressure, reading.CellBPressure} {
			st.step(st.reading(role.String(), role, 1e5, reading.Good))
		}
		st.step(st.reading("inlet", reading.InletValve, 0.4, reading.Good))
		st.step(Tick{At: st.stamp()})
	}
	if st.state.Mode != Held || !strings.Contains(st.state.Why, "not there within 3s") {
		t.Errorf("stuck half-way: %v (%s)", st.state.Mode, st.state.Why)
	}
}

func TestOrdersWantDeliberateArming(t *testing.T) {
	st := newPanel(t, 1*unit.Bar)
	st.ask(Disarm{})
	for _, in := range []Intent{MoveValve{limit.Inlet, true}, Attenuate{1 * unit.Microjoule}, ZeroGauge{reading.CellAPressure, 1 * unit.Bar}} {
		if got := st.ask(in); got != "record intent" || !strings.Contains(st.state.Notice, "not armed") {
			t.Errorf("%T: %s (%s)", in, got, st.state.Notice)
		}
	}
	if got := st.ask(MoveValve{limit.Inlet, false}); !strings.Contains(got, "valve inlet open false made true") {
		t.Errorf("shutting wants no arming: %s (%s)", got, st.state.Notice)
	}
}

func TestVentingByHandHasItsCaution(t *testing.T) {
	st := newPanel(t, 8*unit.Bar)
	if got := st.ask(MoveValve{limit.Vent, true}); got != "record intent" || !strings.Contains(st.state.Notice, "caution at venting") {
		t.Errorf("%s (%s)", got, st.state.Notice)
	}
	st.ask(Understood{Venting})
	if got := st.ask(MoveValve{limit.Vent, true}); !strings.Contains(got, "made true") {
		t.Errorf("%s (%s)", got, st.state.Notice)
	}
}

func TestValveOfUnknownPositionCountsAsOpen(t *testing.T) {
	st := newPanel(t, 1*unit.Bar)
	st.step(st.reading("vent", reading.VentValve, 0, reading.Failure))
	if got := st.ask(MoveValve{limit.Inlet, true}); got != "record intent" || !strings.Contains(st.state.Notice, "vent is open") {
		t.Errorf("%s (%s)", got, st.state.Notice)
	}
}

func TestAttenuator(t *testing.T) {
	st := newPanel(t, 1*unit.Bar)
	if got := st.ask(Attenuate{1.3 * unit.Microjoule}); got != "record intent, record command, attenuator 0.500 for 1.3 uJ made true" {
		t.Fatal(got)
	}
	st.confirm()
	if st.state.energy != 1.3*unit.Microjoule || !strings.Contains(st.state.Notice, "done") {
		t.Errorf("%v (%s)", st.state.energy, st.state.Notice)
	}
	if got := st.ask(Attenuate{1.7 * unit.Microjoule}); got != "record intent" || !strings.Contains(st.state.Notice, "at most 1.6 uJ") {
		t.Errorf("%s (%s)", got, st.state.Notice)
	}
	// Not taken: said, and no reason to stop the gas.
	st.ask(Attenuate{1 * unit.Microjoule})
	st.step(Answered{At: st.stamp(), Command: st.state.aside.command, Err: "no answer"})
	if st.state.Mode != Armed || st.state.energy != 1.3*unit.Microjoule || !strings.Contains(st.state.Notice, "no answer") {
		t.Errorf("%v, %v (%s)", st.state.Mode, st.state.energy, st.state.Notice)
	}
}

func TestZeroOfAGauge(t *testing.T) {
	st := newPanel(t, 1.03*unit.Bar)
	if got := st.ask(ZeroGauge{reading.CellAPressure, 1 * unit.Bar}); got != "record intent, record command, zero of cell-a-pressure -30.0 mbar made true" {
		t.Fatalf("%s (%s)", got, st.state.Notice)
	}
	st.confirm()
	if got := st.state.Shift("cell-a-pressure"); got > -29.9*unit.Millibar || got < -30.1*unit.Millibar {
		t.Errorf("shift is %v", got)
	}
	// The gauge now reads 1 bar, by the instrument; another 30 mbar is 60 in all.
	st.show(1 * unit.Bar)
	if got := st.ask(ZeroGauge{reading.CellAPressure, 0.97 * unit.Bar}); got != "record intent" || !strings.Contains(st.state.Notice, "may be") {
		t.Errorf("%s (%s)", got, st.state.Notice)
	}
	if got := st.ask(ZeroGauge{reading.FibreTemperature, 1 * unit.Bar}); got != "record intent" {
		t.Errorf("a thermometer: %s", got)
	}
	if got := st.ask(ZeroGauge{reading.ManifoldPressure, 1 * unit.Bar}); got != "record intent" || !strings.Contains(st.state.Notice, "no reading yet") {
		t.Errorf("a gauge that is not there: %s (%s)", got, st.state.Notice)
	}
}

// An energy step of a program turns the attenuator by itself; where that fails,
// or it may not go so far, a person is asked as on a bench without one.
func TestEnergyStepTurnsTheAttenuator(t *testing.T) {
	st := newPanel(t, 1*unit.Bar)
	st.obey = true
	step := func(e unit.Joule) {
		p := &Program{Name: "energies", Phases: []Phase{{Label: "energy", Action: SetEnergy, Energy: e, Dwell: 2 * time.Second}}}
		if got := st.ask(Run{Program: p}); !strings.Contains(got, "record intent") || strings.Contains(st.state.Notice, "refused") {
			t.Fatalf("%s (%s)", got, st.state.Notice)
		}
	}
	begun := func() bool { return st.state.aside.command != 0 || st.state.run.asks }
	pass := func(until func() bool) {
		t.Helper()
		for n := 0; !until(); n++ {
			if n > 2000 {
				t.Fatalf("%v (%s, %s)", st.state.Mode, st.state.Why, st.state.Notice)
			}
			st.run(st.mono + 50*time.Millisecond)
		}
	}
	step(1 * unit.Microjoule)
	pass(begun)
	if _, share, ok := st.state.aside.order.(limit.EnergyOrder).Order(); !ok || share < 0.384 || share > 0.385 || st.state.run.asks {
		t.Fatalf("share %v, valid %v", share, ok)
	}
	st.confirm()
	pass(func() bool { return st.state.Mode == Steady })
	if st.state.energy != 1*unit.Microjoule {
		t.Errorf("energy %v", st.state.energy)
	}
	// It does not get there.
	step(1.2 * unit.Microjoule)
	pass(begun)
	st.step(Answered{At: st.stamp(), Command: st.state.aside.command, Err: "it sticks"})
	if !st.state.run.asks || !strings.Contains(st.state.Why, "then confirm") || !strings.Contains(st.state.Notice, "it sticks") {
		t.Errorf("stuck: %s (%s)", st.state.Why, st.state.Notice)
	}
	st.ask(Confirm{})
	pass(func() bool { return st.state.Mode == Steady })
	// More than it may.
	step(1.7 * unit.Microjoule)
	pass(begun)
	if !st.state.run.asks || st.state.aside.command != 0 {
		t.Errorf("beyond its limit: %s", st.state.Why)
	}
}
