package instrument

import "sync/atomic"

// Counts is how an instrument has fared since the start.
type Counts struct {
	Asked    uint64 // questions sent
	Answered uint64 // answers taken, or lines of a stream
	Silent   uint64 // questions without an answer in time
	Refused  uint64 // answers and lines that were damaged, of another question, or an instrument's refusal
	Stray    uint64 // bytes that nobody had asked for
	Resynced uint64 // times the line had to be put back in step
}

type counters struct {
	asked, answered, silent, refused, stray, resynced atomic.Uint64
}

// Counts may be called while the instrument is in use.
func (in *Instrument) Counts() Counts {
	c := &in.counts
	return Counts{
		Asked: c.asked.Load(), Answered: c.answered.Load(), Silent: c.silent.Load(),
		Refused: c.refused.Load(), Stray: c.stray.Load(), Resynced: c.resynced.Load(),
	}
}
