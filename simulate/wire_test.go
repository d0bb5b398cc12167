package simulate

import (
	"bytes"
	"fmt"
	"strings"
	"testing"
	"time"

	"barline/device/modbus"
)

// What units answer to requests that are not for them, frame by frame.
func TestGaugesRefuse(t *testing.T) {
	b := newBench(t, Options{Seed: 1})
	l := b.Lines()["gauges"]
	frame := func(r modbus.Request) []byte {
		f, err := modbus.AppendRequestRTU(nil, r)
		if err != nil {
			t.Fatal(err)
		}
		return f
	}
	for _, c := range []struct {
		name      string
		request   modbus.Request
		exception modbus.Exception
		silent    bool
	}{
		{"holding registers of a transducer", modbus.Request{Unit: 1, Function: modbus.ReadHolding, Count: 2}, modbus.IllegalFunction, false},
		{"a register too many", modbus.Request{Unit: 2, Function: modbus.ReadInput, Count: 3}, modbus.IllegalAddress, false},
		{"a register too low", modbus.Request{Unit: 3, Function: modbus.ReadHolding, Address: 15, Count: 2}, modbus.IllegalAddress, false},
		{"a write", modbus.Request{Unit: 1, Function: modbus.WriteSingle, Values: []uint16{1}}, modbus.IllegalFunction, false},
		{"more registers than the laser has", modbus.Request{Unit: 4, Function: modbus.ReadHolding, Count: 3}, modbus.IllegalAddress, false},
		{"the shutter is not to be set", modbus.Request{Unit: 4, Function: modbus.WriteSingle, Values: []uint16{1}}, modbus.IllegalAddress, false},
		{"more than all of the light", modbus.Request{Unit: 4, Function: modbus.WriteSingle, Address: 1, Values: []uint16{1001}}, modbus.IllegalValue, false},
		{"a unit that is not there", modbus.Request{Unit: 9, Function: modbus.ReadInput, Count: 2}, 0, true},
		{"everybody", modbus.Request{Unit: 0, Function: modbus.ReadInput, Count: 2}, 0, true},
		{"both temperatures", modbus.Request{Unit: 3, Function: modbus.ReadHolding, Address: 16, Count: 4}, 0, false},
	} {
		out := ask(t, l, frame(c.request))
		if c.silent {
			if len(out) != 0 {
				t.Errorf("%s: answered % X", c.name, out)
			}
			continue
		}
		reply, err := modbus.DecodeReplyRTU(out)
		if err != nil || reply.Exception != c.exception {
			t.Errorf("%s: answered % X (%v), want exception %d", c.name, out, err, c.exception)
		}
	}

	good := frame(modbus.Request{Unit: 1, Function: modbus.ReadInput, Count: 2})
	// A damaged frame is not answered, and the next one is.
	bad := append([]byte(nil), good...)
	bad[6] ^= 1
	if out := ask(t, l, bad); len(out) != 0 {
		t.Errorf("a damaged frame was answered with % X", out)
	}
	if out := ask(t, l, good); len(out) != 9 {
		t.Errorf("the frame behind it was answered with % X", out)
	}
	// A frame in two pieces is one; a piece that stays alone is given up.
	if out := ask(t, l, good[:3]); len(out) != 0 {
		t.Errorf("a piece was answered with % X", out)
	}
	if out := ask(t, l, good[3:]); len(out) != 9 {
		t.Errorf("two pieces were answered with % X", out)
	}
	ask(t, l, good[:3])
	to(t, b, time.Second)
	if out := ask(t, l, good); len(out) != 9 {
		t.Errorf("behind a lost piece a frame was answered with % X", out)
	}
}

func TestCommands(t *testing.T) {
	b := newBench(t, Options{Seed: 1, Scenario: "quiet"})
	l := b.Lines()["controller"]
	for _, c := range []struct{ say, want string }{
		{"*IDN?\n", identity + "\n"},
		{"source:pressure:level?\r\n", "9.00000\n"},
		{"SOUR:PRES:MODE?\n", "HOLD\n"},
		{"SOUR:PRES:LEV 21\n", ""},
		{"SYST:ERR?\n", "-222,\"Data out of range\"\n"},
		{"SOUR:PRES:LEV NAN\n", ""},
		{"SOUR:PRES:LEV 9.91E37\n", ""},
		{"SOUR:PRES:VOLT 3\n", ""},
		{"SYST:ERR?;ERR?;ERR?;ERR?\n", "-100,\"Command error\";-222,\"Data out of range\";-113,\"Undefined header\";0,\"No error\"\n"},
		{"::?\n", ""},
		{"SYST:ERR:NEXT?\n", "-100,\"Command error\"\n"},
		{"SOUR:PRES:LEV 8.5;MODE?;:OUTP:CELLA OFF;CELLB?\n", "CONT;1.000\n"},
		{"OUTP:PUMP ON\n", ""},
		{"SYST:ERR?\n", "-113,\"Undefined header\"\n"},
		{"SOUR:PRES:WATC 5;WATC?\n", "5.0\n"},
		{"SOUR:PRES:MODE MAYBE\n", ""},
		{"*CLS;SYST:ERR?\n", "0,\"No error\"\n"},
		{"*RST;SOUR:PRES:MODE?;WATC?\n", "HOLD;0.0\n"},
	} {
		if got := string(ask(t, l, []byte(c.say))); got != c.want {
			t.Errorf("%q is answered with %q, want %q", c.say, got, c.want)
		}
	}
	// A message without end is given up, not kept for ever.
	ask(t, l, bytes.Repeat([]byte("X"), 3*longest))
	if got := string(ask(t, l, []byte("\n*IDN?\n"))); got != identity+"\n" {
		t.Errorf("behind an endless message: %q", got)
	}
}

