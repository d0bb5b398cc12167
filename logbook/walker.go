package logbook

import (
	"bytes"
	"errors"
	"fmt"
	"hash"
	"io"

	"barline/model/reading"
)

// walker goes over the lines of one segment behind its segment line, and
// checks each against the one before. A damaged line costs itself; the lines
// behind it are checked against what it says its crc is.
type walker struct {
	src  io.Reader
	name string
	sum  hash.Hash // of everything before the seal; nil where not wanted

	buf      []byte
	from, to int  // unread bytes of buf
	looked   int  // of these, known to hold no LF
	hashed   int  // beginning of what is not yet in sum
	full     bool // the last read filled buf
	grows    bool // the end of src may only be the end for now
	eof      bool
	err      error // from src, other than io.EOF

	offset  int64  // of buf[from] in the segment
	at      int64  // offset of the line that next returned
	size    int64  // its length, LF included
	seq     uint64 // of the last good record
	skipped uint64 // damaged lines since
	prev    digits // crc that the next line chains from
	known   bool   // prev is known
	sealed  bool
	head    reading.Stamp // of the segment line
}

// A walker's buffer begins small, because many only look at the first line,
// and doubles up to walkMost while reads fill it.
const (
	walkLeast = 8 << 10
	walkMost  = 256 << 10
)

func newWalker(src io.Reader, name string) *walker {
	return &walker{src: src, name: name, buf: make([]byte, walkLeast)}
}

// begin reads the segment line and starts the chain from it.
func (w *walker) begin() (heading, *Damage) {
	b, whole, long := w.readLine()
	if !whole || long {
		if w.err != nil {
			return heading{}, w.damage(IO, "%v", w.err)
		}
		if len(b) == 0 {
			return heading{}, w.damage(Torn, "the file is empty")
		}
		return heading{}, w.damage(Torn, "%d bytes are no whole line: %s", len(b), quote(b))
	}
	l, h, err := parseHeading(b[:len(b)-1])
	if err != nil {
		return h, w.damage(Heading, "%v", err)
	}
	if h.Format != formatVersion {
		return h, w.damage(Newer, "format %d, this program reads format %d", h.Format, formatVersion)
	}
	w.seq, w.known = h.AfterSeq, len(h.AfterCRC) == len(w.prev)
	copy(w.prev[:], h.AfterCRC)
	w.head = l.stamp()
	return h, nil
}

// resume starts the chain in the middle of a segment, at offset.
func (w *walker) resume(offset int64, after uint64, crc digits) {
	w.offset, w.seq, w.prev, w.known = offset, after, crc, true
}

func (w *walker) damage(kind Kind, format string, args ...any) *Damage {
	return &Damage{Segment: w.name, Offset: w.at, Bytes: w.size, After: w.seq, Kind: kind, Text: fmt.Sprintf(format, args...)}
}

// next returns the next good line, a record or the seal, or damage in place
// of one. At the end, more is false. The line is valid until the next call.
func (w *walker) next() (l line, d *Damage, more bool) {
	b, whole, long := w.readLine()
	if !whole {
		switch {
		case w.err != nil:
			err := w.err
			w.err, w.eof = nil, true
			w.from = w.to
			return l, w.damage(IO, "%v", err), true
		case len(b) == 0:
			return l, nil, false
		case w.sealed:
			return l, w.damage(Seal, "%d bytes stand behind the seal", len(b)), true
		}
		return l, w.damage(Torn, "the last %d bytes are no whole line: %s", len(b), quote(b)), true
	}
	if w.sealed {
		return l, w.damage(Seal, "a line stands behind the seal: %s", quote(b)), true
	}
	if long {
		w.known = false
		w.skipped++
		return l, w.damage(Unreadable, "a line of %d bytes, at most %d are allowed", w.size, maxLine), true
	}
	l, ok := parseLine(b[:len(b)-1])
	if !ok {
		w.known = false
		w.skipped++
		return l, w.unreadable(b), true
	}
	known, prev := w.known, w.prev
	w.prev, w.known = l.crc, true
	if !known {
		w.skipped++
		return l, w.damage(Unchecked, "record %d follows a line that is no record", l.seq), true
	}
	if stated, ok := l.crc.value(); !ok || stated != chained(prev, l.body) {
		d := w.mismatch(l, checksum(prev, l.body))
		w.skipped++
		return l, d, true
	}
	switch string(l.kind) {
	case kindSegment:
		return l, w.damage(Disordered, "a segment line inside a segment"), true
	case kindSeal:
		w.sealed, w.prev = true, prev
		return l, nil, true
	}
	if l.seq <= w.seq || w.skipped == 0 && l.seq != w.seq+1 {
		d := w.damage(Disordered, "record %d, expected %d", l.seq, w.seq+1)
		w.seq = max(w.seq, l.seq)
		return l, d, true
	}
	w.seq, w.skipped = l.seq, 0
	return l, nil, true
}

