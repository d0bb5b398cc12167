package logbook

import (
	"encoding/json"
	"errors"
	"fmt"
	"iter"
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
		t := tour{disk: d, match: f.matcher(), yield: yield}
		for i, s := range c.segments {
			if i > 0 && c.segments[i-1].number == s.number {
				continue // the packed copy of a segment that is still there
			}
			if !t.segment(s) {
				return
			}
		}
	}
}

// tour goes through the segments of a logbook in order.
type tour struct {
	disk  disk
	match matcher
	yield func(Record, error) bool
	last  uint64 // seq of the last record passed, wanted or not
	begun bool
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
	if damage == nil {
		damage = t.link(s, h)
	}
	if damage != nil {
		if damage.After = t.last; !t.yield(Record{}, damage) {
			return false
		}
		if damage.Kind != Missing {
			return true
		}
	}
	t.begun = true
	return t.walk(w)
}

// walk yields what is wanted of the lines that w has still to come.
func (t *tour) walk(w *walker) bool {
	for {
		l, damage, more := w.next()
		if !more {
			return true
		}
		if damage != nil {
			if !t.yield(Record{}, damage) {
				return false
			}
			continue
		}
		if w.sealed || l.seq <= t.last {
			continue // written again after a failure
		}
		t.last = l.seq
		if !t.match.wants(&l) {
			continue
		}
		rec, err := l.record()
		if err != nil {
			damage = w.damage(Edited, "record %d: %v", l.seq, err)
			if !t.yield(Record{}, damage) {
				return false
			}
			continue
		}
		if !t.yield(rec, nil) {
			return false
		}
	}
}

// link reports where a segment does not continue what was read before.
func (t *tour) link(s segmentFile, h heading) *Damage {
	d := &Damage{Segment: s.name, After: t.last}
	switch {
	case h.Segment != s.number:
		d.Kind, d.Text = Twice, fmt.Sprintf("it says that it is segment %d: its records are left out", h.Segment)
	case h.AfterSeq > t.last:
		d.Kind, d.Text = Missing, fmt.Sprintf("records %d to %d, in front of this segment", t.last+1, h.AfterSeq)
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