func valves(t *testing.T, l *Line) string {
	return strings.TrimSpace(string(ask(t, l, []byte("OUTP:INL?;VENT?;PUMP?\n"))))
}

const shut = "0.000;0.000;0.000"

// Hold shuts the valves and they stay shut when the setpoint is frozen; a later
// setpoint, or CONT, makes the loop go on.
func TestHold(t *testing.T) {
	for _, resume := range []string{"SOUR:PRES:LEV 8\n", "SOUR:PRES:MODE CONT\n"} {
		b := newBench(t, Options{Seed: 1, Scenario: "quiet"})
		l := b.Lines()["controller"]
		ask(t, l, []byte("SOUR:PRES:LEV 11\n"))
		to(t, b, time.Second)
		if valves(t, l) == shut {
			t.Fatal("no valve opened")
		}
		ask(t, l, []byte("SOUR:PRES:MODE HOLD\n"))
		ask(t, l, []byte("SOUR:PRES:LEV 9.4\n"))
		for at := 2 * time.Second; at < 20*time.Second; at += time.Second {
			to(t, b, at)
			if v := valves(t, l); v != shut {
				t.Fatalf("in hold, at %v, the valves stand at %s", at, v)
			}
		}
		ask(t, l, []byte(resume))
		to(t, b, 20*time.Second)
		if valves(t, l) == shut {
			t.Errorf("after %q no valve opened", resume)
		}
	}
}

// With a watchdog, silence on the line makes the controller hold.
func TestWatchdog(t *testing.T) {
	b := newBench(t, Options{Seed: 1, Scenario: "quiet"})
	l := b.Lines()["controller"]
	ask(t, l, []byte("SOUR:PRES:WATC 5;LEV 12\n"))
	to(t, b, 4*time.Second)
	if mode := string(ask(t, l, []byte("SOUR:PRES:MODE?\n"))); mode != "CONT\n" {
		t.Fatalf("mode %q", mode)
	}
	to(t, b, 10*time.Second)
	if mode := string(ask(t, l, []byte("SOUR:PRES:MODE?\n"))); mode != "HOLD\n" {
		t.Errorf("after 6 s of silence the mode is %q", mode)
	}
}

// The same seed and commands give the same bench, however it is watched.
func TestWatchingChangesNothing(t *testing.T) {
	watch := func(every time.Duration, order []string) (string, []byte) {
		b := newBench(t, Options{Seed: 42})
		l := b.Lines()
		var light []byte
		for at := time.Duration(0); at <= 12*time.Second; at += every {
			to(t, b, at)
			if at%(3*time.Second) == 0 {
				ask(t, l["controller"], []byte(fmt.Sprintf("SOUR:PRES:LEV %d\n", 2+at/(3*time.Second))))
			}
			for _, name := range order {
				switch name {
				case "gauges":
					cellA(t, l)
				case "controller":
					ask(t, l[name], []byte("MEAS:PRES?\n"))
				case "spectrometer":
					light = append(light, drain(t, l[name])...)
				}
			}
		}
		light = append(light, drain(t, l["spectrometer"])...)
		return fmt.Sprint(cellA(t, l), b.gas.cell(0), b.gas.cell(1), b.core(), b.energy), light
	}
	state, light := watch(3*time.Second, nil)
	for _, every := range []time.Duration{20 * time.Millisecond, 100 * time.Millisecond, 750 * time.Millisecond} {
		again, lightAgain := watch(every, []string{"spectrometer", "gauges", "controller", "gauges"})
		if again != state || !bytes.Equal(lightAgain, light) {
			t.Errorf("watched every %v the bench is another:\n%s\n%s", every, again, state)
		}
	}
}

func TestSeedsDiffer(t *testing.T) {
	a, b := newBench(t, Options{Seed: 1}), newBench(t, Options{Seed: 2})
	if a.Reveal() == b.Reveal() {
		t.Error("two seeds hide the same truth")
	}
	if newBench(t, Options{Seed: 1}).Reveal() != a.Reveal() {
		t.Error("one seed hides two truths")
	}
}

// An instrument whose lines nobody takes keeps the newest, and not without end.
func TestUnreadIsBounded(t *testing.T) {
	b := newBench(t, Options{Seed: 1, Scenario: "quiet"})
	to(t, b, 150*time.Second)
	if n := len(drain(t, b.Lines()["spectrometer"])); n > mostUnread {
		t.Errorf("%d bytes were kept", n)
	}
}
