package instrument

import (
	"fmt"
	"math/rand/v2"
	"os"
	"strings"
	"testing"
	"time"

	"barline/device/modbus"
	"barline/model/bench"
	"barline/model/reading"
)

// faulty is a line that keeps the order of bytes and nothing else. Its time
// moves on by one at every write and at every read that waits in vain.
type faulty struct {
	rng    *rand.Rand
	answer func(sent []byte) []byte
	frames bool // a checksum is there to find wrong bits by

	time  int
	queue []parcel
	kinds [faultKinds]int
}

type parcel struct {
	due   int
	bytes []byte
}

const (
	faultNone = iota
	faultLost
	faultLate
	faultDoubled
	faultGarbage
	faultCut
	faultBits
	faultOther
	faultEcho
	faultKinds
)

func (f *faulty) push(due int, p []byte) {
	if n := len(f.queue); n > 0 {
		due = max(due, f.queue[n-1].due)
	}
	f.queue = append(f.queue, parcel{due, p})
}

func (f *faulty) Write(p []byte) (int, error) {
	f.time++
	kind := faultNone
	if f.rng.IntN(4) == 0 {
		kind = f.rng.IntN(faultKinds)
	}
	if !f.frames && (kind == faultBits || kind == faultOther) {
		kind = faultLate
	}
	f.kinds[kind]++
	reply := f.answer(append([]byte(nil), p...))
	switch kind {
	case faultLost:
		return len(p), nil
	case faultLate:
		f.push(f.time+1+f.rng.IntN(4), reply)
		return len(p), nil
	case faultDoubled:
		f.push(f.time, reply)
		f.push(f.time+f.rng.IntN(4), reply)
		return len(p), nil
	case faultGarbage:
		noise := make([]byte, 1+f.rng.IntN(20))
		for i := range noise {
			noise[i] = byte(f.rng.Uint32())
		}
		if !f.frames {
			noise = []byte("?!\n")
		}
		f.push(f.time, noise)
	case faultCut:
		reply = reply[:f.rng.IntN(len(reply)+1)]
	case faultBits:
		reply = append([]byte(nil), reply...)
		for range 1 + f.rng.IntN(2) {
			reply[f.rng.IntN(len(reply))] ^= 1 << f.rng.IntN(8)
		}
	case faultOther:
		r, err := modbus.DecodeReplyRTU(reply)
		if err == nil {
			r.Unit += 3
			reply, _ = modbus.AppendReplyRTU(nil, r)
		}
	case faultEcho:
		f.push(f.time, append([]byte(nil), p...))
	}
	f.push(f.time, reply)
	return len(p), nil
}

func (f *faulty) Read(p []byte, wait time.Duration) (int, error) {
	if len(f.queue) == 0 || f.queue[0].due > f.time {
		if wait > 0 {
			f.time++
		}
		return 0, os.ErrDeadlineExceeded
	}
	head := &f.queue[0]
	n := copy(p, head.bytes)
	head.bytes = head.bytes[n:]
	if len(head.bytes) == 0 {
		f.queue = f.queue[1:]
	}
	if n == 0 {
		return f.Read(p, wait)
	}
	return n, nil
}

func (f *faulty) Close() error { return nil }

// A shifted answer is never attributed to the wrong question: every number
// says which register or query it is of.

