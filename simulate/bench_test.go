package simulate

import (
	"errors"
	"math"
	"os"
	"testing"
	"time"

	"barline/device/lines"
	"barline/device/modbus"
)

func newBench(t testing.TB, o Options) *Bench {
	t.Helper()
	b, err := New(o)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func to(t testing.TB, b *Bench, at time.Duration) {
	t.Helper()
	if err := b.Advance(at); err != nil {
		t.Fatal(err)
	}
}

// ask writes a request and returns all that can be read.
func ask(t testing.TB, l *Line, request []byte) []byte {
	t.Helper()
	if _, err := l.Write(request); err != nil {
		t.Fatal(err)
	}
	return drain(t, l)
}

func drain(t testing.TB, l *Line) []byte {
	t.Helper()
	var all []byte
	buf := make([]byte, 256)
	for {
		n, err := l.Read(buf, 0)
		all = append(all, buf[:n]...)
		if errors.Is(err, os.ErrDeadlineExceeded) {
			return all
		}
		if err != nil {
			t.Fatal(err)
		}
	}
}

// register asks a unit for one float, as the bench file describes it.
func register(t testing.TB, l *Line, unit byte, f modbus.Function, at uint16, order modbus.Order) float64 {
	t.Helper()
	request := modbus.Request{Unit: unit, Function: f, Address: at, Count: 2}
	frame, err := modbus.AppendRequestRTU(nil, request)
	if err != nil {
		t.Fatal(err)
	}
	reply, err := modbus.DecodeReplyRTU(ask(t, l, frame))
	if err != nil {
		t.Fatal(err)
	}
	if err := reply.Answers(request); err != nil {
		t.Fatal(err)
	}
	v, err := modbus.Float32.Decode(order, reply.Values)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

func cellA(t testing.TB, l map[string]*Line) float64 {
	return register(t, l["gauges"], 1, modbus.ReadInput, 0, modbus.ABCD)
}

// A fill, seen over the wire: setpoints in, readings out, light at the end.
func TestFillOverTheWire(t *testing.T) {
	b := newBench(t, Options{Seed: 1})
	l := b.Lines()
	pattern, err := lines.Compile("EM {emission} nm W {width} nm S {strength} % P {counts...}")
	if err != nil {
		t.Fatal(err)
	}
	if p := cellA(t, l); math.Abs(p-1.1) > 0.03 {
		t.Fatalf("cell A starts at %g bar", p)
	}
	if id := string(ask(t, l["controller"], []byte("*IDN?\n"))); id != identity+"\n" {
		t.Fatalf("identity %q", id)
	}
	highest := 0.0
	for s := 1; s <= 70; s++ {
		sp := min(9, 1.1+0.2*float64(s))
		if out := ask(t, l["controller"], []byte("SOUR:PRES:LEV "+fixed(sp, 4)+"\r\n")); len(out) != 0 {
			t.Fatalf("a setpoint was answered with %q", out)
		}
		to(t, b, time.Duration(s)*time.Second)
		highest = max(highest, cellA(t, l))
	}
	a := cellA(t, l)
	bb := register(t, l["gauges"], 2, modbus.ReadInput, 0, modbus.ABCD)
	fibre := register(t, l["gauges"], 3, modbus.ReadHolding, 16, modbus.CDAB)
	if math.Abs(a-9) > 0.04 || math.Abs(bb-9) > 0.04 || highest > 9.06 {
		t.Errorf("after the fill cell A has %g bar, cell B %g bar, highest %g bar", a, bb, highest)
	}
	if math.Abs(fibre-22) > 1 {
		t.Errorf("fibre at %g °C", fibre)
	}
	if back := string(ask(t, l["controller"], []byte("SOUR:PRES:LEV?;MODE?;:SYST:ERR?\n"))); back != "9.00000;CONT;0,\"No error\"\n" {
		t.Errorf("read back %q", back)
	}
	var last []float64
	drain(t, l["spectrometer"])
	to(t, b, 71*time.Second)
	said := drain(t, l["spectrometer"])
	if len(said) == 0 {
		t.Fatal("the spectrometer says nothing")
	}
	for line := range splitLines(said) {
		if last, err = pattern.Parse(last[:0], line); err != nil {
			t.Fatalf("%q: %v", line, err)
		}
	}
	t.Logf("at 9 bar: %v", last)
	if !(last[0] > 230 && last[0] < 320) || !(last[1] > 5 && last[1] < 40) || !(last[2] > 1 && last[2] < 15) {
		t.Errorf("emission, width, strength: %v", last)
	}
}

// splitLines yields whole lines without their ends.
func splitLines(p []byte) func(func([]byte) bool) {
	return func(yield func([]byte) bool) {
		for {
			i := 0
			for i < len(p) && p[i] != '\n' {
				i++
			}
			if i == len(p) {
				return
			}
			line := p[:i]
			if i > 0 && p[i-1] == '\r' {
				line = p[:i-1]
			}
			if !yield(line) {
				return
			}
			p = p[i+1:]
		}
	}
}
