package logbook

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"runtime"
	"strings"
	"sync"
	"time"
)

// SegmentReport is what Verify found of one segment.
type SegmentReport struct {
	Name        string
	Records     uint64 // sound ones
	Repeated    uint64 // of these, written again in the next segment after a failure
	Bytes       int64  // decompressed
	First, Last uint64 // seq of the first and the last sound record
	From, To    string // t of these, RFC 3339
	Sealed      bool
	Packed      bool
	SHA256      string // computed, of what the seal covers; empty where unsealed

	heading   heading
	damage    []*Damage
	notices   []string
	linkCRC   string // crc of the record that the next segment continues
	linkFound bool
	lastCRC   string
}

// Report is what Verify found.
type Report struct {
	Folder   string
	Segments []SegmentReport
	Records  uint64    // sound, each counted once
	Bytes    int64     // of all segments, decompressed
	Damage   []*Damage // in the order of the logbook; empty where it is sound
	Notices  []string  // worth knowing, no damage
}

// OnlyTorn reports whether nothing worse was found than a torn tail.
func (r Report) OnlyTorn() bool {
	for _, d := range r.Damage {
		if d.Kind != Torn {
			return false
		}
	}
	return true
}

// Verify checks framing, sequence, chain and digests of the whole logbook in
// dir, and with deep also parses every record. It goes on behind damage. Its
// error says that the folder itself could not be read.
//
// What no check can find: records cut off cleanly at the very end of a segment
// that has no seal and no successor, and a forger who writes everything anew
// from the place of the change to the end.
func Verify(dir string, deep bool) (Report, error) { return verify(folder(dir), deep) }

func verify(d disk, deep bool) (Report, error) {
	report := Report{Folder: d.String()}
	c, err := listContents(d)
	if err != nil {
		return report, err
	}
	for _, name := range c.foreign {
		report.Notices = append(report.Notices, fmt.Sprintf("%s does not belong to the logbook", name))
	}
	for _, name := range c.torn {
		report.Notices = append(report.Notices, fmt.Sprintf("%s holds a torn tail that was set aside after a crash", name))
	}

	report.Segments = make([]SegmentReport, len(c.segments))
	headings := make([]*heading, len(c.segments))
	for i, s := range c.segments {
		headings[i] = peekHeading(d, s)
	}
	var wait sync.WaitGroup
	slots := make(chan struct{}, runtime.GOMAXPROCS(0))
	for i, s := range c.segments {
		var next *heading
		if i+1 < len(headings) && c.segments[i+1].number != s.number {
			next = headings[i+1]
		}
		slots <- struct{}{}
		wait.Go(func() {
			defer func() { <-slots }()
			report.Segments[i] = verifySegment(d, s, next, deep)
		})
	}
	wait.Wait()
	report.join(c.segments)
	if deep {
		report.verifySpectra(d)
	}
	return report, nil
}

// peekHeading reads the first line of a segment; nil where that is not sound.
func peekHeading(d disk, s segmentFile) *heading {
	r, err := openSegment(d, s)
	if err != nil {
		return nil
	}
	defer r.Close()
	h, damage := newWalker(r, s.name).begin()
	if damage != nil {
		return nil
	}
	return &h
}

// verifySegment checks one segment by itself. next is the heading of the one
// behind it, nil where there is none.
func verifySegment(d disk, s segmentFile, next *heading, deep bool) SegmentReport {
	r := SegmentReport{Name: s.name, Packed: s.packed}
	src, err := openSegment(d, s)
	if err != nil {
		r.damage = append(r.damage, &Damage{Segment: s.name, Kind: IO, Text: err.Error()})
		return r
	}
	defer src.Close()
	w := newWalker(src, s.name)
	w.sum = sha256.New()
	h, damage := w.begin()
	r.heading, r.lastCRC = h, h.AfterCRC
	if damage != nil {
		r.damage = append(r.damage, damage)
		if damage.Kind == Newer || damage.Kind == IO {
			return r
		}
	} else if h.Segment != s.number {
		r.damage = append(r.damage, w.damage(Twice, "it says that it is segment %d", h.Segment))
	}
	if next != nil && next.AfterSeq == h.AfterSeq {
		r.linkCRC, r.linkFound = h.AfterCRC, true
	}
	var (
		clock [stampSize]byte // t of the record before
		check = checker{}
	)
	for {
		l, damage, more := w.next()
		if !more {
			break
		}
		if damage != nil {
			r.damage = append(r.damage, damage)
			continue
		}
		if w.sealed {
			r.checkSeal(w, l)
			continue
		}
		if r.Records == 0 {
			r.First, r.From = l.seq, string(l.t)
		} else if bytes.Compare(l.t, clock[:]) < 0 {
			r.clockBack(l, clock[:])
		}
		copy(clock[:], l.t)
		r.Records++
		r.Last, r.lastCRC = l.seq, string(l.crc[:])
		if next != nil && l.seq >= next.AfterSeq {
			if l.seq > next.AfterSeq {
				r.Repeated++
			} else {
				r.linkCRC, r.linkFound = string(l.crc[:]), true
			}
		}
		if deep {
			if err := check.line(l); err != nil {
				r.damage = append(r.damage, w.damage(Edited, "record %d (%s): %v", l.seq, l.kind, err))
			}
		}
	}
	if r.Records > 0 {
		r.To = string(clock[:])
	}
	r.Bytes, r.Sealed = w.offset, w.sealed
	return r
}

