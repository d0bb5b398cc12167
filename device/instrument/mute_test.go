package instrument

import (
	"errors"
	"os"
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/reading"
)

// slow is a line on which bench time passes: every exchange takes a while, and
// silence takes as long as one waits for it.
type slow struct {
	scripted
	at      time.Duration
	silence time.Duration
	silent  time.Duration // spent in vain
}

func (s *slow) Read(p []byte, wait time.Duration) (int, error) {
	n, err := s.scripted.Read(p, wait)
	if errors.Is(err, os.ErrDeadlineExceeded) && wait > 0 {
		s.at += s.silence
		s.silent += s.silence
	}
	return n, err
}

func (s *slow) now() reading.Stamp {
	return reading.Stamp{UTC: time.Unix(0, 0).Add(s.at), Mono: s.at}
}

// Units that do not answer take a tenth of the line's time at most, however
// many they are, and keep their neighbours waiting for one silence at a time.
func TestNeighboursOfMuteUnitsKeepTheirRate(t *testing.T) {
	for _, mute := range []int{1, 3} {
		spec := bench.Instrument{Name: "bus", Protocol: bench.ModbusRTU}
		registers := map[byte]map[uint16]uint16{}
		for u := 1; u <= 2+mute; u++ {
			registers[byte(u)] = map[uint16]uint16{0: 1}
			spec.Channel = append(spec.Channel, bench.Channel{Name: string(rune('A' + u)), Unit: u, Function: 3, Format: "uint16", Order: "ABCD", Factor: 1})
		}
		in := build(t, spec)
		line := &slow{silence: 500 * time.Millisecond}
		answer := units(t, registers)
		back := false
		line.answer = func(p []byte) []byte {
			line.at += 5 * time.Millisecond
			if p[0] > 2 && !back {
				return nil
			}
			return answer(p)
		}
		var last, widest time.Duration
		good := 0
		poll := func(until time.Duration) (all map[string]bool) {
			for line.at < until {
				began := line.at
				got, err := in.Poll(line, line.now, nil)
				if err != nil {
					t.Fatal(err)
				}
				all = map[string]bool{}
				for _, r := range got {
					all[r.Channel] = r.Status == reading.Good
				}
				if all["B"] && line.at > 20*time.Second {
					good++
					widest = max(widest, line.at-last)
				}
				last = line.at
				line.at = max(line.at, began+100*time.Millisecond)
			}
			return all
		}
		poll(20 * time.Second)
		line.silent = 0
		poll(120 * time.Second)
		if share := line.silent.Seconds() / 100; share > 0.1 {
			t.Errorf("%d mute units take %.0f %% of the time", mute, 100*share)
		}
		if good < 850 || widest > 650*time.Millisecond {
			t.Errorf("%d mute units: neighbour read %d times in 100 s, want 850 at least; widest gap %v", mute, good, widest)
		}
		back = true
		for name, good := range poll(135 * time.Second) {
			if !good {
				t.Errorf("%s has answered again for 15 s and is not read", name)
			}
		}
	}
}
