//go:build unix

package main

import (
	"bytes"
	"encoding/json"
	"io"
	"strings"
	"sync"
	"testing"

	"github.com/creack/pty"

	"barline/device/modbus"
)

// serveBytes opens a pseudo-terminal, answers what is written to it and
// returns its name.
func serveBytes(t *testing.T, answer func([]byte) []byte) string {
	t.Helper()
	far, near, err := pty.Open()
	if err != nil {
		t.Skipf("no pseudo-terminals here: %v", err)
	}
	ended := make(chan struct{})
	go func() {
		defer close(ended)
		buf := make([]byte, 256)
		for {
			n, err := far.Read(buf)
			if err != nil {
				return
			}
			if _, err := far.Write(answer(buf[:n])); err != nil {
				return
			}
		}
	}()
	t.Cleanup(func() {
		far.Close()
		near.Close()
		<-ended
	})
	return near.Name()
}

func TestPortsTry(t *testing.T) {
	var mu sync.Mutex
	var asked [][]byte
	controller := serveBytes(t, func(p []byte) []byte {
		mu.Lock()
		asked = append(asked, bytes.Clone(p))
		mu.Unlock()
		if strings.HasPrefix(string(p), "*IDN?") {
			return []byte("Heron,PC,42,1.0\r\n")
		}
		return nil
	})
	gauge := serveBytes(t, func(p []byte) []byte {
		r, err := modbus.DecodeRequestRTU(p)
		if err != nil || r.Unit != 2 {
			return nil
		}
		frame, err := modbus.AppendReplyRTU(nil, modbus.Reply{Unit: 2, Function: r.Function, Exception: modbus.IllegalAddress})
		if err != nil {
			t.Error(err)
		}
		return frame
	})
	var out, errs bytes.Buffer
	if code := run(t.Context(), []string{"ports", "--try", "--json", controller, gauge, "/dev/no-such-port"}, strings.NewReader(""), &out, &errs); code != exitDone {
		t.Fatalf("exit %d: %s", code, errs.String())
	}
	var got []foundPort
	if err := json.Unmarshal(out.Bytes(), &got); err != nil || len(got) != 3 {
		t.Fatalf("%s: %v", out.String(), err)
	}
	if p := got[0]; p.Protocol != "scpi" || !strings.Contains(p.Answer, "serial number 42") {
		t.Errorf("controller: %+v", p)
	}
	if p := got[1]; p.Protocol != "modbus-rtu" || p.Answer != "unit 2" {
		t.Errorf("gauge: %+v", p)
	}
	if p := got[2]; !strings.Contains(p.Problem, "nothing is plugged in") {
		t.Errorf("missing port: %+v", p)
	}
	mu.Lock()
	defer mu.Unlock()
	for _, p := range asked {
		if r, err := modbus.DecodeRequestRTU(p); err == nil && len(r.Values) > 0 {
			t.Errorf("a value was written: %+v", r)
		} else if err != nil && string(p) != "*IDN?\n" {
			t.Errorf("sent %q", p)
		}
	}
}

func TestPortsList(t *testing.T) {
	const name = "/dev/no-such-port" // is not opened, so this is no mistake
	var out, errs bytes.Buffer
	if code := run(t.Context(), []string{"ports", name}, strings.NewReader(""), &out, &errs); code != exitDone || !strings.HasPrefix(out.String(), name) {
		t.Fatalf("exit %d: %q %q", code, out.String(), errs.String())
	}
	var got []foundPort
	out.Reset()
	if code := run(t.Context(), []string{"ports", "--json"}, strings.NewReader(""), &out, io.Discard); code != exitDone {
		t.Errorf("exit %d", code)
	}
	if err := json.Unmarshal(out.Bytes(), &got); err != nil {
		t.Errorf("%q: %v", out.String(), err)
	}
}
