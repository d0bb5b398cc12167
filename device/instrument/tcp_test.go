package instrument

import (
	"encoding/binary"
	"strings"
	"testing"
	"time"

	"barline/device/modbus"
	"barline/model/bench"
	"barline/model/reading"
)

// tcpUnits answers like a Modbus TCP server with these registers.
func tcpUnits(t testing.TB, registers map[byte]map[uint16]uint16) func([]byte) []byte {
	return func(frame []byte) []byte {
		number, r, err := modbus.DecodeRequestTCP(frame)
		if err != nil {
			t.Errorf("% X: %v", frame, err)
			return nil
		}
		out, err := modbus.AppendReplyTCP(nil, number, serve(registers, r))
		if err != nil {
			t.Error(err)
		}
		return out
	}
}

func tcpGauge(t testing.TB) (*Instrument, func([]byte) []byte) {
	registers := map[byte]map[uint16]uint16{1: {}}
	put(t, registers[1], 0, 2.385)
	in := build(t, bench.Instrument{Name: "g", Protocol: bench.ModbusTCP, Channel: []bench.Channel{pressure("A", reading.CellAPressure, 1, 0)}})
	return in, tcpUnits(t, registers)
}

func TestModbusTCPSkipsLateReplies(t *testing.T) {
	in, answer := tcpGauge(t)
	var late []byte
	first := true
	line := &scripted{answer: func(p []byte) []byte {
		if first { // this reply comes with the next one, and twice
			first = false
			late = answer(p)
			late[len(late)-1] ^= 0xFF // it would be a wrong value
			return nil
		}
		return append(append(append([]byte(nil), late...), late...), answer(p)...)
	}}
	got, err := in.Poll(line, clockOf(time.Millisecond), nil)
	if err != nil || got[0].Status != reading.Failure || !strings.Contains(got[0].Reason, "no reply within") {
		t.Fatalf("%+v, %v", got, err)
	}
	got, err = in.Poll(line, clockOf(time.Millisecond), nil)
	if err != nil || got[0].Status != reading.Good || !near(got[0].Value, 2.385e5, 0.1) {
		t.Errorf("%+v, %v", got, err)
	}
	if c := in.Counts(); c.Stray != uint64(2*len(late)) {
		t.Errorf("counts %+v", c)
	}
}

func TestModbusTCPThatLostItsFramesIsOpenedAnew(t *testing.T) {
	in, _ := tcpGauge(t)
	got, err := in.Poll(&scripted{answer: func([]byte) []byte { return []byte("HTTP/1.1 400\r\n") }}, clockOf(time.Millisecond), nil)
	if err == nil || !strings.Contains(err.Error(), "no modbus over TCP") || len(got) != 0 {
		t.Errorf("%+v, %v", got, err)
	}
}

func TestModbusTCPOpenedAnewForgetsHalfAFrame(t *testing.T) {
	in, answer := tcpGauge(t)
	if got, err := in.Poll(&scripted{answer: func(p []byte) []byte { return answer(p)[:5] }}, clockOf(time.Millisecond), nil); err != nil || got[0].Status != reading.Failure {
		t.Fatalf("%+v, %v", got, err)
	}
	in.Opened()
	if got, err := in.Poll(&scripted{answer: answer}, clockOf(time.Millisecond), nil); err != nil || got[0].Status != reading.Good {
		t.Errorf("%+v, %v", got, err)
	}
}

// A late reply that comes in two pieces, one of them between two polls.
func TestModbusTCPKeepsItsFramesBetweenPolls(t *testing.T) {
	in, answer := tcpGauge(t)
	var late []byte
	line := &scripted{answer: func(p []byte) []byte {
		if late == nil {
			late = answer(p)
			return late[:4]
		}
		return answer(p)
	}}
	if got, err := in.Poll(line, clockOf(time.Millisecond), nil); err != nil || got[0].Status != reading.Failure {
		t.Fatalf("%+v, %v", got, err)
	}
	line.say(late[4:9])
	if err := in.protocol.idle(line); err != nil {
		t.Fatal(err)
	}
	line.say(late[9:])
	if got, err := in.Poll(line, clockOf(time.Millisecond), nil); err != nil || got[0].Status != reading.Good {
		t.Errorf("%+v, %v", got, err)
	}
}

