package logbook

import (
	"encoding/json"
	"errors"
	"fmt"
	"iter"
	"math"
	"slices"
	"time"
)

// Record is one record as it stands in the logbook.
type Record struct {
	Seq  uint64
	UTC  time.Time     // to the microsecond
	Mono time.Duration // since the writing program began
	Kind string
	Data json.RawMessage // a JSON object, not yet parsed
}

// Decode fills v from the record's data as encoding/json does.
func (r Record) Decode(v any) error {
	if err := json.Unmarshal(r.Data, v); err != nil {
		return fmt.Errorf("record %d (%s): %w", r.Seq, r.Kind, err)
	}
	return nil
}

// Filter says which records are wanted. The zero value wants all.
type Filter struct {
	From, To time.Time // From <= t < To; zero is no bound
	After    uint64    // seq > After
	Kinds    []string  // one of these; none is any
	Channels []string  // with a member "channel" that is one of these; none is any
}

// matcher is a Filter made ready.
type matcher struct {
	Filter
	from, to string // as t is written; empty is no bound
}

func (f Filter) matcher() matcher {
	m := matcher{Filter: f}
	var s stamper
	if !f.From.IsZero() {
		m.from = string(s.append(nil, f.From))
	}
	if !f.To.IsZero() {
		m.to = string(s.append(nil, f.To))
	}
	return m
}

// wants compares t as text, which sorts as time does.
func (m *matcher) wants(l *line) bool {
	if l.seq <= m.After || m.from != "" && string(l.t) < m.from || m.to != "" && string(l.t) >= m.to {
		return false
	}
	if len(m.Kinds) > 0 && !slices.Contains(m.Kinds, string(l.kind)) {
		return false
	}
	if len(m.Channels) == 0 {
		return true
	}
	var d struct {
		Channel string `json:"channel"`
	}
	return json.Unmarshal(l.data, &d) == nil && slices.Contains(m.Channels, d.Channel)
}

// record copies l out of the walker's buffer.
func (l *line) record() (Record, error) {
	t, err := parseStamp(l.t)
	if err != nil {
		return Record{}, err
	}
	return Record{Seq: l.seq, UTC: t, Mono: time.Duration(l.mono), Kind: string(l.kind), Data: slices.Clone(l.data)}, nil
}

// Records goes over the records of the logbook in dir that f wants, in order,
// each once. Where something is damaged it yields a *Damage as the error and
// goes on behind it; any other error is the last thing it yields. It needs no
// lock, and reads a logbook that is being written up to its last whole line.
func Records(dir string, f Filter) iter.Seq2[Record, error] {
	return records(folder(dir), f)
}

func records(d disk, f Filter) iter.Seq2[Record, error] {
	return func(yield func(Record, error) bool) {
		c, err := listContents(d)
		if err != nil {
			yield(Record{}, err)
			return
		}
		t := tour{disk: d, match: f.matcher(), yield: yield, crc: noDigits}
		files := once(c.segments)
		headings := peekHeadings(d, files)
		for i, s := range files {
			t.bound = bound(headings[i+1:])
			if !t.segment(s) {
				return
			}
		}
	}
}

// once leaves out the packed copy of a segment whose plain one is still there.
func once(all []segmentFile) (files []segmentFile) {
	for i, s := range all {
		if i == 0 || all[i-1].number != s.number {
			files = append(files, s)
		}
	}
	return files
}

// peekHeadings returns the heading of each segment, nil where that is not
// sound.
func peekHeadings(d disk, files []segmentFile) []*heading {
	headings := make([]*heading, len(files))
	for i, s := range files {
		headings[i] = peekHeading(d, s)
	}
	return headings
}

// peekHeading reads the first line of a segment; nil where that is not sound.
func peekHeading(d disk, s segmentFile) *heading {
	r, err := openSegment(d, s)
	if err != nil {
		return nil
	}
	defer r.Close()
	h, damage := newWalker(r, s.name).begin()
	if damage != nil || h.Segment != s.number {
		return nil
	}
	return &h
}

// bound returns up to which record a segment counts, given the headings of
// those behind it: what the next one does not continue was never acknowledged,
// or stands there again.
func bound(later []*heading) uint64 {
	for _, h := range later {
		if h != nil {
			return h.AfterSeq
		}
	}
	return math.MaxUint64
}

