//go:build unix

package link

import (
	"context"
	"errors"
	"io"
	"net"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/creack/pty"
	"go.uber.org/goleak"

	"barline/model/bench"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// openPTY returns the far end of a pseudo-terminal and the near end's name.
func openPTY(t testing.TB) (far *os.File, name string) {
	t.Helper()
	far, near, err := pty.Open()
	if err != nil {
		t.Skipf("no pseudo-terminals here: %v", err)
	}
	t.Cleanup(func() { far.Close(); near.Close() })
	return far, near.Name()
}

func open(t testing.TB, spec bench.Instrument) Line {
	t.Helper()
	o, err := NewOpener(spec)
	if err != nil {
		t.Fatal(err)
	}
	line, err := o.Open(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { line.Close() })
	return line
}

func readAll(t testing.TB, line Line, want string) {
	t.Helper()
	got, buf := "", make([]byte, 64)
	for len(got) < len(want) {
		n, err := line.Read(buf, 5*time.Second)
		if err != nil {
			t.Fatalf("after %q: %v", got, err)
		}
		got += string(buf[:n])
	}
	if got != want {
		t.Errorf("read %q, want %q", got, want)
	}
}

// lines opened in each of the three ways, and their far ends.
func everyKind(t *testing.T) map[string]func(t *testing.T) (Line, io.ReadWriteCloser) {
	return map[string]func(t *testing.T) (Line, io.ReadWriteCloser){
		"port": func(t *testing.T) (Line, io.ReadWriteCloser) {
			far, name := openPTY(t)
			return open(t, bench.Instrument{Name: "x", Protocol: "scpi", Port: name}), far
		},
		"address": func(t *testing.T) (Line, io.ReadWriteCloser) {
			listener, err := net.Listen("tcp", "127.0.0.1:0")
			if err != nil {
				t.Fatal(err)
			}
			defer listener.Close()
			line := open(t, bench.Instrument{Name: "x", Protocol: "scpi", Address: listener.Addr().String()})
			far, err := listener.Accept()
			if err != nil {
				t.Fatal(err)
			}
			t.Cleanup(func() { far.Close() })
			return line, far
		},
		"pump": func(t *testing.T) (Line, io.ReadWriteCloser) {
			near, far := net.Pipe()
			line := newPump("pipe", near, 300*time.Millisecond, 0)
			t.Cleanup(func() { line.Close(); far.Close() })
			return line, far
		},
	}
}

func TestEveryKindOfLine(t *testing.T) {
	for name, makeLine := range everyKind(t) {
		t.Run(name, func(t *testing.T) {
			line, far := makeLine(t)
			buf := make([]byte, 64)
			for _, wait := range []time.Duration{0, time.Millisecond, 20 * time.Millisecond} {
				begin := time.Now()
				if n, err := line.Read(buf, wait); n != 0 || !errors.Is(err, os.ErrDeadlineExceeded) {
					t.Errorf("silence of %v: %d, %v", wait, n, err)
				}
				if took := time.Since(begin); took < wait {
					t.Errorf("waited %v, asked for %v", took, wait)
				}
			}
			if n, err := line.Read(nil, time.Second); n != 0 || err == nil {
				t.Errorf("read into nothing: %d, %v", n, err)
			}
			go io.WriteString(far, "hello\n")
			readAll(t, line, "hello\n")
			sent := make(chan error, 1)
			go func() {
				_, err := line.Write([]byte("*IDN?\n"))
				sent <- err
			}()
			if _, err := io.ReadFull(far, buf[:6]); err != nil || string(buf[:6]) != "*IDN?\n" {
				t.Errorf("far end got %q, %v", buf[:6], err)
			}
			if err := <-sent; err != nil {
				t.Error(err)
			}
			far.Close()
			begin := time.Now()
			if n, err := line.Read(buf, 5*time.Second); n != 0 || err == nil || errors.Is(err, os.ErrDeadlineExceeded) {
				t.Errorf("after the far end went: %d, %v", n, err)
			}
			if took := time.Since(begin); took > time.Second {
				t.Errorf("unplug seen after %v", took)
			}
			for range 2 {
				if err := line.Close(); err != nil {
					t.Errorf("close: %v", err)
				}
			}
			if n, err := line.Write([]byte("late")); n != 0 || err == nil {
				t.Errorf("write after close: %d, %v", n, err)
			}
		})
	}
}

func TestCloseFreesAReader(t *testing.T) {
	for name, makeLine := range everyKind(t) {
		t.Run(name, func(t *testing.T) {
			line, _ := makeLine(t)
			ended := make(chan error, 1)
			go func() {
				_, err := line.Read(make([]byte, 8), time.Minute)
				ended <- err
			}()
			if err := line.Close(); err != nil {
				t.Error(err)
			}
			select {
			case err := <-ended:
				if err == nil || errors.Is(err, os.ErrDeadlineExceeded) {
					t.Errorf("read ended with %v", err)
				}
			case <-time.After(5 * time.Second):
				t.Fatal("read still waits")
			}
		})
	}
}

func TestWatchdogOfWrites(t *testing.T) {
	far, name := openPTY(t)
	_ = far // reads nothing
	setting, err := newSetting(bench.Instrument{})
	if err != nil {
		t.Fatal(err)
	}
	line, err := openSerial(name, setting, 50*time.Millisecond, 0)
	if err != nil {
		t.Fatal(err)
	}
	defer line.Close()
	for range 100 {
		if _, err = line.Write(make([]byte, 4096)); err != nil {
			break
		}
	}
	if err == nil || errors.Is(err, os.ErrDeadlineExceeded) || !strings.Contains(err.Error(), "takes no bytes") {
		t.Errorf("a stuck write ends with %v", err)
	}
}

func TestSecondProgramIsKeptOut(t *testing.T) {
	_, name := openPTY(t)
	spec := bench.Instrument{Name: "x", Protocol: "scpi", Port: name}
	open(t, spec)
	o, err := NewOpener(spec)
	if err != nil {
		t.Fatal(err)
	}
	if line, err := o.Open(context.Background()); err == nil || !strings.Contains(err.Error(), "another program") {
		t.Errorf("%v, %v", line, err)
	}
}

func TestPortsThatDoNotOpen(t *testing.T) {
	plain := filepath.Join(t.TempDir(), "file")
	if err := os.WriteFile(plain, []byte("x"), 0o600); err != nil {
		t.Fatal(err)
	}
	for port, want := range map[string]string{
		"/dev/no-such-port": "nothing is plugged in",
		plain:               "is no serial port",
		"usb:dead:beef":     "no such device is plugged in",
	} {
		o, err := NewOpener(bench.Instrument{Name: "x", Protocol: "scpi", Port: port})
		if err != nil {
			t.Fatal(err)
		}
		if _, err := o.Open(context.Background()); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v, want %q", port, err, want)
		}
	}
}

