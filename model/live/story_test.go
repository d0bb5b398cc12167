package live

import (
	"bufio"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/emission"
	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// A story is a text of what happens and what must follow:
//
//	# purpose
//	at 0.5s  arm              -> record intent
//	at 2.0s  run until 9.0s          ticks; gauges and controller obey if "obey on"
//	expect mode HOLD because stale
//
// Events: tick; cell A|cell B|fibre|emission QUANTITY [failure]; arm; disarm;
// hold; go to PRESSURE; steps PRESSURE... ; stay; isolate; energy ENERGY, a
// program that asks for it; confirm; meter ENERGY; caution above PRESSURE;
// understood CAUTION; acknowledge ALARM; pause; resume; skip; stop;
// link NAME up|down; record ok|lost; answer [error text]; obey on|off.

// straight is a stand-in for the model: 8 nm per bar from 200 nm.
type straight struct{}

func (straight) Predict(in emission.Input, _ *emission.Prediction) emission.Prediction {
	return emission.Prediction{
		Input: in, Valid: true, Answer: emission.Estimate,
		Emission: 200*unit.Nanometre + unit.Metre(in.Pressure.Bar()*8e-9), Sigma: 10 * unit.Nanometre,
	}
}

// testBench is the least that the core asks of a bench.
func testBench() *bench.Bench {
	return &bench.Bench{
		Fibre: bench.Fibre{Kind: "antiresonant", CoreDiameter: 34 * unit.Micrometre, Wall: 180 * unit.Nanometre, Length: 30 * unit.Centimetre},
		Gas:   bench.Gas{Species: "argon"},
		Pulse: bench.Pulse{Energy: 1.3 * unit.Microjoule},
		Limits: bench.Limits{
			FibreSeal: 16 * unit.Bar, Cells: 16 * unit.Bar, Windows: 16 * unit.Bar, Line: 20 * unit.Bar,
			RiseRate: 0.2e5, FallRate: 0.2e5, PumpBelow: 1.2 * unit.Bar,
			Stale: 2, Confirm: 3, Disagreement: 0.15 * unit.Bar, Arming: 120, Follow: 2 * unit.Bar,
		},
		Logbook: bench.Logbook{Heartbeat: 60, DeadbandWavelength: 0.05 * unit.Nanometre},
		Instrument: []bench.Instrument{{Name: "gauges"}, {Name: "controller", Channel: []bench.Channel{
			{Name: "setpoint", Role: reading.Setpoint, Write: "SET {value}"},
		}}},
	}
}

type story struct {
	t      *testing.T
	core   *Core
	state  State
	obey   bool
	wire   unit.Pascal // what the controller last heard
	heard  []unit.Pascal
	mono   time.Duration
	answer []uint64
}

func (st *story) stamp() reading.Stamp {
	return reading.Stamp{UTC: time.Date(2026, 12, 1, 11, 0, 0, 0, time.UTC).Add(st.mono), Mono: st.mono}
}

// step feeds one event and checks the laws that hold in every story.
func (st *story) step(e Event) []string {
	fx := st.core.Step(&st.state, e, nil)
	var text []string
	synced := false
	for _, f := range fx {
		switch f := f.(type) {
		case Record:
			synced = synced || f.Sync
			if d, ok := f.Data.(AlarmData); ok {
				text = append(text, "alarm "+d.Name+" "+d.State)
				continue
			}
			text = append(text, "record "+string(f.Kind))
		case SendSetpoint:
			p, ok := f.Setpoint.Pressure()
			if !ok || p < 0 || p > st.core.limits.Lowest().Max {
				st.t.Fatalf("setpoint %v reached the wire", p)
			}
			if !synced {
				st.t.Fatalf("setpoint %v reached the wire before its record", p)
			}
			st.heard = append(st.heard, p)
			st.answer = append(st.answer, f.Command)
			st.wire = p
			text = append(text, "setpoint "+p.String())
		case SendHold:
			p, _ := f.Setpoint.Pressure()
			st.wire = p
			st.answer = append(st.answer, f.Command)
			text = append(text, "hold "+p.String())
		case SendOrder:
			if !synced {
				st.t.Fatalf("an order reached the wire before its record")
			}
			switch o := f.Order.(type) {
			case limit.ValveOrder:
				v, open, ok := o.Order()
				text = append(text, fmt.Sprintf("valve %v open %v made %v", v, open, ok))
			case limit.EnergyOrder:
				e, share, ok := o.Order()
				text = append(text, fmt.Sprintf("attenuator %.3f for %.3g uJ made %v", float64(share), e.Microjoules(), ok))
			case limit.ZeroShift:
				channel, shift, ok := o.Shift()
				text = append(text, fmt.Sprintf("zero of %s %+.1f mbar made %v", channel, float64(shift)/100, ok))
			}
		case Bell:
			text = append(text, "bell")
		case Call:
			text = append(text, "call")
		}
	}
	return text
}

func (st *story) reading(channel string, role reading.Role, v float64, status reading.Status) Event {
	r := reading.Reading{Channel: channel, Role: role, Value: v, Taken: st.stamp(), Status: status}
	if status != reading.Good {
		r.Reason = "no answer"
	}
	return Read{r}
}

// tick feeds one tick, and before it what the controller reads back.
func (st *story) tick() []string {
	st.step(st.reading("setpoint", reading.Setpoint, float64(st.wire), reading.Good))
	return st.step(Tick{At: st.stamp()})
}

// run ticks every 50 ms until the given time.
func (st *story) run(until time.Duration) {
	for st.mono < until {
		st.mono += 50 * time.Millisecond
		if st.obey {
			for _, id := range st.answer {
				st.step(Answered{At: st.stamp(), Command: id})
			}
			st.answer = nil
			st.step(st.reading("cell A", reading.CellAPressure, float64(st.wire), reading.Good))
			st.step(st.reading("cell B", reading.CellBPressure, float64(st.wire), reading.Good))
		}
		st.tick()
	}
}

func (st *story) event(words string) ([]string, error) {
	fields := strings.Fields(words)
	quantityRoles := map[string]reading.Role{
		"cell A": reading.CellAPressure, "cell B": reading.CellBPressure,
		"fibre": reading.FibreTemperature, "emission": reading.Emission,
	}
	for name, role := range quantityRoles {
		rest, ok := strings.CutPrefix(words, name+" ")
		if !ok {
			continue
		}
		status := reading.Good
		if r, ok := strings.CutSuffix(rest, " failure"); ok {
			rest, status = r, reading.Failure
		}
		var v float64
		switch role {
		case reading.FibreTemperature:
			k, err := unit.ParseTemperature(rest)
			if err != nil {
				return nil, err
			}
			v = float64(k)
		case reading.Emission:
			m, err := unit.ParseLength(rest)
			if err != nil {
				return nil, err
			}
			v = float64(m)
		default:
			p, err := unit.ParsePressure(rest)
			if err != nil {
				return nil, err
			}
			v = float64(p)
			st.wire = p
		}
		return st.step(st.reading(name, role, v, status)), nil
	}
	ask := func(in Intent) []string { return st.step(Asked{At: st.stamp(), Intent: in}) }
	switch {
	case words == "tick":
		return st.tick(), nil
	case words == "arm":
		return ask(Arm{}), nil
	case words == "disarm":
		return ask(Disarm{}), nil
	case words == "hold":
		return ask(Hold{}), nil
	case fields[0] == "obey":
		st.obey = fields[1] == "on"
		return nil, nil
	case fields[0] == "record":
		ok := fields[1] == "ok"
		return st.step(RecordChanged{At: st.stamp(), Health: RecordHealth{Writing: ok, Reason: "disk full"}}), nil
	case fields[0] == "link":
		return st.step(LinkChanged{At: st.stamp(), Instrument: fields[1], Up: fields[2] == "up", Reason: "unplugged"}), nil
	case strings.HasPrefix(words, "go to "):
		p, err := unit.ParsePressure(strings.TrimPrefix(words, "go to "))
		return ask(GoTo{Target: p}), err
	case fields[0] == "steps":
		p := &Program{Name: "steps"}
		for _, w := range fields[1:] {
			target, err := unit.ParsePressure(w)
			if err != nil {
				return nil, err
			}
			p.Phases = append(p.Phases, Phase{Label: "step to " + w, Target: target, Dwell: 2 * time.Second, Row: true})
		}
		return ask(Run{Program: p}), nil
	case words == "stay":
		p := &Program{Name: "stay", Phases: []Phase{{Label: "staying", Action: Stay, Dwell: 8 * time.Second}}}
		return ask(Run{Program: p}), nil
	case fields[0] == "energy":
		e, err := unit.ParseEnergy(strings.TrimPrefix(words, "energy "))
		p := &Program{Name: "energies", Phases: []Phase{
			{Label: "energy", Action: SetEnergy, Energy: e}, {Label: "measuring", Action: Stay, Dwell: 2 * time.Second, Row: true},
		}}
		if err != nil {
			return nil, err
		}
		return ask(Run{Program: p}), nil
	case words == "confirm":
		return ask(Confirm{}), nil
	case fields[0] == "understood":
		for x := range cautionCount {
			if x.String() == fields[1] {
				return ask(Understood{Caution: x}), nil
			}
		}
	case fields[0] == "caution": // above a pressure
		p, err := unit.ParsePressure(strings.TrimPrefix(words, "caution above "))
		st.core.cautionAbove = p
		return nil, err
	case fields[0] == "meter":
		e, err := unit.ParseEnergy(fields[1] + " " + fields[2])
		return st.step(st.reading("meter", reading.PulseEnergy, float64(e), reading.Good)), err
	case words == "isolate":
		p := &Program{Name: "leak test", Phases: []Phase{{Label: "valves shut", Action: Isolate, Dwell: 10 * time.Second, Row: true, MaxRise: 10}}}
		return ask(Run{Program: p}), nil
	case fields[0] == "acknowledge":
		return ask(Acknowledge{Alarm: strings.TrimPrefix(words, "acknowledge ")}), nil
	case words == "pause":
		return ask(Pause{}), nil
	case words == "resume":
		return ask(Resume{}), nil
	case words == "skip":
		return ask(Skip{}), nil
	case words == "stop":
		return ask(Stop{}), nil
	case fields[0] == "answer":
		e := Answered{At: st.stamp(), Command: st.state.command, Err: strings.Join(fields[1:], " ")}
		return st.step(e), nil
	case strings.HasPrefix(words, "run until "):
		until, err := time.ParseDuration(fields[2])
		st.run(until)
		return nil, err
	}
	return nil, fmt.Errorf("unknown event %q", words)
}

func (st *story) expect(words string) error {
	kind, rest, _ := strings.Cut(words, " ")
	switch kind {
	case "mode":
		mode, why, _ := strings.Cut(rest, " because ")
		if got := st.state.Mode.String(); got != mode {
			return fmt.Errorf("mode is %s (%s), want %s", got, st.state.Why, mode)
		}
		if !strings.Contains(st.state.Why, why) {
			return fmt.Errorf("reason is %q, want it to say %q", st.state.Why, why)
		}
	case "notice":
		if !strings.Contains(st.state.Notice, rest) {
			return fmt.Errorf("notice is %q, want it to say %q", st.state.Notice, rest)
		}
	case "setpoint":
		want, err := unit.ParsePressure(rest)
		if err != nil {
			return err
		}
		if st.state.Setpoint.String() != want.String() {
			return fmt.Errorf("setpoint is %v, want %v", st.state.Setpoint, want)
		}
	case "residual":
		want, err := unit.ParseLength(rest)
		if err != nil {
			return err
		}
		if d := float64(st.state.Residual - want); d > 1e-12 || d < -1e-12 {
			return fmt.Errorf("residual is %v, want %v", st.state.Residual, want)
		}
	default:
		return fmt.Errorf("unknown expectation %q", words)
	}
	return nil
}

func TestStories(t *testing.T) {
	files, err := filepath.Glob("testdata/*.story")
	if err != nil || len(files) == 0 {
		t.Fatalf("no stories: %v", err)
	}
	for _, file := range files {
		t.Run(strings.TrimSuffix(filepath.Base(file), ".story"), func(t *testing.T) {
			f, err := os.Open(file)
			if err != nil {
				t.Fatal(err)
			}
			defer f.Close()
			core, state, err := New(testBench(), straight{})
			if err != nil {
				t.Fatal(err)
			}
			st := &story{t: t, core: core, state: state}
			st.step(RecordChanged{At: st.stamp(), Health: RecordHealth{Writing: true}})
			for _, in := range []string{"gauges", "controller"} {
				st.step(LinkChanged{At: st.stamp(), Instrument: in, Up: true})
			}
			lines := bufio.NewScanner(f)
			for n := 1; lines.Scan(); n++ {
				line := strings.TrimSpace(lines.Text())
				if line == "" || strings.HasPrefix(line, "#") {
					continue
				}
				fail := func(format string, args ...any) {
					t.Helper()
					t.Fatalf("%s:%d: %s: %s", file, n, line, fmt.Sprintf(format, args...))
				}
				if rest, ok := strings.CutPrefix(line, "expect "); ok {
					if err := st.expect(strings.TrimSpace(rest)); err != nil {
						fail("%v", err)
					}
					continue
				}
				rest, ok := strings.CutPrefix(line, "at ")
				if !ok {
					fail("a line starts with at, expect or #")
				}
				when, rest, _ := strings.Cut(rest, " ")
				words, want, checked := strings.Cut(rest, "->")
				d, err := time.ParseDuration(when)
				if err != nil {
					fail("%v", err)
				}
				st.mono = d
				got, err := st.event(strings.TrimSpace(words))
				if err != nil {
					fail("%v", err)
				}
				if checked && strings.Join(got, ", ") != strings.TrimSpace(want) {
					fail("got %q", strings.Join(got, ", "))
				}
			}
		})
	}
}

// A ramp obeys the allowed rate whatever the ticks do.
func TestRampNeverFasterThanTheRate(t *testing.T) {
	core, state, err := New(testBench(), straight{})
	if err != nil {
		t.Fatal(err)
	}
	st := &story{t: t, core: core, state: state, obey: true}
	st.step(RecordChanged{At: st.stamp(), Health: RecordHealth{Writing: true}})
	st.wire = 1 * unit.Bar
	st.run(time.Second)
	st.step(Asked{At: st.stamp(), Intent: Arm{}})
	st.step(Asked{At: st.stamp(), Intent: GoTo{Target: 9.3 * unit.Bar}})
	st.run(80 * time.Second)
	last := 1 * unit.Bar
	for i, p := range st.heard {
		if step := float64(p - last); step > 0.2e5+1e-6 || step < 0 {
			t.Fatalf("setpoint %d rose by %v Pa in a second, allowed 20000 Pa", i, step)
		}
		last = p
	}
	if last != 9.3*unit.Bar || len(st.heard) < 41 {
		t.Fatalf("ramp ended at %v after %d setpoints, want 9.3 bar after at least 41", last, len(st.heard))
	}
}

func TestZeroSetpointIsNotValid(t *testing.T) {
	var sp limit.Setpoint
	if _, ok := sp.Pressure(); ok {
		t.Fatal("a setpoint that no limit check made says that it is valid")
	}
}