// tour goes through the segments of a logbook in order.
type tour struct {
	disk  disk
	match matcher
	yield func(Record, error) bool
	last  uint64 // seq of the last record passed, wanted or not
	crc   digits // of that record
	bound uint64 // the last record that counts in this segment
}

// segment yields what is wanted of s and reports whether to go on.
func (t *tour) segment(s segmentFile) bool {
	r, err := openSegment(t.disk, s)
	if err != nil {
		return t.yield(Record{}, &Damage{Segment: s.name, After: t.last, Kind: IO, Text: err.Error()})
	}
	defer r.Close()
	w := newWalker(r, s.name)
	h, damage := w.begin()
	skip := damage != nil && damage.Kind != Heading
	if damage == nil {
		if damage = h.link(s, t.last, string(t.crc[:])); damage != nil {
			skip = damage.Kind == Twice
		}
	}
	if damage != nil {
		if damage.After = t.last; !t.yield(Record{}, damage) {
			return false
		}
	}
	if skip {
		return true
	}
	if t.match.narrow() {
		if x, ok := indexOf(t.disk, s); ok && x.All.Last <= t.bound && (!x.All.mayHold(&t.match) || x.expand()) {
			return t.blocks(s, x)
		}
	}
	return t.walk(w)
}

// narrow reports whether an index can save work.
func (m *matcher) narrow() bool {
	return m.from != "" || m.to != "" || m.After > 0 || len(m.Kinds) > 0
}

// blocks yields what is wanted of the blocks of s that may hold it.
func (t *tour) blocks(s segmentFile, x index) bool {
	var r *blockReader
	// Blocks that were not parsed hold nothing that is wanted.
	for _, b := range x.blocks {
		if !b.mayHold(&t.match) {
			continue
		}
		if r == nil {
			var err error
			if r, err = openBlocks(t.disk, s); err != nil {
				return t.yield(Record{}, &Damage{Segment: s.name, After: t.last, Kind: IO, Text: err.Error()})
			}
			defer r.Close()
		}
		src, err := r.lines(b)
		if err != nil {
			if !t.yield(Record{}, &Damage{Segment: s.name, Offset: b.At, Bytes: b.Size, After: t.last, Kind: IO, Text: err.Error()}) {
				return false
			}
			continue
		}
		w := newWalker(src, s.name)
		w.resume(b.At+b.Skip, b.After, digits([]byte(b.AfterCRC)))
		if !t.walk(w) {
			return false
		}
	}
	if x.All.Last > t.last {
		t.last, t.crc = x.All.Last, digits([]byte(x.LastCRC))
	}
	return true
}

// walk yields what is wanted of the lines that w has still to come.
func (t *tour) walk(w *walker) bool {
	for {
		l, damage, more := w.next()
		if !more {
			return true
		}
		if damage == nil && (w.sealed || l.seq <= t.last || l.seq > t.bound) {
			continue
		}
		var rec Record
		if damage == nil {
			t.last, t.crc = l.seq, l.crc
			if !t.match.wants(&l) {
				continue
			}
			var err error
			if rec, err = l.record(); err != nil {
				damage = w.damage(Edited, "record %d: %v", l.seq, err)
			}
		}
		if damage != nil {
			if !t.yield(Record{}, damage) {
				return false
			}
		} else if !t.yield(rec, nil) {
			return false
		}
	}
}

// link reports where the segment s with heading h does not continue the
// record last, whose crc is given.
func (h heading) link(s segmentFile, last uint64, crc string) *Damage {
	d := &Damage{Segment: s.name, After: min(last, h.AfterSeq)}
	switch {
	case h.Segment != s.number:
		d.Kind, d.Text = Twice, fmt.Sprintf("it says that it is segment %d: its records are left out", h.Segment)
	case h.AfterSeq > last:
		d.Kind, d.Text = Missing, fmt.Sprintf("records %d to %d, in front of this segment", last+1, h.AfterSeq)
	case h.AfterSeq < last || h.AfterCRC != crc:
		d.Kind, d.Text = Disordered, fmt.Sprintf("it continues record %d with crc %q, before it stands record %d with %q", h.AfterSeq, h.AfterCRC, last, crc)
	default:
		return nil
	}
	return d
}

// AsDamage returns the damage that err is, or nil where reading cannot go on.
func AsDamage(err error) *Damage {
	var d *Damage
	errors.As(err, &d)
	return d
}
