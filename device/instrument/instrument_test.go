package instrument

import (
	"errors"
	"fmt"
	"math"
	"os"
	"strings"
	"testing"
	"time"

	"barline/device/lines"
	"barline/device/scpi"
	"barline/model/bench"
	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

func near(a, b, tolerance float64) bool { return math.Abs(a-b) <= tolerance }

func TestModbusPoll(t *testing.T) {
	registers := map[byte]map[uint16]uint16{1: {}, 2: {}}
	put(t, registers[1], 0, 2.385)
	put(t, registers[2], 0, 21)
	registers[1][2] = 0xFFF6 // -10
	line := &scripted{answer: units(t, registers)}
	room := bench.Channel{Name: "room", Role: reading.RoomTemperature, Unit: 1, Function: 4, Register: 2, Format: "int16", Order: "ABCD", Factor: 0.1, Zero: 273.15, Symbol: "K"}
	in := build(t, bench.Instrument{Name: "gauges", Protocol: bench.ModbusRTU, Channel: []bench.Channel{
		pressure("A", reading.CellAPressure, 1, 0), pressure("B", reading.CellBPressure, 2, 0), room}})
	got, err := in.Poll(line, clockOf(time.Millisecond), nil)
	if err != nil || len(got) != 3 {
		t.Fatalf("%v, %v", got, err)
	}
	if len(line.sent) != 2 {
		t.Errorf("%d requests for two units, want 2: neighbours are read together", len(line.sent))
	}
	m := byChannel(t, got)
	if a := m["A"]; !near(a.Value, 2.385e5, 0.1) || a.Status != reading.Good || a.Role != reading.CellAPressure {
		t.Errorf("A: %+v", a)
	}
	if b := m["B"]; b.Status != reading.OutOfSpecification || !strings.Contains(b.Reason, "21 bar is outside 0 bar to 20 bar") {
		t.Errorf("B: %+v", b)
	}
	if r := m["room"]; !near(r.Value, 272.15, 1e-9) {
		t.Errorf("room: %+v", r)
	}
	if c := in.Counts(); c.Asked != 2 || c.Answered != 2 || c.Refused != 0 {
		t.Errorf("counts %+v", c)
	}
}

func TestModbusFailuresStandOnTheReading(t *testing.T) {
	for _, c := range []struct {
		name   string
		answer func([]byte) []byte
		want   string
	}{
		{"silent", nil, "unit 1: no reply within 500ms"},
		{"exception", units(t, map[byte]map[uint16]uint16{1: {}}), "no such register"},
		{"NaN", units(t, map[byte]map[uint16]uint16{1: {0: 0x7FC0, 1: 0}}), "hold NaN"},
		{"words swapped", units(t, map[byte]map[uint16]uint16{1: {0: 0, 1: 0x4018}}), "is the order ABCD right?"},
		{"other unit", func(p []byte) []byte { return []byte{0x02, 0x04, 0x04, 0, 0, 0, 0, 0xC9, 0x48} }, "no reply within"},
		{"garbage", func(p []byte) []byte { return []byte("hello there") }, "11 bytes that are none"},
		{"endless", func(p []byte) []byte { return make([]byte, 9000) }, "talks without end"},
	} {
		in := build(t, bench.Instrument{Name: "g", Protocol: bench.ModbusRTU, Channel: []bench.Channel{pressure("A", reading.CellAPressure, 1, 0)}})
		got, err := in.Poll(&scripted{answer: c.answer}, clockOf(time.Millisecond), nil)
		if err != nil || len(got) != 1 || got[0].Status != reading.Failure || !strings.Contains(got[0].Reason, c.want) {
			t.Errorf("%s: %+v, %v; want a failure that says %q", c.name, got, err, c.want)
		}
	}
}

func TestGarbageAndEchoBeforeTheReplyArePassedOver(t *testing.T) {
	registers := map[byte]map[uint16]uint16{1: {}}
	put(t, registers[1], 0, 2.385)
	answer := units(t, registers)
	for name, before := range map[string]func(sent []byte) []byte{
		"garbage": func([]byte) []byte { return []byte{0, 0xFF, 1, 4, 4, 1} },
		"echo":    func(sent []byte) []byte { return sent },
	} {
		in := build(t, bench.Instrument{Name: "g", Protocol: bench.ModbusRTU, Channel: []bench.Channel{pressure("A", reading.CellAPressure, 1, 0)}})
		got, err := in.Poll(&scripted{answer: func(p []byte) []byte { return append(before(p), answer(p)...) }}, clockOf(time.Millisecond), nil)
		if err != nil || got[0].Status != reading.Good {
			t.Errorf("%s: %+v, %v", name, got, err)
		}
	}
}

// A converter that gives back what is sent. The reply to a single write equals
// its request, so that without its own echo known apart a write that nobody
// took would look confirmed.
func TestEcho(t *testing.T) {
	registers := map[byte]map[uint16]uint16{4: {0: 1}}
	answer := units(t, registers)
	spec := bench.Instrument{Name: "panel", Protocol: bench.ModbusRTU, Echo: true, Channel: []bench.Channel{
		{Name: "inlet", Role: reading.InletValve, Unit: 4, Function: 3, Register: 0, Format: "uint16", Order: "ABCD", Write: "{value}", Factor: 1, Symbol: "1"}}}
	line := &scripted{answer: func(p []byte) []byte { return append(append([]byte(nil), p...), answer(p)...) }}
	if err := build(t, spec).Move(line, limits.Close(limit.Inlet)); err != nil || registers[4][0] != 0 {
		t.Errorf("%v, register %d", err, registers[4][0])
	}
	line.answer = func(p []byte) []byte { return append([]byte(nil), p...) } // nobody else is there
	if err := build(t, spec).Move(line, limits.Close(limit.Inlet)); err == nil || !strings.Contains(err.Error(), "no reply") {
		t.Errorf("an echo was taken for a confirmation: %v", err)
	}

	d := &device{level: 2, measured: 2}
	echoing := controller()
	echoing.Echo = true
	line = &scripted{answer: func(p []byte) []byte { return append(append([]byte(nil), p...), d.answer(p)...) }}
	in := build(t, echoing)
	got, err := in.Poll(line, clockOf(time.Millisecond), nil)
	if err != nil || byChannel(t, got)["inside"].Status != reading.Good {
		t.Errorf("%+v, %v", got, err)
	}
	if err := in.Set(line, setpoint(t, 3*unit.Bar)); err != nil {
		t.Error(err)
	}
}

func TestLostLineIsAnError(t *testing.T) {
	pulled := errors.New("input/output error")
	for _, spec := range []bench.Instrument{
		{Name: "m", Protocol: bench.ModbusRTU, Channel: []bench.Channel{pressure("A", reading.CellAPressure, 1, 0)}},
		{Name: "t", Protocol: bench.ModbusTCP, Channel: []bench.Channel{pressure("A", reading.CellAPressure, 1, 0)}},
		controller(),
		{Name: "l", Protocol: bench.Lines, Ask: "R", Pattern: "P {p}", Channel: []bench.Channel{{Name: "p", Field: "p", Factor: 1, Symbol: "V"}}},
	} {
		in := build(t, spec)
		got, err := in.Poll(&scripted{gone: pulled}, clockOf(time.Millisecond), nil)
		if !errors.Is(err, pulled) || errors.Is(err, os.ErrDeadlineExceeded) || len(got) != 0 {
			t.Errorf("%s: %v, %v", spec.Name, got, err)
		}
	}
}

func TestSilentUnitIsAskedLessOften(t *testing.T) {
	registers := map[byte]map[uint16]uint16{1: {}}
	put(t, registers[1], 0, 2.385)
	answer := units(t, registers)
	asked := 0
	line := &scripted{answer: func(p []byte) []byte {
		if p[0] == 9 {
			asked++
			return nil
		}
		return answer(p)
	}}
	in := build(t, bench.Instrument{Name: "g", Protocol: bench.ModbusRTU, Channel: []bench.Channel{
		pressure("A", reading.CellAPressure, 1, 0), pressure("B", reading.CellBPressure, 9, 0)}})
	now := clockOf(time.Millisecond)
	for range 100 {
		got, err := in.Poll(line, now, nil)
		m := byChannel(t, got)
		if err != nil || m["A"].Status != reading.Good || m["B"].Status != reading.Failure || m["B"].Reason == "" {
			t.Fatalf("%+v, %v", got, err)
		}
	}
	if asked < 100/16 || asked > 15 {
		t.Errorf("silent unit asked %d times in 100 polls, want 6 to 15", asked)
	}
}

// controller describes a pressure controller in bar(g).
func controller() bench.Instrument {
	return bench.Instrument{Name: "controller", Protocol: bench.SCPI, Identify: "*IDN?", Errors: "SYST:ERR?",
		Hold: []string{"SOUR:PRES:MODE HOLD"}, Resume: []string{"SOUR:PRES:MODE RUN"}, Channel: []bench.Channel{
			{Name: "setpoint", Role: reading.Setpoint, Query: "SOUR:PRES:LEV?", Write: "SOUR:PRES:LEV {value}", Factor: 1e5, Gauge: true, Low: 0, High: 19e5, Symbol: "Pa"},
			{Name: "inside", Role: reading.ControllerSensor, Query: "MEAS:PRES?", Factor: 1e5, Gauge: true, Low: -1e5, High: 19e5, Symbol: "Pa"},
		}}
}

// device is a pressure controller that answers SCPI.
type device struct {
	level, measured float64
	mode            string
	errors          scpi.Queue
	deaf            bool // takes no setpoint
}

func (d *device) answer(sent []byte) []byte {
	msg, err := scpi.ParseMessage(strings.TrimSpace(string(sent)))
	if err != nil {
		d.errors.Push(scpi.CommandError)
		return nil
	}
	var out []byte
	for _, u := range msg {
		switch {
		case u.Query && u.Header == "*IDN":
			out = append(out, "Heron,PC,1,1.0\n"...)
		case u.Query && u.Matches("SYSTem:ERRor"):
			out = append(out, d.errors.Pop().Line()+"\n"...)
		case u.Query && u.Matches("SOURce:PRESsure:LEVel"):
			out = append(scpi.AppendNumber(out, d.level), '\n')
		case u.Query && u.Matches("MEASure:PRESsure"):
			out = append(scpi.AppendNumber(out, d.measured), '\n')
		case u.Matches("SOURce:PRESsure:MODE"):
			d.mode = u.Args[0]
		case u.Matches("SOURce:PRESsure:LEVel"):
			if v, err := scpi.ParseNumber(u.Args[0]); err == nil && !d.deaf {
				d.level = v
			}
		default:
			d.errors.Push(scpi.UndefinedHeader)
		}
	}
	return out
}

func TestSCPIPollIsAbsolute(t *testing.T) {
	d := &device{level: 2, measured: math.NaN()}
	in := build(t, controller())
	got, err := in.Poll(&scripted{answer: d.answer}, clockOf(time.Millisecond), nil)
	m := byChannel(t, got)
	if err != nil || !near(m["setpoint"].Value, 3.013e5, 1e-6) || m["setpoint"].Status != reading.Good {
		t.Errorf("%+v, %v", got, err)
	}
	if r := m["inside"]; r.Status != reading.Failure || !strings.Contains(r.Reason, "no value") {
		t.Errorf("9.91E37 became %+v", r)
	}
}

func TestSetpointIsSentAndReadBack(t *testing.T) {
	d := &device{}
	line := &scripted{answer: d.answer}
	in := build(t, controller())
	if err := in.Set(line, setpoint(t, 3.1*unit.Bar)); err != nil || !near(d.level, 2.087, 1e-9) {
		t.Errorf("%v bar(g), %v; want 2.087", d.level, err)
	}
	d.deaf = true
	if err := in.Set(line, setpoint(t, 4*unit.Bar)); err == nil || !strings.Contains(err.Error(), "reads back 3.1 bar") {
		t.Errorf("setpoint not taken: %v", err)
	}
}

func TestUncheckedSetpointNeverReachesTheWire(t *testing.T) {
	line := &scripted{answer: (&device{}).answer}
	in := build(t, controller())
	if err := in.Set(line, limit.Setpoint{}); !errors.Is(err, limit.ErrLimit) || len(line.sent) != 0 {
		t.Errorf("%v, sent %q", err, line.sent)
	}
	if err := in.Hold(line, limit.Setpoint{}); !errors.Is(err, limit.ErrLimit) {
		t.Errorf("hold: %v", err)
	}
	for _, p := range line.sent {
		if strings.Contains(string(p), "LEV ") {
			t.Errorf("sent %q", p)
		}
	}
	if err := in.Set(line, setpoint(t, 0)); err == nil || !strings.Contains(err.Error(), "outside the range of the instrument") {
		t.Errorf("setpoint below the range of the controller: %v", err)
	}
}

func TestHoldAndResume(t *testing.T) {
	d := &device{}
	line := &scripted{answer: d.answer}
	in := build(t, controller())
	if err := in.Hold(line, limits.Freeze(2.5*unit.Bar)); err != nil || d.mode != "HOLD" || !near(d.level, 1.487, 1e-9) {
		t.Fatalf("mode %q, level %v, %v", d.mode, d.level, err)
	}
	if got := string(line.sent[0]); got != "SOUR:PRES:MODE HOLD\n" {
		t.Errorf("first sent %q", got)
	}
	if err := in.Set(line, setpoint(t, 3*unit.Bar)); err != nil || d.mode != "RUN" {
		t.Errorf("mode %q after the next setpoint, %v", d.mode, err)
	}
}

func TestValves(t *testing.T) {
	registers := map[byte]map[uint16]uint16{4: {0: 0, 1: 1, 2: 0}}
	answer := units(t, registers)
	line := &scripted{answer: answer}
	valve := func(name string, role reading.Role, register int) bench.Channel {
		return bench.Channel{Name: name, Role: role, Unit: 4, Function: 3, Register: register, Format: "uint16", Order: "ABCD", Write: "{value}", Factor: 1, Symbol: "1"}
	}
	in := build(t, bench.Instrument{Name: "panel", Protocol: bench.ModbusRTU, Channel: []bench.Channel{
		valve("inlet", reading.InletValve, 0), valve("pump", reading.PumpValve, 1), valve("vent", reading.VentValve, 2)}})
	order, err := limits.Open(limit.Inlet, limit.Panel{}, 0)
	if err != nil {
		t.Fatal(err)
	}
	if err := in.Move(line, order); err != nil || registers[4][0] != 1 {
		t.Errorf("inlet stands at %d, %v", registers[4][0], err)
	}
	if err := in.Move(line, limit.ValveOrder{}); !errors.Is(err, limit.ErrLimit) {
		t.Errorf("an order that no limit made: %v", err)
	}
	if err := in.Move(line, limits.Close(limit.CellA)); err == nil || !strings.Contains(err.Error(), "does not take") {
		t.Errorf("a valve of another instrument: %v", err)
	}
	if err := in.Hold(line, limits.Freeze(0)); err != nil || registers[4][0] != 0 || registers[4][1] != 0 {
		t.Errorf("after HOLD valves stand at %v, %v", registers[4], err)
	}
	line.answer = func(p []byte) []byte { // the valve sticks: the unit echoes the write and keeps the old position
		registers[4][0] = 1
		reply := answer(p)
		registers[4][0] = 1
		return reply
	}
	if err := in.Hold(line, limits.Freeze(0)); err == nil || !strings.Contains(err.Error(), "got 100 %") {
		t.Errorf("a valve that sticks: %v", err)
	}
}

// A controller that has stopped answering hears all of HOLD before anything
// waits for an answer.
func TestHoldIsSentBeforeAnyAnswerIsAwaited(t *testing.T) {
	line := &scripted{}
	in := build(t, controller())
	if err := in.Hold(line, limits.Freeze(2.385*unit.Bar)); err == nil || !strings.Contains(err.Error(), "not read back") {
		t.Errorf("%v", err)
	}
	if len(line.sent) < 2 || string(line.sent[0]) != "SOUR:PRES:MODE HOLD\n" || string(line.sent[1]) != "SOUR:PRES:LEV 1.372\n" {
		t.Errorf("sent %q", line.sent)
	}
}

func TestOldErrorsAreNotThoseOfACommand(t *testing.T) {
	d := &device{}
	d.errors.Push(scpi.UndefinedHeader)
	d.errors.Push(scpi.CommandError)
	line := &scripted{answer: d.answer}
	in := build(t, controller())
	if got, err := in.Poll(line, clockOf(time.Millisecond), nil); err != nil || byChannel(t, got)["setpoint"].Status != reading.Good {
		t.Fatalf("%+v, %v", got, err)
	}
	if err := in.Set(line, setpoint(t, 3*unit.Bar)); err != nil {
		t.Error(err)
	}
}

func TestErrorQueueIsReported(t *testing.T) {
	spec := controller()
	spec.Hold = []string{"NO:SUCH"}
	err := build(t, spec).Hold(&scripted{answer: (&device{}).answer}, limits.Freeze(2*unit.Bar))
	if err == nil || !strings.Contains(err.Error(), "-113") || !strings.Contains(err.Error(), "Undefined header") {
		t.Errorf("%v", err)
	}
}

func spectrometer() bench.Instrument {
	return bench.Instrument{Name: "spectrometer", Protocol: bench.Lines, Streams: true, Pattern: "EM {emission} nm W {width} nm S {strength} %", Channel: []bench.Channel{
		{Name: "emission", Role: reading.Emission, Field: "emission", Factor: 1e-9, Low: 190e-9, High: 400e-9, Symbol: "m"},
		{Name: "strength", Role: reading.EmissionStrength, Field: "strength", Factor: 0.01, Low: 0, High: 1, Symbol: "1"},
	}}
}

func TestStreamIsReadInBlocks(t *testing.T) {
	in := build(t, spectrometer())
	line := &scripted{}
	now := clockOf(10 * time.Millisecond)
	line.say([]byte("1.2 nm S 3 %\r\nEM 265.31 nm W 4 nm S 1.7 %\r\n")) // we come in the middle of a line
	got, err := in.Drain(line, now, nil)
	if err != nil || len(got) != 2 || got[0].Status != reading.Good || !near(got[0].Value, 265.31e-9, 1e-15) || !near(got[1].Value, 0.017, 1e-12) {
		t.Fatalf("%+v, %v", got, err)
	}
	first := got[0].Taken
	for i := range 10 {
		line.say(fmt.Appendf(nil, "EM %d nm W 4 nm S 1.7 %%\n", 260+i))
	}
	line.say([]byte("EM 26"))
	got, err = in.Drain(line, now, nil)
	if err != nil || len(got) != 20 {
		t.Fatalf("%d readings, %v", len(got), err)
	}
	for i := 0; i < 20; i += 2 { // 10 ms for 10 lines
		if want := first.Mono + time.Duration(i/2+1)*time.Millisecond; got[i].Taken.Mono != want || got[i].Taken.UTC.Sub(first.UTC) != want-first.Mono {
			t.Errorf("line %d taken at %v, want %v", i/2, got[i].Taken, want)
		}
	}
	line.say([]byte("5 nm W 4 nm S 1.7 %\n"))
	if got, err = in.Drain(line, now, nil); err != nil || len(got) != 2 || !near(got[0].Value, 265e-9, 1e-15) {
		t.Errorf("a line in two pieces: %+v, %v", got, err)
	}
	line.say([]byte("garbage\n"))
	if got, err = in.Drain(line, now, nil); err != nil || len(got) != 2 || got[0].Status != reading.Failure || got[0].Reason == "" {
		t.Errorf("garbage: %+v, %v", got, err)
	}
	if got, err = in.Drain(line, now, nil); err != nil || len(got) != 0 {
		t.Errorf("silence: %+v, %v", got, err)
	}
	if c := in.Counts(); c.Answered != 12 || c.Refused != 1 {
		t.Errorf("counts %+v", c)
	}
}

func TestWavelengthsInAirBecomeVacuum(t *testing.T) {
	in := build(t, spectrometer())
	in.WavelengthsInAir()
	line := &scripted{}
	line.say([]byte("EM 253.6521 nm W 4 nm S 1.7 %\n"))
	got, err := in.Drain(line, clockOf(time.Millisecond), nil)
	// Hg I 253.6521 nm in air, 253.7283 nm in vacuum: Sansonetti, Salit and
	// Reader, Appl. Opt. 35, 74 (1996), from memory.
	if err != nil || !near(got[0].Value, 253.7283e-9, 0.5e-12) {
		t.Errorf("%v nm, %v", got[0].Value*1e9, err)
	}
}

func TestPolledLines(t *testing.T) {
	spec := bench.Instrument{Name: "gauge", Protocol: bench.Lines, Ask: "R", Terminator: "cr", Checksum: "crc16", Pattern: "P {p} bar",
		Channel: []bench.Channel{{Name: "p", Role: reading.ManifoldPressure, Field: "p", Factor: 1e5, Symbol: "Pa"}}}
	in := build(t, spec)
	sealed := lines.CRC16.Seal([]byte("P 2.385 bar"), 0)
	line := &scripted{answer: func(p []byte) []byte {
		if string(p) != "R\r" {
			t.Errorf("asked with %q", p)
		}
		return append(append([]byte("noise\r\n"), sealed...), '\r', '\n')
	}}
	got, err := in.Poll(line, clockOf(time.Millisecond), nil)
	if err != nil || len(got) != 1 || !near(got[0].Value, 2.385e5, 1e-6) {
		t.Errorf("%+v, %v", got, err)
	}
	line.answer = func([]byte) []byte { return []byte("P 2.385 bar*0000\r\n") }
	if got, err = in.Poll(line, clockOf(time.Millisecond), nil); err != nil || got[0].Status != reading.Failure || !strings.Contains(got[0].Reason, "checksum") {
		t.Errorf("wrong checksum: %+v, %v", got, err)
	}
}

// NAMUR NE 43 (2003): 3.8 to 20.5 mA are measured values, 3.6 mA or less and
// 21 mA or more are failures.
func TestCurrentLoop(t *testing.T) {
	c, err := newChannel(bench.Channel{Name: "p", Role: reading.SupplyPressure, Milliamp: 1, Factor: 1e5, Zero: -4e5, Low: 0, High: 16e5, Symbol: "Pa"}, 0)
	if err != nil {
		t.Fatal(err)
	}
	for current, want := range map[float64]reading.Status{
		0: reading.Failure, 3.6: reading.Failure, 3.7: reading.OutOfSpecification, 4: reading.Good, 12: reading.Good,
		20: reading.Good, 20.6: reading.OutOfSpecification, 21: reading.Failure,
	} {
		if r := c.read(current, reading.Stamp{}); r.Status != want || (r.Status != reading.Good) != (r.Reason != "") {
			t.Errorf("%v mA: %v (%s), want %v", current, r.Status, r.Reason, want)
		}
	}
}

func TestGasFactor(t *testing.T) {
	c, err := newChannel(bench.Channel{Name: "p", Role: reading.ManifoldPressure, GasFactor: 1.6, Factor: 100, Low: 0.1, High: 1000, Symbol: "Pa"}, 0)
	if err != nil {
		t.Fatal(err)
	}
	if r := c.read(2, reading.Stamp{}); r.Status != reading.Good || !near(r.Value, 320, 1e-9) {
		t.Errorf("%+v", r)
	}
	if r := c.read(20, reading.Stamp{}); r.Status != reading.Failure || !strings.Contains(r.Reason, "in this gas") {
		t.Errorf("above its range: %+v", r)
	}
}

func TestDescriptionsThatAreRefused(t *testing.T) {
	ok := pressure("A", reading.CellAPressure, 1, 0)
	for _, c := range []struct {
		name   string
		change func(*bench.Instrument)
		want   string
	}{
		{"no channel", func(s *bench.Instrument) { s.Channel = nil }, "has no channel"},
		{"protocol", func(s *bench.Instrument) { s.Protocol = "x" }, `protocol is "x"`},
		{"unit", func(s *bench.Instrument) { s.Channel[0].Unit = 248 }, "unit is 248"},
		{"function", func(s *bench.Instrument) { s.Channel[0].Function = 6 }, "function is 6"},
		{"format", func(s *bench.Instrument) { s.Channel[0].Format = "f" }, `format "f"`},
		{"scale", func(s *bench.Instrument) { s.Channel[0].Factor = 0 }, "no scale"},
		{"field", func(s *bench.Instrument) {
			s.Protocol, s.Pattern, s.Channel[0].Field = bench.Lines, "P {p}", "q"
		}, `field is "q"`},
		{"not read back", func(s *bench.Instrument) {
			s.Protocol, s.Channel[0] = bench.SCPI, bench.Channel{Name: "s", Role: reading.Setpoint, Write: "L {value}", Factor: 1}
		}, "must be read back"},
	} {
		spec := bench.Instrument{Name: "x", Protocol: bench.ModbusRTU, Channel: []bench.Channel{ok}}
		c.change(&spec)
		if _, err := New(spec, unit.Bar); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
	}
	if _, err := New(bench.Instrument{Name: "x", Protocol: bench.ModbusRTU, Channel: []bench.Channel{ok}}, unit.Pascal(math.NaN())); err == nil {
		t.Error("no air pressure accepted")
	}
}

// The instruments of the sample bench file are what the file says.
func TestSampleInstruments(t *testing.T) {
	b, err := bench.Parse(bench.Sample(), "sample")
	if err != nil {
		t.Fatal(err)
	}
	for _, spec := range b.Instrument {
		in, err := New(spec, b.Panel.Ambient)
		if err != nil {
			t.Error(err)
			continue
		}
		if in.Streams() != (spec.Name == "spectrometer") || in.TakesSetpoint() != (spec.Name == "controller") {
			t.Errorf("%s: streams %v, takes a setpoint %v", spec.Name, in.Streams(), in.TakesSetpoint())
		}
	}
}