// Whatever bytes come in place of a reply, nothing panics, and a reading is
// good only if a frame that answers the request is among them.

func FuzzRTUExchange(f *testing.F) {
	request := modbus.Request{Unit: 1, Function: modbus.ReadInput, Count: 2}
	reply, err := modbus.AppendReplyRTU(nil, modbus.Reply{Unit: 1, Function: modbus.ReadInput, Values: []uint16{0x4018, 0xA3D7}})
	if err != nil {
		f.Fatal(err)
	}
	f.Add([]byte{}, reply, []byte{})
	f.Add([]byte{1, 4, 4, 0}, reply, []byte{9})
	f.Add(reply[:5], reply[5:], reply)
	f.Fuzz(func(t *testing.T, before, middle, after []byte) {
		all := append(append(append([]byte(nil), before...), middle...), after...)
		if len(all) > mostReply {
			return
		}
		wire := &rtuWire{timeout: time.Second, counts: &counters{}}
		line := &scripted{answer: func([]byte) []byte { return all }}
		got, _, err := wire.exchange(line, clockOf(1), request)
		if err != nil {
			return
		}
		frame, err := modbus.AppendReplyRTU(nil, got)
		if err != nil || !strings.Contains(string(all), string(frame)) || got.Answers(request) != nil {
			t.Fatalf("% X gave %+v, which is not in there (%v)", all, got, err)
		}
	})
}

func FuzzTCPExchange(f *testing.F) {
	request := modbus.Request{Unit: 1, Function: modbus.ReadInput, Count: 2}
	reply, err := modbus.AppendReplyTCP(nil, 1, modbus.Reply{Unit: 1, Function: modbus.ReadInput, Values: []uint16{0x4018, 0xA3D7}})
	if err != nil {
		f.Fatal(err)
	}
	late := append([]byte(nil), reply...)
	binary.BigEndian.PutUint16(late, 0)
	f.Add(reply)
	f.Add(append(late, reply...))
	f.Fuzz(func(t *testing.T, all []byte) {
		wire := &tcpWire{timeout: time.Second, counts: &counters{}}
		got, _, err := wire.exchange(&scripted{answer: func([]byte) []byte { return all }}, clockOf(1), request)
		if err == nil && got.Answers(request) != nil {
			t.Fatalf("% X gave %+v", all, got)
		}
	})
}

func FuzzStream(f *testing.F) {
	f.Add([]byte("EM 265.31 nm W 4 nm S 1.7 %\r\nEM 26"), []byte("5 nm W 4 nm S 1.7 %\n\n\r"))
	f.Add([]byte("EM --- nm W --- nm S 0 %\n"), []byte("garbage\n"))
	f.Fuzz(func(t *testing.T, first, second []byte) {
		in := build(t, spectrometer())
		line := &scripted{inbox: append([]byte(nil), first...)}
		now := clockOf(time.Millisecond)
		var last time.Duration
		for range 4 {
			got, err := in.Drain(line, now, nil)
			if err != nil {
				t.Fatal(err)
			}
			for _, r := range got {
				if r.Taken.Mono < last || (r.Status != reading.Good) != (r.Reason != "") {
					t.Fatalf("%q then %q gave %+v after %v", first, second, r, last)
				}
				last = r.Taken.Mono
			}
			line.say(second)
			second = nil
		}
	})
}

func FuzzSCPIPoll(f *testing.F) {
	f.Add([]byte("2.385\n"), []byte("Heron,PC,1,1.0\n"))
	f.Add([]byte("9.91E37\r\n"), []byte("Heron\n"))
	f.Fuzz(func(t *testing.T, value, name []byte) {
		in := build(t, controller())
		line := &scripted{answer: func(p []byte) []byte {
			if strings.HasPrefix(string(p), "*IDN?") {
				return name
			}
			return value
		}}
		for range 2 {
			got, err := in.Poll(line, clockOf(time.Millisecond), nil)
			if err != nil || len(got) != 2 {
				t.Fatalf("%q and %q gave %+v, %v", value, name, got, err)
			}
		}
	})
}
