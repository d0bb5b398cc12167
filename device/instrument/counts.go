package instrument

import (
	"sync"
	"sync/atomic"
	"time"

	"barline/model/reading"
)

// Counts is how an instrument has fared since the start.
type Counts struct {
	Asked    uint64 // questions sent
	Answered uint64 // answers taken, or lines of a stream
	Silent   uint64 // questions without an answer in time
	Refused  uint64 // answers and lines that were damaged, of another question, or an instrument's refusal
	Stray    uint64 // bytes that nobody had asked for
	Resynced uint64 // times the line had to be put back in step

	// From the last byte of a question to the last of its answer, wall time;
	// zero for one that talks by itself.
	RoundTrip time.Duration // mean
	Slowest   time.Duration

	// Of the readings passed on by a Runner, by what their status was.
	Readings [reading.Good + 1]uint64
	Worst    string // what was last wrong with one, and of which channel
}

type counters struct {
	asked, answered, silent, refused, stray, resynced atomic.Uint64
	trips, slowest                                    atomic.Int64 // ns: sum of those of the questions answered, longest

	mu       sync.Mutex
	readings [reading.Good + 1]uint64
	worst    string
}

// took notes how long an answer that is counted took.
func (c *counters) took(d time.Duration) {
	c.trips.Add(int64(d))
	for {
		was := c.slowest.Load()
		if int64(d) <= was || c.slowest.CompareAndSwap(was, int64(d)) {
			return
		}
	}
}

// passed counts readings that go on to the sink.
func (c *counters) passed(readings []reading.Reading) {
	c.mu.Lock()
	defer c.mu.Unlock()
	for _, r := range readings {
		if int(r.Status) < len(c.readings) {
			c.readings[r.Status]++
		}
		if r.Status != reading.Good {
			c.worst = r.Channel + ": " + r.Reason
		}
	}
}

// Counts may be called while the instrument is in use.
func (in *Instrument) Counts() Counts {
	c := &in.counts
	all := Counts{
		Asked: c.asked.Load(), Answered: c.answered.Load(), Silent: c.silent.Load(),
		Refused: c.refused.Load(), Stray: c.stray.Load(), Resynced: c.resynced.Load(),
		Slowest: time.Duration(c.slowest.Load()),
	}
	if all.Asked > 0 && all.Answered > 0 {
		all.RoundTrip = time.Duration(c.trips.Load()) / time.Duration(all.Answered)
	}
	c.mu.Lock()
	all.Readings, all.Worst = c.readings, c.worst
	c.mu.Unlock()
	return all
}
