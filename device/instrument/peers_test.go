//go:build linux

package instrument

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"os/exec"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/creack/pty"

	"barline/device/link"
	"barline/model/bench"
	"barline/model/reading"
	"barline/model/unit"
)

// Outside peers: Debian's python3-pymodbus (with python3-serial and
// python3-serial-asyncio) as a server and mbpoll, on libmodbus, as a client.
// A peer that is missing is skipped, unless BARLINE_PEERS is set.

func needPeer(t *testing.T, ok bool, packages string) {
	t.Helper()
	switch {
	case ok:
	case os.Getenv("BARLINE_PEERS") != "":
		t.Fatalf("missing: %s", packages)
	default:
		t.Skipf("missing: %s", packages)
	}
}

// cable joins two pseudo-terminals and returns the names of their ends.
func cable(t *testing.T) (a, b string) {
	t.Helper()
	var names [2]string
	var far, near [2]*os.File
	var both sync.WaitGroup
	for i := range far {
		f, n, err := pty.Open()
		if err != nil {
			t.Skipf("no pseudo-terminals here: %v", err)
		}
		if err := raw(n); err != nil {
			t.Fatal(err)
		}
		// The near ends stay open here, so that neither is ever hung up.
		far[i], near[i], names[i] = f, n, n.Name()
	}
	for i := range far {
		both.Add(1)
		go func() {
			defer both.Done()
			io.Copy(far[i], far[1-i])
		}()
	}
	t.Cleanup(func() {
		for i := range far {
			near[i].Close()
			far[i].Close()
		}
		both.Wait()
	})
	return names[0], names[1]
}

// raw makes a terminal pass bytes as they are until a program sets it up.
func raw(tty *os.File) error {
	cmd := exec.Command("stty", "raw", "-echo")
	cmd.Stdin = tty
	return cmd.Run()
}

func TestOurClientAgainstPymodbus(t *testing.T) {
	const python = "/usr/bin/python3"
	needPeer(t, exec.Command(python, "-c", "import pymodbus.server, serial_asyncio").Run() == nil,
		"python3-pymodbus python3-serial python3-serial-asyncio")
	ours, theirs := cable(t)
	var said bytes.Buffer
	server := exec.Command(python, "testdata/pymodbus_server.py", theirs)
	server.Stderr = &said
	if err := server.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		server.Process.Kill()
		server.Wait()
	})
	var channels []bench.Channel
	want := map[string]float64{}
	add := func(name string, unit, function, register int, format, order string, value float64) {
		channels = append(channels, bench.Channel{Name: name, Unit: unit, Function: function, Register: register, Format: format, Order: order, Factor: 1, Symbol: "V"})
		want[name] = value
	}
	for _, u := range []int{1, 2} {
		for i, order := range []string{"ABCD", "CDAB", "BADC", "DCBA"} {
			add(fmt.Sprint("holding ", u, order), u, 3, 2*i, "float32", order, float64(u)+12.375)
			add(fmt.Sprint("input ", u, order), u, 4, 2*i, "float32", order, float64(10*u)+12.375)
		}
		add(fmt.Sprint("int16 ", u), u, 3, 8, "int16", "ABCD", -1234)
		add(fmt.Sprint("int32 ", u), u, 3, 9, "int32", "ABCD", -70000)
	}
	channels = append(channels,
		bench.Channel{Name: "setpoint", Role: reading.Setpoint, Unit: 1, Function: 3, Register: 12, Format: "float32", Order: "CDAB", Write: "{value}", Factor: 1e5, Symbol: "Pa"},
		bench.Channel{Name: "inlet", Role: reading.InletValve, Unit: 2, Function: 3, Register: 12, Format: "uint16", Order: "ABCD", Write: "{value}", Factor: 1, Symbol: "1"},
		bench.Channel{Name: "missing", Unit: 2, Function: 3, Register: 5000, Format: "uint16", Order: "ABCD", Factor: 1, Symbol: "V"})
	spec := bench.Instrument{Name: "peer", Protocol: bench.ModbusRTU, Port: ours, Baud: 19200, Parity: "none", Timeout: 1, Channel: channels}
	in := build(t, spec)
	opener, err := link.NewOpener(spec)
	if err != nil {
		t.Fatal(err)
	}
	line, err := opener.Open(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	defer line.Close()

	var m map[string]reading.Reading
	for give := time.Now().Add(20 * time.Second); ; { // the server takes its time to start
		got, err := in.Poll(line, clockOf(time.Millisecond), nil)
		if err != nil {
			t.Fatalf("%v; the server said %s", err, said.String())
		}
		if m = byChannel(t, got); m["setpoint"].Status == reading.Good {
			break
		}
		if time.Now().After(give) {
			t.Fatalf("no answer: %+v; the server said %s", m["setpoint"], said.String())
		}
	}
	// One more poll: at the first some requests went to a server that was not
	// there yet.
	got, err := in.Poll(line, clockOf(time.Millisecond), nil)
	if err != nil {
		t.Fatal(err)
	}
	m = byChannel(t, got)
	for name, v := range want {
		if r := m[name]; r.Status != reading.Good || r.Value != v {
			t.Errorf("%s: %+v, want %v", name, r, v)
		}
	}
	if r := m["missing"]; r.Status != reading.Failure || !strings.Contains(r.Reason, "no such register") {
		t.Errorf("a register that does not exist: %+v", r)
	}
	if err := in.Hold(line, limits.Freeze(2.385*unit.Bar)); err != nil { // functions 16 and 06, each read back
		t.Error(err)
	}
	order := limits.Close(0)
	if err := in.Move(line, order); err != nil {
		t.Error(err)
	}
}

func TestMbpollAgainstOurServer(t *testing.T) {
	_, err := exec.LookPath("mbpoll")
	needPeer(t, err == nil, "mbpoll")
	registers := map[byte]map[uint16]uint16{7: {4: 0xFFF6}}
	put(t, registers[7], 0, 2.385)
	answer := units(t, registers)
	s := newSocket(t, func(p []byte) []byte { return answer(p) })
	s.plug()
	for _, c := range []struct {
		args string
		want string
	}{
		{"-t 4:float -B -0 -r 0", "2.385"},
		{"-t 3:float -B -0 -r 0", "2.385"},
		{"-t 4 -0 -r 4", "65526 (-10)"},
		{"-t 4 -0 -r 9", "Illegal data address"},
	} {
		args := append(strings.Fields("-m rtu -a 7 -b 19200 -P none -1 "+c.args), s.name)
		out, _ := exec.Command("mbpoll", args...).CombinedOutput() // it leaves with 1 on an exception
		if !strings.Contains(string(out), c.want) {
			t.Errorf("mbpoll %s: wanted %q in\n%s", c.args, c.want, out)
		}
	}
	for _, args := range []string{"-t 4 -0 -r 4 %s 321", "-t 4:float -B -0 -r 0 %s 12.375"} {
		all := strings.Fields("-m rtu -a 7 -b 19200 -P none -1 " + fmt.Sprintf(args, s.name))
		if out, err := exec.Command("mbpoll", all...).CombinedOutput(); err != nil || !strings.Contains(string(out), "Written") {
			t.Errorf("mbpoll %s: %v\n%s", args, err, out)
		}
	}
	s.pull()
	if registers[7][4] != 321 || registers[7][0] != 0x4146 || registers[7][1] != 0 { // 12.375 is 41460000 (IEEE 754)
		t.Errorf("after its writes the registers are %04X", registers[7])
	}
}