func TestChildProcess(t *testing.T) {
	line := open(t, bench.Instrument{Name: "x", Protocol: "lines", Command: []string{"/bin/sh", "-c", "echo hello; read x; echo got $x; echo 'no lamp' >&2; exit 3"}})
	readAll(t, line, "hello\n")
	if _, err := line.Write([]byte("word\n")); err != nil {
		t.Fatal(err)
	}
	readAll(t, line, "got word\n")
	if _, err := line.Read(make([]byte, 8), 5*time.Second); !errors.Is(err, io.EOF) || !strings.Contains(err.Error(), "no lamp") {
		t.Errorf("after its end: %v", err)
	}
	if _, err := openChild([]string{"/no/such/program"}, time.Second); err == nil {
		t.Error("a program that does not exist was started")
	}
}

func TestChildEndsWithItsLine(t *testing.T) {
	line := open(t, bench.Instrument{Name: "x", Protocol: "lines", Command: []string{"/bin/sh", "-c", "sleep 60 & wait"}})
	begin := time.Now()
	if err := line.Close(); err != nil {
		t.Error(err)
	}
	if took := time.Since(begin); took > 3*time.Second {
		t.Errorf("took %v", took)
	}
}

func TestLinesThatAreRefused(t *testing.T) {
	for _, c := range []struct {
		spec bench.Instrument
		want string
	}{
		{bench.Instrument{}, "got 0 of them"},
		{bench.Instrument{Port: "a", Address: "b:1"}, "got 2 of them"},
		{bench.Instrument{Port: "a", Baud: 7}, "baud is 7"},
		{bench.Instrument{Port: "a", Parity: "mark"}, `parity is "mark"`},
		{bench.Instrument{Port: "a", DataBits: 9}, "data_bits is 9"},
		{bench.Instrument{Port: "a", StopBits: 3}, "stop_bits is 3"},
		{bench.Instrument{Port: "usb:12"}, "expected \"usb:\""},
		{bench.Instrument{Address: "nowhere"}, "expected host and port"},
		{bench.Instrument{Port: "a", Turnaround: 9}, "turnaround is 9s"},
	} {
		if _, err := NewOpener(c.spec); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%+v: %v, want %q", c.spec, err, c.want)
		}
	}
}