func TestModbusRepliesAreNeverAttributedToAnotherQuery(t *testing.T) {
	var good, all int
	var kinds [faultKinds]int
	for seed := range uint64(100) {
		var channels []bench.Channel
		// Four reads of one unit that look alike on the wire, one of one
		// register, and two of another unit.
		for _, at := range []struct{ unit, register int }{{1, 10}, {1, 20}, {1, 30}, {1, 40}, {2, 10}, {2, 20}} {
			channels = append(channels, bench.Channel{Name: fmt.Sprint(at.unit, "/", at.register), Unit: at.unit, Function: 3,
				Register: at.register, Format: "uint32", Order: "ABCD", Factor: 1, Symbol: "V"})
		}
		channels = append(channels, bench.Channel{Name: "1/50", Unit: 1, Function: 3, Register: 50, Format: "uint16", Order: "ABCD", Factor: 1, Symbol: "V"},
			bench.Channel{Name: "1/60", Unit: 1, Function: 3, Register: 60, Format: "uint16", Order: "ABCD", Factor: 1, Symbol: "V"})
		in := build(t, bench.Instrument{Name: "m", Protocol: bench.ModbusRTU, Channel: channels})
		f := &faulty{rng: rand.New(rand.NewPCG(seed, 1)), frames: true, answer: func(frame []byte) []byte {
			r, err := modbus.DecodeRequestRTU(frame)
			if err != nil {
				t.Fatalf("seed %d: % X: %v", seed, frame, err)
			}
			reply := modbus.Reply{Unit: r.Unit, Function: r.Function}
			for i := range r.Count { // every register holds its own name
				reply.Values = append(reply.Values, uint16(r.Unit)<<8|(r.Address+uint16(i)))
			}
			if r.Count > 2 && seed%2 == 0 { // half of the units have no registers behind these
				reply.Values, reply.Exception = nil, modbus.IllegalAddress
			}
			out, err := modbus.AppendReplyRTU(nil, reply)
			if err != nil {
				t.Fatal(err)
			}
			return out
		}}
		now := clockOf(time.Millisecond)
		for range 40 {
			got, err := in.Poll(f, now, nil)
			if err != nil || len(got) != len(channels) {
				t.Fatalf("seed %d: %d readings, %v", seed, len(got), err)
			}
			for _, r := range got {
				all++
				if r.Status != reading.Good {
					continue
				}
				good++
				var u, register uint32
				fmt.Sscanf(r.Channel, "%d/%d", &u, &register)
				name := u<<8 | register
				if want := name<<16 | (name + 1); uint32(r.Value) != want && uint32(r.Value) != name {
					t.Fatalf("seed %d: channel %s was given %08X", seed, r.Channel, uint32(r.Value))
				}
			}
		}
		for i, n := range f.kinds {
			kinds[i] += n
		}
	}
	if good < all/2 {
		t.Errorf("only %d of %d readings were good: the bus does not go on", good, all)
	}
	t.Logf("%d of %d readings good, faults by kind %v", good, all, kinds)
}

func TestSCPIAnswersAreNeverAttributedToAnotherQuery(t *testing.T) {
	var good, all int
	for seed := range uint64(100) {
		var channels []bench.Channel
		for i := range 4 {
			channels = append(channels, bench.Channel{Name: fmt.Sprint(i), Query: fmt.Sprintf("MEAS:V%d?", i), Factor: 1, Symbol: "V"})
		}
		in := build(t, bench.Instrument{Name: "s", Protocol: bench.SCPI, Channel: channels})
		f := &faulty{rng: rand.New(rand.NewPCG(seed, 2)), answer: func(sent []byte) []byte {
			text := strings.TrimSpace(string(sent))
			if text == "*IDN?" {
				return []byte("Heron,PC,1,1.0\n")
			}
			var i int
			if _, err := fmt.Sscanf(text, "MEAS:V%d?", &i); err != nil {
				t.Fatalf("seed %d: sent %q", seed, text)
			}
			return fmt.Appendf(nil, "%d.5E+00\n", i)
		}}
		now := clockOf(time.Millisecond)
		for range 40 {
			got, err := in.Poll(f, now, nil)
			if err != nil || len(got) != len(channels) {
				t.Fatalf("seed %d: %d readings, %v", seed, len(got), err)
			}
			for _, r := range got {
				all++
				if r.Status != reading.Good {
					continue
				}
				good++
				if want := fmt.Sprintf("%v", r.Value-0.5); want != r.Channel {
					t.Fatalf("seed %d: channel %s was given %v; faults %v", seed, r.Channel, r.Value, f.kinds)
				}
			}
		}
	}
	if good < all/4 {
		t.Errorf("only %d of %d readings were good: the bus does not go on", good, all)
	}
	t.Logf("%d of %d readings good", good, all)
}
