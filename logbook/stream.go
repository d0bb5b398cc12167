package logbook

import (
	"bytes"
	"fmt"
	"sync"
	"time"

	"barline/model/reading"
)

// chunk is whole lines on their way to the disk, none of a later UTC day than
// the first.
type chunk struct {
	lines   []byte
	records int
	first   reading.Stamp
	last    reading.Stamp
	seq     uint64 // of the last record
	crc     digits // of the last record
}

const chunkBytes = 64 << 10

// stream is the part of a Book that lives in memory: records that wait for
// the disk, in order, already numbered and chained. One goroutine takes them,
// any may append.
type stream struct {
	mu      sync.Mutex
	limit   int // bytes
	seq     uint64
	crc     digits
	stamper stamper
	waiting []chunk // oldest first; the last one grows
	taken   int     // how many of waiting the writer holds: these are left alone
	bytes   int     // of waiting
	records int     // of waiting
	spare   [][]byte
	scratch []byte

	durable  uint64 // seq
	written  uint64
	lost     uint64
	unsaid   lostData // refused and not yet recorded
	closed   bool
	fault    string    // why the last commit failed
	busy     time.Time // since when the writer has been in the disk; zero where it is not
	waiters  []waiter
	lastSeen reading.Stamp // of the newest record or refusal
}

// waiter is a Sync that waits for record seq.
type waiter struct {
	seq    uint64
	answer chan error
}

// lostData is the data of a lost record.
type lostData struct {
	records, readings uint64
	from, to          reading.Stamp
	reason            string
}

func (s *stream) begin(limit int, e end) {
	s.limit, s.seq, s.crc, s.durable = limit, e.seq, e.crc, e.seq
}

// append numbers, encodes and chains a record.
func (s *stream) append(at reading.Stamp, kind string, data any) (uint64, error) {
	var (
		r       *reading.Reading
		direct  Appender
		encoded []byte
	)
	switch d := data.(type) {
	case reading.Reading:
		r = &d
	case *reading.Reading:
		if r = d; r == nil {
			return 0, fmt.Errorf("logbook: %s: no reading", kind)
		}
	case Appender:
		direct = d
	default:
		var err error
		if encoded, err = encode(data); err != nil {
			return 0, fmt.Errorf("logbook: %s: %w", kind, err)
		}
	}

	s.mu.Lock()
	defer s.mu.Unlock()
	if s.closed {
		return 0, ErrClosed
	}
	s.lastSeen = at
	if s.unsaid.records > 0 {
		s.sayLost(at, s.limit/2)
	}
	room := s.limit
	if kind == "reading" {
		room -= s.limit / 8
	}
	if s.bytes > room || s.unsaid.records > 0 && kind == "reading" {
		s.lose(at, kind)
		return 0, fmt.Errorf("%w: %d records wait, %s", ErrFull, s.records, s.reason())
	}
	if direct != nil { // into a buffer of its own, so that it cannot break a line
		s.scratch = direct.AppendJSON(s.scratch[:0])
		if encoded = s.scratch; !oneObject(encoded) {
			return 0, fmt.Errorf("logbook: %s: %T wrote %s, expected one JSON object on one line", kind, data, quote(encoded))
		}
	}
	c, start := s.open(at, kind)
	if r != nil {
		c.lines = appendReading(c.lines, r)
	} else {
		c.lines = append(c.lines, encoded...)
	}
	return s.finish(c, start, at)
}

// oneObject looks for what would break the framing; it does not parse.
func oneObject(b []byte) bool {
	return len(b) >= 2 && b[0] == '{' && b[len(b)-1] == '}' && bytes.IndexByte(b, '\n') < 0
}

// open returns the chunk that the next record goes to, with the head of its
// line written, and where in the chunk that line begins.
func (s *stream) open(at reading.Stamp, kind string) (c *chunk, start int) {
	n := len(s.waiting)
	if n == s.taken || len(s.waiting[n-1].lines) >= chunkBytes || laterDay(s.waiting[n-1].first.UTC, at.UTC) {
		var buf []byte
		if k := len(s.spare); k > 0 {
			buf, s.spare = s.spare[k-1], s.spare[:k-1]
		} else {
			buf = make([]byte, 0, chunkBytes+4<<10)
		}
		s.waiting = append(s.waiting, chunk{lines: buf, first: at})
		n++
	}
	c = &s.waiting[n-1]
	start = len(c.lines)
	c.lines = appendHead(c.lines, &s.stamper, s.seq+1, at, kind)
	return c, start
}

