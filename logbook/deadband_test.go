package logbook

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
	"time"

	"barline/model/reading"
)

// TestRecordRebuildsTheChannel writes a pressure through its deadband into a
// logbook, reads the logbook, and compares what stands at each reading with
// what was read.
func TestRecordRebuildsTheChannel(t *testing.T) {
	const width, heartbeat, every = 50.0, 10 * time.Second, 100 * time.Millisecond // Pa
	random := rand.New(rand.NewPCG(3, 3))
	taken := make([]reading.Reading, 20_000)
	value := 9e5
	for i := range taken {
		switch {
		case i > 8000 && i < 9000: // a ramp of 0.05 bar/s
			value += 500
		case i%4000 == 17:
			value += 1e4 // a step
		}
		r := reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Taken: stampAt(time.Duration(i) * every),
			Value: value + 12*random.NormFloat64(), Status: reading.Good}
		if i > 12_000 && i < 12_100 {
			r.Status, r.Reason = reading.OutOfSpecification, "above its range"
		}
		if i > 15_000 && i < 15_050 {
			r.Status, r.Reason, r.Value = reading.Failure, "no answer", math.NaN()
		}
		taken[i] = r
	}

	dir := t.TempDir()
	b, err := Open(dir, Options{})
	if err != nil {
		t.Fatal(err)
	}
	band := Deadband{Width: width, Heartbeat: heartbeat}
	for _, r := range taken {
		if band.Due(r) {
			if _, err := b.Append(r.Taken, "reading", r); err != nil {
				t.Fatal(err)
			}
		}
	}
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}

	type stood struct {
		Value          *float64
		Status, Reason string
	}
	var at []time.Duration
	var said []stood
	for rec, err := range Records(dir, Filter{}) {
		var s stood
		if err == nil {
			err = rec.Decode(&s)
		}
		if err != nil {
			t.Fatal(err)
		}
		at, said = append(at, rec.Mono), append(said, s)
	}
	worst := 0.0
	for _, r := range taken {
		i, found := slices.BinarySearch(at, r.Taken.Mono)
		if !found {
			i--
		}
		s := said[i]
		if s.Status != r.Status.String() || r.Taken.Mono-at[i] >= heartbeat {
			t.Fatalf("at %v stands %+v of %v, read was %+v", r.Taken.Mono, s, at[i], r)
		}
		if r.Status != reading.Failure {
			worst = math.Max(worst, math.Abs(*s.Value-r.Value))
		}
	}
	if worst > width || worst < width/2 {
		t.Errorf("rebuilt within %v Pa, stated %v Pa", worst, width)
	}
	if len(at) > len(taken)/8 {
		t.Errorf("%d of %d readings were recorded", len(at), len(taken))
	}
	t.Logf("%d of %d readings recorded, rebuilt within %.1f Pa", len(at), len(taken), worst)
}

func TestFullRateCapture(t *testing.T) {
	r := reading.Reading{Channel: "cell A", Value: 9e5, Status: reading.Good}
	count := func(d Deadband) (n int) {
		for i := range 100 {
			r.Taken = stampAt(time.Duration(i) * 100 * time.Millisecond)
			if d.Due(r) {
				n++
			}
		}
		return n
	}
	quiet := Deadband{Width: 1, Heartbeat: time.Minute}
	if n := count(quiet); n != 1 {
		t.Errorf("%d of 100 equal readings were recorded, expected the first", n)
	}
	quiet.CaptureUntil(5 * time.Second)
	if n := count(quiet); n != 50 {
		t.Errorf("%d readings were recorded, expected 50 of the first five seconds", n)
	}
	if n := count(Deadband{}); n != 100 {
		t.Errorf("%d of 100 readings were recorded with the zero value", n)
	}
}

// TestWeekFits adds up what eight channels at 10 Hz write in a week, from an
// hour of noise and drift with the deadbands of the sample bench file.
func TestWeekFits(t *testing.T) {
	const hours, limit = 7 * 24, 200e6
	random := rand.New(rand.NewPCG(5, 5))
	var s stream
	s.begin(1<<30, end{crc: noDigits})
	for channel := range 8 {
		// Noise of a quarter of the deadband; with a third a week is 470 MB
		// plain, and a tenth of that once its segments are compressed.
		band := Deadband{Width: 200, Heartbeat: time.Minute}
		value := 9e5
		for i := range 36_000 {
			value += 0.5 * random.NormFloat64()
			r := reading.Reading{Channel: "channel " + string(rune('A'+channel)), Role: reading.CellAPressure,
				Taken: stampAt(time.Duration(i) * 100 * time.Millisecond), Value: value + 200.0/4*random.NormFloat64(), Status: reading.Good}
			if band.Due(r) {
				if _, err := s.append(r.Taken, "reading", r); err != nil {
					t.Fatal(err)
				}
			}
		}
	}
	week := float64(s.bytes) * hours
	t.Logf("%d records in an hour; a week is %.0f MB", s.records, week/1e6)
	if week > limit {
		t.Errorf("a week is %.0f MB, allowed %.0f MB", week/1e6, limit/1e6)
	}
}
