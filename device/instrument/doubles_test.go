package instrument

import (
	"os"
	"sync"
	"testing"
	"time"

	"barline/device/modbus"
	"barline/model/bench"
	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// scripted is a line whose other end is a function: bytes that are written go
// to answer, and what that returns can be read at once. Nothing ever waits.
type scripted struct {
	mu     sync.Mutex
	answer func(sent []byte) []byte
	inbox  []byte
	sent   [][]byte
	gone   error
	closed bool
}

func (s *scripted) Read(p []byte, _ time.Duration) (int, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.closed {
		return 0, os.ErrClosed
	}
	if len(s.inbox) == 0 {
		if s.gone != nil {
			return 0, s.gone
		}
		return 0, os.ErrDeadlineExceeded
	}
	n := copy(p, s.inbox)
	s.inbox = s.inbox[n:]
	return n, nil
}

func (s *scripted) Write(p []byte) (int, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.closed {
		return 0, os.ErrClosed
	}
	if s.gone != nil {
		return 0, s.gone
	}
	own := append([]byte(nil), p...)
	s.sent = append(s.sent, own)
	if s.answer != nil {
		s.inbox = append(s.inbox, s.answer(own)...)
	}
	return len(p), nil
}

func (s *scripted) Close() error {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.closed = true
	return nil
}

func (s *scripted) say(p []byte) {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.inbox = append(s.inbox, p...)
}

// clockOf returns a clock that moves on by step at every look.
func clockOf(step time.Duration) Now {
	at := reading.Stamp{UTC: time.Date(2026, 12, 1, 11, 0, 0, 0, time.UTC)}
	return func() reading.Stamp {
		at.UTC, at.Mono = at.UTC.Add(step), at.Mono+step
		return at
	}
}

// units answers like Modbus units with these registers, by unit and address.
func units(t testing.TB, registers map[byte]map[uint16]uint16) func([]byte) []byte {
	return func(frame []byte) []byte {
		r, err := modbus.DecodeRequestRTU(frame)
		if err != nil {
			t.Errorf("% X: %v", frame, err)
			return nil
		}
		out, err := modbus.AppendReplyRTU(nil, serve(registers, r))
		if err != nil {
			t.Error(err)
		}
		return out
	}
}

func serve(registers map[byte]map[uint16]uint16, r modbus.Request) modbus.Reply {
	reply := modbus.Reply{Unit: r.Unit, Function: r.Function}
	have := registers[r.Unit]
	for i, v := range r.Values {
		have[r.Address+uint16(i)] = v
	}
	switch r.Function {
	case modbus.WriteSingle:
		reply.Address, reply.Values = r.Address, r.Values
	case modbus.WriteMultiple:
		reply.Address, reply.Count = r.Address, len(r.Values)
	default:
		for i := range r.Count {
			v, ok := have[r.Address+uint16(i)]
			if !ok {
				return modbus.Reply{Unit: r.Unit, Function: r.Function, Exception: modbus.IllegalAddress}
			}
			reply.Values = append(reply.Values, v)
		}
	}
	return reply
}

func put(t testing.TB, into map[uint16]uint16, at uint16, v float64) {
	t.Helper()
	words, err := modbus.Float32.Encode(nil, modbus.ABCD, v)
	if err != nil {
		t.Fatal(err)
	}
	for i, w := range words {
		into[at+uint16(i)] = w
	}
}

// pressure describes a Modbus channel in bar.
func pressure(name string, role reading.Role, u, register int) bench.Channel {
	return bench.Channel{Name: name, Role: role, Unit: u, Function: 4, Register: register, Format: "float32", Order: "ABCD",
		Factor: 1e5, Low: 0, High: 20e5, Symbol: "Pa"}
}

func build(t testing.TB, spec bench.Instrument) *Instrument {
	t.Helper()
	in, err := New(spec, 1.013*unit.Bar)
	if err != nil {
		t.Fatal(err)
	}
	in.Opened()
	return in
}

var limits = limit.Limits{Ratings: []limit.Rating{{Part: "cells", Max: 16 * unit.Bar}}, RiseRate: 1e5, FallRate: 1e5, PumpBelow: unit.Bar}

func setpoint(t testing.TB, p unit.Pascal) limit.Setpoint {
	t.Helper()
	s, err := limits.Step(p, p, time.Second)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func byChannel(t testing.TB, got []reading.Reading) map[string]reading.Reading {
	t.Helper()
	m := map[string]reading.Reading{}
	for _, r := range got {
		if _, twice := m[r.Channel]; twice {
			t.Errorf("channel %q read twice in one poll", r.Channel)
		}
		m[r.Channel] = r
	}
	return m
}