// finish completes the line that begins at start of c, or takes it back where
// it is too long.
func (s *stream) finish(c *chunk, start int, at reading.Stamp) (uint64, error) {
	if size := len(c.lines) + tailSize - start; size > maxLine {
		c.lines = c.lines[:start]
		if start == 0 {
			s.waiting = s.waiting[:len(s.waiting)-1]
		}
		return 0, fmt.Errorf("logbook: a record of %d bytes, at most %d are allowed", size, maxLine)
	}
	c.lines, s.crc = appendTail(c.lines, start, s.crc)
	s.seq++
	c.records++
	c.last, c.seq, c.crc = at, s.seq, s.crc
	s.bytes += len(c.lines) - start
	s.records++
	return s.seq, nil
}

// laterDay reports whether b is on a later UTC day than a. An earlier one does
// not count: stamps of several channels overlap at midnight, and clocks are
// set back.
func laterDay(a, b time.Time) bool {
	const day = 24 * 60 * 60
	return b.Unix()/day > a.Unix()/day
}

func (s *stream) lose(at reading.Stamp, kind string) {
	if s.unsaid.records == 0 {
		s.unsaid = lostData{from: at, reason: s.reason()}
	}
	s.unsaid.records++
	s.unsaid.to = at
	if kind == "reading" {
		s.unsaid.readings++
	}
	s.lost++
}

// sayLost records what was refused, where at most most bytes wait.
func (s *stream) sayLost(at reading.Stamp, most int) {
	if s.bytes > most {
		return
	}
	c, start := s.open(at, kindLost)
	b := fmt.Appendf(c.lines, `{"records":%d,"readings":%d,"from":"`, s.unsaid.records, s.unsaid.readings)
	b = s.stamper.append(b, s.unsaid.from.UTC)
	b = append(b, `","to":"`...)
	b = s.stamper.append(b, s.unsaid.to.UTC)
	b = append(b, `","reason":`...)
	b = AppendString(b, s.unsaid.reason)
	c.lines = append(b, '}')
	s.unsaid = lostData{}
	s.finish(c, start, at) // far from too long
}

func (s *stream) reason() string {
	if s.fault != "" {
		return s.fault
	}
	return "the disk is slower than the record"
}

// await returns where the answer will come once all that is appended now is on
// the disk; ok is false where it already is.
func (s *stream) await() (answer <-chan error, ok bool) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.durable >= s.seq {
		return nil, false
	}
	w := waiter{s.seq, make(chan error, 1)}
	s.waiters = append(s.waiters, w)
	return w.answer, true
}

// take gives the writer everything that waits. The chunks stay in memory
// until settle says that they are on the disk.
func (s *stream) take(now time.Time) []chunk {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.unsaid.records > 0 && s.fault == "" {
		s.sayLost(s.lastSeen, s.limit/2)
	}
	s.taken = len(s.waiting)
	if s.taken > 0 {
		s.busy = now
	}
	return s.waiting[:s.taken:s.taken]
}

// settle says that the oldest n chunks are on the disk.
func (s *stream) settle(n int) {
	s.mu.Lock()
	defer s.mu.Unlock()
	for _, c := range s.waiting[:n] {
		s.durable = c.seq
		s.written += uint64(c.records)
		s.records -= c.records
		s.bytes -= len(c.lines)
		if len(s.spare) < 16 && cap(c.lines) <= 2*chunkBytes {
			s.spare = append(s.spare, c.lines[:0])
		}
	}
	s.waiting = append([]chunk(nil), s.waiting[n:]...)
	s.taken -= n
}

// release ends a commit: what was taken and not settled waits again, and who
// waited gets an answer.
func (s *stream) release(err error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.taken, s.busy, s.fault = 0, time.Time{}, ""
	if err != nil {
		s.fault = err.Error()
	}
	still := s.waiters[:0]
	for _, w := range s.waiters {
		switch {
		case s.durable >= w.seq:
			w.answer <- nil
		case err != nil:
			w.answer <- fmt.Errorf("%w: %w", ErrNotDurable, err)
		default:
			still = append(still, w)
		}
	}
	s.waiters = still
}

func (s *stream) close() {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.closed = true
	if s.unsaid.records > 0 {
		s.sayLost(s.lastSeen, s.limit)
	}
}

// slowDisk is how long one commit may take before the disk counts as failed.
const slowDisk = 2 * time.Second

func (s *stream) health(now time.Time) Health {
	s.mu.Lock()
	defer s.mu.Unlock()
	h := Health{Writing: true, Written: s.written, Waiting: s.records, Lost: s.lost}
	switch {
	case s.closed:
		h.Writing, h.Reason = false, "the logbook is closed"
	case s.fault != "":
		h.Writing, h.Reason = false, s.fault
	case !s.busy.IsZero() && now.Sub(s.busy) > slowDisk:
		h.Writing, h.Reason = false, fmt.Sprintf("the disk has not answered for %v", now.Sub(s.busy).Round(time.Second))
	}
	if s.closed && s.fault != "" {
		h.Reason = s.fault
	}
	return h
}
