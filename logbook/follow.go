package logbook

import (
	"context"
	"errors"
	"io"
	"iter"
	"math"
	"time"
)

// followEvery is how often Follow looks for more.
const followEvery = 200 * time.Millisecond

// Follow goes over the records of the logbook in dir that f wants, as Records
// does, and then over those that are written later, until ctx ends or the
// caller does. It reads what is written, which may be a moment before it is
// surely on the disk: after a crash of the writing program a record may come
// again, or another one with its number.
func Follow(ctx context.Context, dir string, f Filter) iter.Seq2[Record, error] {
	return follow(ctx, folder(dir), f)
}

func follow(ctx context.Context, d disk, f Filter) iter.Seq2[Record, error] {
	return func(yield func(Record, error) bool) {
		t := tour{disk: d, match: f.matcher(), yield: yield, crc: noDigits, bound: math.MaxUint64}
		var at place
		defer at.leave()
		ticker := time.NewTicker(followEvery)
		defer ticker.Stop()
		for {
			c, err := listContents(d)
			if err != nil {
				yield(Record{}, err)
				return
			}
			files := once(c.segments)
			for i, s := range files {
				if s.number >= at.number && !t.goOn(&at, s, i == len(files)-1) {
					return
				}
			}
			select {
			case <-ctx.Done():
				return
			case <-ticker.C:
			}
		}
	}
}

// place is how far a logbook was followed.
type place struct {
	number int // of the segment
	src    io.ReadCloser
	w      *walker
	begun  bool // the segment line is behind us
}

func (p *place) leave() {
	if p.src != nil {
		p.src.Close()
	}
}

// goOn yields what is new in s and reports whether to go on. The last segment
// may still grow, so a line without its end is left for later.
func (t *tour) goOn(at *place, s segmentFile, last bool) bool {
	if s.number > at.number {
		src, err := openGrowing(t.disk, s)
		if err != nil {
			return t.yield(Record{}, &Damage{Segment: s.name, After: t.last, Kind: IO, Text: err.Error()})
		}
		at.leave()
		*at = place{number: s.number, src: src, w: newWalker(src, s.name)}
	}
	at.w.grows = last
	if !at.begun {
		h, damage := at.w.begin()
		if damage != nil && damage.Kind == Torn && last {
			return true
		}
		at.begun = true
		if damage == nil && h.AfterSeq < t.last { // the writing program failed: some may come again
			t.last = h.AfterSeq
			copy(t.crc[:], h.AfterCRC)
		}
		if damage == nil {
			damage = h.link(s, t.last, string(t.crc[:]))
		}
		if damage != nil && !t.yield(Record{}, damage) {
			return false
		}
	}
	return t.walk(at.w)
}

// openGrowing opens a segment such that reading at its end may find more later.
func openGrowing(d disk, s segmentFile) (io.ReadCloser, error) {
	if s.packed {
		return openSegment(d, s)
	}
	f, err := d.open(s.name)
	if err != nil {
		return nil, err
	}
	return &growing{f: f}, nil
}

type growing struct {
	f  file
	at int64
}

func (g *growing) Read(p []byte) (int, error) {
	n, err := g.f.ReadAt(p, g.at)
	g.at += int64(n)
	if n > 0 && errors.Is(err, io.EOF) {
		err = nil
	}
	return n, err
}

func (g *growing) Close() error { return g.f.Close() }