// unreadable reports the line b, and the ones behind it that are no records
// either, as one damage.
func (w *walker) unreadable(b []byte) *Damage {
	d := w.damage(Unreadable, "not a record: %s", quote(b[:len(b)-1]))
	lines := 1
	for {
		b, whole, long := w.readLine()
		sound := false
		if whole && !long {
			_, sound = parseLine(b[:len(b)-1])
		}
		if !whole || sound { // leave it for the next call
			w.from -= len(b)
			w.offset -= int64(len(b))
			break
		}
		lines++
		w.skipped++
		d.Bytes += w.size
	}
	if lines > 1 {
		d.Text = fmt.Sprintf("%d lines are no records, the first: %s", lines, d.Text[len("not a record: "):])
	}
	return d
}

// mismatch says why a line does not chain from the one before.
func (w *walker) mismatch(l line, got digits) *Damage {
	expected := w.seq + 1 + w.skipped
	switch {
	case string(l.kind) == kindSeal && l.seq > w.seq+w.skipped, l.seq > expected:
		last := l.seq - 1
		if string(l.kind) == kindSeal {
			last = l.seq
		}
		return w.damage(Missing, "records %d to %d, in front of this %s", w.seq+w.skipped+1, last, l.kind)
	case l.seq < expected && string(l.kind) != kindSeal:
		return w.damage(Disordered, "record %d, expected %d", l.seq, expected)
	}
	return w.damage(Edited, "record %d (%s) has crc %q, computed %q", l.seq, l.kind, l.crc[:], got[:])
}

// readLine returns the next line with its LF. Without one, whole is false and
// b is what stands at the end. A line that is too long is passed over.
func (w *walker) readLine() (b []byte, whole, long bool) {
	w.at, w.size = w.offset, 0
	for {
		if i := bytes.IndexByte(w.buf[w.from+w.looked:w.to], '\n'); i >= 0 {
			n := w.looked + i + 1
			b = w.buf[w.from : w.from+n]
			w.advance(n)
			return b, true, w.size > maxLine
		}
		w.looked = w.to - w.from
		if w.eof && w.grows {
			w.eof = false
			return nil, false, false
		}
		if w.eof || w.err != nil {
			b = w.buf[w.from:w.to]
			w.advance(len(b))
			return b, false, false
		}
		if w.looked >= maxLine {
			w.advance(w.looked)
		}
		w.fill()
	}
}

func (w *walker) advance(n int) {
	w.from += n
	w.offset += int64(n)
	w.size += int64(n)
	w.looked = 0
}

// fill reads more of the segment, after hashing and dropping what was used.
func (w *walker) fill() {
	w.hash(w.from)
	copy(w.buf, w.buf[w.from:w.to])
	w.to -= w.from
	w.from, w.hashed = 0, 0
	if w.to == len(w.buf) || w.full && len(w.buf) < walkMost {
		bigger := make([]byte, 2*len(w.buf))
		copy(bigger, w.buf[:w.to])
		w.buf = bigger
	}
	n, err := w.src.Read(w.buf[w.to:])
	w.to += n
	w.full = w.to == len(w.buf)
	if errors.Is(err, io.EOF) {
		w.eof = true
	} else if err != nil {
		w.err = err
	}
}

// hash adds what stands before position end of buf to the digest.
func (w *walker) hash(end int) {
	if w.sum != nil && !w.sealed {
		w.sum.Write(w.buf[w.hashed:end])
	}
	w.hashed = end
}

// digest returns the digest of everything before the line that next just
// returned, which must be the seal. It may be called once.
func (w *walker) digest() []byte {
	if w.sum == nil {
		return nil
	}
	w.sum.Write(w.buf[w.hashed : w.from-int(w.size)])
	w.hashed = w.from
	return w.sum.Sum(nil)
}