// clockBack notes a bench clock that was set back. Channels that are stamped
// by interpolation may overlap by less than a second.
func (r *SegmentReport) clockBack(l line, before []byte) {
	a, errA := parseStamp(before)
	b, errB := parseStamp(l.t)
	if errA == nil && errB == nil && a.Sub(b) >= time.Second {
		r.notices = append(r.notices, fmt.Sprintf("%s: the clock went back by %v at record %d, from %s to %s",
			r.Name, a.Sub(b), l.seq, before, l.t))
	}
}

// checkSeal compares the seal with what stands before it.
func (r *SegmentReport) checkSeal(w *walker, l line) {
	var s seal
	if err := json.Unmarshal(l.data, &s); err != nil {
		r.damage = append(r.damage, w.damage(Seal, "%v", err))
		return
	}
	r.SHA256 = hex.EncodeToString(w.digest())
	switch {
	case s.Bytes != w.at:
		r.damage = append(r.damage, w.damage(Seal, "%d bytes stand before it, it says %d", w.at, s.Bytes))
	case s.SHA256 != r.SHA256:
		r.damage = append(r.damage, w.damage(Seal, "digest %s, computed %s", s.SHA256, r.SHA256))
	case s.Records != r.Records && len(r.damage) == 0:
		r.damage = append(r.damage, w.damage(Seal, "%d records stand before it, it says %d", r.Records, s.Records))
	}
	if s.TornBytes > 0 {
		r.notices = append(r.notices, fmt.Sprintf("%s: a crash cut it off; %d bytes behind its last whole record were set aside", r.Name, s.TornBytes))
	}
}

// join checks each segment against the one before it and adds everything up.
func (r *Report) join(files []segmentFile) {
	var before *SegmentReport
	for i := range r.Segments {
		s := &r.Segments[i]
		r.Bytes += s.Bytes
		if i > 0 && files[i-1].number == files[i].number {
			r.twin(s, &r.Segments[i-1])
			continue
		}
		if s.heading.Format == formatVersion && s.heading.Segment == files[i].number {
			if d := s.follows(before); d != nil {
				r.Damage = append(r.Damage, d)
			}
			if before != nil && s.From != "" && before.To != "" && s.From < before.To {
				s.clockBack(line{t: []byte(s.From), seq: s.First}, []byte(before.To))
			}
			before = s
		}
		r.Damage = append(r.Damage, s.damage...)
		r.Notices = append(r.Notices, s.notices...)
		r.Records += s.Records - s.Repeated
		if s.Repeated > 0 {
			r.Notices = append(r.Notices, fmt.Sprintf("%s: its last %d records stand again in the next segment, because writing failed there", s.Name, s.Repeated))
		}
	}
}

// twin judges a packed segment whose plain one is still there.
func (r *Report) twin(packed, plain *SegmentReport) {
	if packed.Packed && packed.SHA256 != "" && packed.SHA256 == plain.SHA256 && len(packed.damage) == 0 {
		r.Notices = append(r.Notices, fmt.Sprintf("%s is a whole copy of %s", packed.Name, plain.Name))
		return
	}
	r.Damage = append(r.Damage, &Damage{
		Segment: packed.Name, After: plain.heading.AfterSeq, Kind: Twice,
		Text: fmt.Sprintf("it does not hold the same as %s", plain.Name),
	})
}

// follows reports where s does not continue the segment before it, which is
// nil where s is the first.
func (s *SegmentReport) follows(before *SegmentReport) *Damage {
	h, d := s.heading, &Damage{Segment: s.Name, Kind: Missing}
	last, crc := uint64(0), string(noDigits[:])
	if before != nil {
		last, crc = max(before.Last, before.heading.AfterSeq), before.lastCRC
		if h.AfterSeq < last {
			crc = before.linkCRC
		}
	}
	d.After = min(last, h.AfterSeq)
	switch {
	case h.AfterSeq > last:
		d.Text = fmt.Sprintf("records %d to %d, in front of this segment", last+1, h.AfterSeq)
	case crc != h.AfterCRC:
		d.Kind = Disordered
		d.Text = fmt.Sprintf("it continues record %d with crc %q, that has %q", h.AfterSeq, h.AfterCRC, crc)
	case before != nil && h.PreviousSHA256 != nil && before.SHA256 == "":
		d.Kind, d.Text = Seal, fmt.Sprintf("%s was sealed and is not any more", before.Name)
	case before != nil && h.PreviousSHA256 != nil && !strings.EqualFold(*h.PreviousSHA256, before.SHA256):
		d.Kind, d.Text = Seal, fmt.Sprintf("%s had digest %s, now %s", before.Name, *h.PreviousSHA256, before.SHA256)
	default:
		return nil
	}
	return d
}
