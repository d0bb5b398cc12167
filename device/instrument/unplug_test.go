//go:build linux

package instrument

import (
	"context"
	"fmt"
	"os"
	"path/filepath"
	"sync"
	"testing"
	"time"

	"github.com/creack/pty"

	"barline/device/link"
	"barline/device/modbus"
	"barline/model/bench"
	"barline/model/reading"
	"barline/model/unit"
)

// socket is a place where a simulated cable can be plugged in: a name that
// points to the pseudo-terminal of the moment, as the system's own links do.
type socket struct {
	t      testing.TB
	name   string
	answer func([]byte) []byte

	mu        sync.Mutex
	far, near *os.File
	end       chan struct{}
}

func newSocket(t testing.TB, answer func([]byte) []byte) *socket {
	s := &socket{t: t, name: filepath.Join(t.TempDir(), "port"), answer: answer}
	t.Cleanup(s.pull)
	return s
}

func (s *socket) plug() {
	far, near, err := pty.Open()
	if err != nil {
		s.t.Fatal(err)
	}
	if err := os.Symlink(near.Name(), s.name); err != nil {
		s.t.Fatal(err)
	}
	end := make(chan struct{})
	s.mu.Lock()
	s.far, s.near, s.end = far, near, end
	s.mu.Unlock()
	go func() {
		defer close(end)
		buf := make([]byte, 512)
		for {
			n, err := far.Read(buf)
			if err != nil {
				return
			}
			if _, err := far.Write(s.answer(buf[:n])); err != nil {
				return
			}
		}
	}()
}

func (s *socket) pull() {
	s.mu.Lock()
	far, near, end := s.far, s.near, s.end
	s.far = nil
	s.mu.Unlock()
	if far == nil {
		return
	}
	if err := os.Remove(s.name); err != nil {
		s.t.Error(err)
	}
	far.Close()
	near.Close()
	<-end
}

// unplug pulls and plugs the cable of a polled instrument, and returns the
// longest times until the loss and the return were reported.
func unplug(t testing.TB, cycles int) (seen, back time.Duration) {
	registers := map[byte]map[uint16]uint16{1: {}}
	put(t, registers[1], 0, 2.385)
	s := newSocket(t, func(p []byte) []byte {
		r, err := modbus.DecodeRequestRTU(p)
		if err != nil {
			return nil
		}
		out, _ := modbus.AppendReplyRTU(nil, serve(registers, r))
		return out
	})
	s.plug()
	spec := bench.Instrument{Name: "gauges", Protocol: bench.ModbusRTU, Port: s.name, Baud: 115200, Parity: "none", Every: 0.02, Timeout: 0.2,
		Channel: []bench.Channel{pressure("A", reading.CellAPressure, 1, 0)}}
	opener, err := link.NewOpener(spec)
	if err != nil {
		t.Fatal(err)
	}
	in, err := New(spec, unit.Bar)
	if err != nil {
		t.Fatal(err)
	}
	n := newNotes()
	start(t, in, func(ctx context.Context) (link.Line, error) { return opener.Open(ctx) }, n)
	good := func() bool {
		k := len(n.readings)
		return k > 0 && n.readings[k-1].Status == reading.Good
	}
	n.until(t, "the first reading", good)
	for i := range cycles {
		n.mu.Lock()
		n.readings, n.links, n.reasons = n.readings[:0], n.links[:0], n.reasons[:0]
		n.mu.Unlock()
		begin := time.Now()
		s.pull()
		n.until(t, fmt.Sprintf("loss %d", i), func() bool { return len(n.links) > 0 && !n.links[0] })
		seen = max(seen, time.Since(begin))
		n.mu.Lock()
		n.readings = n.readings[:0]
		n.mu.Unlock()
		begin = time.Now()
		s.plug()
		n.until(t, fmt.Sprintf("return %d", i), good)
		back = max(back, time.Since(begin))
	}
	return seen, back
}

func TestUnplug(t *testing.T) {
	seen, back := unplug(t, unplugCycles)
	t.Logf("%d cycles: loss seen within %v, readings again within %v", unplugCycles, seen, back)
	if seen > time.Second || back > time.Second {
		t.Errorf("loss seen within %v, readings again within %v; want 1 s each", seen, back)
	}
}
