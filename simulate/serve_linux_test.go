package simulate

import (
	"context"
	"errors"
	"math"
	"os"
	"testing"
	"time"

	"go.bug.st/serial"
	"go.uber.org/goleak"

	"barline/device/modbus"
	"barline/model/clock"
)

// The driver's side of a terminal, opened like any serial port.
func openPort(t *testing.T, path string, baud int, parity serial.Parity) serial.Port {
	t.Helper()
	p, err := serial.Open(path, &serial.Mode{BaudRate: baud, DataBits: 8, Parity: parity, StopBits: serial.OneStopBit})
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// read waits for at least least bytes.
func read(t *testing.T, p serial.Port, least int) []byte {
	t.Helper()
	if err := p.SetReadTimeout(5 * time.Millisecond); err != nil {
		t.Fatal(err)
	}
	var all []byte
	buf := make([]byte, 256)
	for end := time.Now().Add(5 * time.Second); len(all) < least; {
		n, err := p.Read(buf)
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, buf[:n]...)
		if time.Now().After(end) {
			t.Fatalf("after 5 s only %q came", all)
		}
	}
	return all
}

func TestServe(t *testing.T) {
	defer goleak.VerifyNone(t)
	b := newBench(t, Options{Seed: 3})
	ctx, cancel := context.WithCancel(t.Context())
	defer b.Wait()
	defer cancel()
	ports, err := b.Serve(ctx, clock.NewScaled(20))
	if err != nil {
		t.Fatal(err)
	}

	gauges := openPort(t, ports["gauges"], 19200, serial.EvenParity)
	request := modbus.Request{Unit: 1, Function: modbus.ReadInput, Address: 0, Count: 2}
	frame, err := modbus.AppendRequestRTU(nil, request)
	if err != nil {
		t.Fatal(err)
	}
	for range 20 {
		if _, err := gauges.Write(frame); err != nil {
			t.Fatal(err)
		}
		reply, err := modbus.DecodeReplyRTU(read(t, gauges, 9))
		if err != nil {
			t.Fatal(err)
		}
		p, err := modbus.Float32.Decode(modbus.ABCD, reply.Values)
		if err != nil || math.Abs(p-1.1) > 0.05 {
			t.Fatalf("cell A %g bar, %v", p, err)
		}
	}

	spectrometer := openPort(t, ports["spectrometer"], 115200, serial.NoParity)
	for line := range splitLines(read(t, spectrometer, 60)) {
		if string(line[:3]) != "EM " {
			t.Errorf("the spectrometer says %q", line)
		}
	}

	controller := openPort(t, ports["controller"], 38400, serial.NoParity)
	if _, err := controller.Write([]byte("*IDN?\n")); err != nil {
		t.Fatal(err)
	}
	if got := string(read(t, controller, len(identity)+1)); got != identity+"\n" {
		t.Errorf("identity %q", got)
	}

	// A pulled cable takes the port away; plugged in again it is there.
	if err := b.Inject(Fault{Kind: Unplugged, Where: "controller"}); err != nil {
		t.Fatal(err)
	}
	eventually(t, "the port is gone", func() bool {
		_, err := os.Stat(ports["controller"])
		return errors.Is(err, os.ErrNotExist)
	})
	if _, err := controller.Write([]byte("*IDN?\n")); err == nil {
		t.Error("a pulled cable takes bytes")
	}
	if err := b.Inject(Fault{Kind: Unplugged, Where: "controller", Over: true}); err != nil {
		t.Fatal(err)
	}
	eventually(t, "the port is back", func() bool {
		_, err := os.Stat(ports["controller"])
		return err == nil
	})
	again := openPort(t, ports["controller"], 38400, serial.NoParity)
	if _, err := again.Write([]byte("*IDN?\n")); err != nil {
		t.Fatal(err)
	}
	if got := string(read(t, again, len(identity)+1)); got != identity+"\n" {
		t.Errorf("identity %q", got)
	}
	for _, p := range []serial.Port{gauges, spectrometer, again} {
		if err := p.Close(); err != nil {
			t.Error(err)
		}
	}
	_ = controller.Close() // its other end went long ago
}

func eventually(t *testing.T, what string, is func() bool) {
	t.Helper()
	for end := time.Now().Add(5 * time.Second); !is(); <-time.After(2 * time.Millisecond) {
		if time.Now().After(end) {
			t.Fatalf("5 s later it does not hold that %s", what)
		}
	}
}

// Ports of a bench that was killed are cleared away by the next, those of one
// that lives are not.
func TestAbandonedPortsAreClearedAway(t *testing.T) {
	t.Setenv("TMPDIR", t.TempDir())
	live, err := newFolder()
	if err != nil {
		t.Fatal(err)
	}
	killed, err := newFolder()
	if err != nil {
		t.Fatal(err)
	}
	if err := killed.lock.Close(); err != nil { // as the system does
		t.Fatal(err)
	}
	next, err := newFolder()
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		p     folder
		stays bool
	}{{live, true}, {killed, false}, {next, true}} {
		if _, err := os.Stat(c.p.dir); (err == nil) != c.stays {
			t.Errorf("%s: %v, stays should be %v", c.p.dir, err, c.stays)
		}
	}
	for _, p := range []folder{live, next} {
		if err := p.leave(); err != nil {
			t.Error(err)
		}
		if _, err := os.Stat(p.dir); err == nil {
			t.Errorf("%s is still there", p.dir)
		}
	}
}
