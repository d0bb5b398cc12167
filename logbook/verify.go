package logbook

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"math"
	"runtime"
	"sync"
	"time"
)

// SegmentReport is what Verify found of one segment.
type SegmentReport struct {
	Name        string
	Records     uint64 // sound ones
	Void        uint64 // more, behind what the next segment continues: written there again, or never acknowledged
	Bytes       int64  // decompressed
	First, Last uint64 // seq of the first and the last sound record
	From, To    string // t of these, RFC 3339
	Sealed      bool
	Packed      bool
	SHA256      string // computed, of what the seal covers; empty where unsealed

	heading    heading
	sound      bool // the heading is
	damage     []*Damage
	notices    []string
	mentions   []mention
	lastDigits digits
	lastCRC    string // of the last sound record, or of the one that the heading continues
}

// mostDamage bounds what one segment can fill memory with.
const mostDamage = 1000

// spoil adds damage to the report.
func (r *SegmentReport) spoil(d *Damage) {
	switch n := len(r.damage); {
	case n < mostDamage:
		r.damage = append(r.damage, d)
	case n == mostDamage:
		r.damage = append(r.damage, &Damage{Segment: d.Segment, Offset: d.Offset, After: d.After, Kind: d.Kind,
			Text: fmt.Sprintf("more than %d places are damaged, the rest is not listed", mostDamage)})
	}
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
// dir, and the digest of every file that a record names; with deep it also
// parses every record. It goes on behind damage. Its
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

	files := once(c.segments)
	headings := peekHeadings(d, files)
	report.Segments = make([]SegmentReport, len(files))
	var wait sync.WaitGroup
	slots := make(chan struct{}, runtime.GOMAXPROCS(0))
	for i, s := range files {
		slots <- struct{}{}
		wait.Go(func() {
			defer func() { <-slots }()
			report.Segments[i] = verifySegment(d, s, bound(headings[i+1:]), deep)
		})
	}
	wait.Wait()
	report.join(files)
	report.twins(d, c.segments)
	report.verifyAttachments(d)
	return report, nil
}

// verifySegment checks one segment by itself. Records above bound do not count.
func verifySegment(d disk, s segmentFile, bound uint64, deep bool) SegmentReport {
	r := SegmentReport{Name: s.name, Packed: s.packed}
	src, err := openSegment(d, s)
	if err != nil {
		r.spoil(&Damage{Segment: s.name, Kind: IO, Text: err.Error()})
		return r
	}
	defer src.Close()
	w := newWalker(src, s.name)
	w.sum = sha256.New()
	h, damage := w.begin()
	r.heading, r.lastCRC, r.sound = h, h.AfterCRC, damage == nil
	if damage != nil {
		r.spoil(damage)
		if damage.Kind != Heading {
			return r
		}
	}
	var (
		clock [stampSize]byte // t of the record before
		check = checker{segment: s.name}
	)
	for {
		l, damage, more := w.next()
		if !more {
			break
		}
		if damage != nil {
			r.spoil(damage)
			continue
		}
		if w.sealed {
			r.checkSeal(w, l)
			continue
		}
		if l.seq > bound {
			r.Void++
			continue
		}
		if r.Records == 0 {
			r.First, r.From = l.seq, string(l.t)
		} else if bytes.Compare(l.t, clock[:]) < 0 {
			r.clockBack(l, clock[:])
		}
		copy(clock[:], l.t)
		r.Records++
		r.Last, r.lastDigits = l.seq, l.crc
		if deep {
			if err := check.line(l); err != nil {
				r.spoil(w.damage(Edited, "record %d (%s): %v", l.seq, l.kind, err))
			}
		}
		if string(l.kind) != "reading" { // most lines are readings and name no file
			check.names(l)
		}
	}
	if r.Records > 0 {
		r.To, r.lastCRC = string(clock[:]), string(r.lastDigits[:])
	}
	r.Bytes, r.Sealed, r.mentions = w.offset, w.sealed, check.mentions
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
		r.spoil(w.damage(Seal, "%v", err))
		return
	}
	r.SHA256 = hex.EncodeToString(w.digest())
	switch {
	case s.Bytes != w.at:
		r.spoil(w.damage(Seal, "%d bytes stand before it, it says %d", w.at, s.Bytes))
	case s.SHA256 != r.SHA256:
		r.spoil(w.damage(Seal, "digest %s, computed %s", s.SHA256, r.SHA256))
	case s.Records != r.Records+r.Void && len(r.damage) == 0:
		r.spoil(w.damage(Seal, "%d records stand before it, it says %d", r.Records, s.Records))
	}
	if s.TornBytes > 0 {
		r.notices = append(r.notices, fmt.Sprintf("%s: a crash cut it off; %d bytes behind its last whole record were set aside", r.Name, s.TornBytes))
	}
}

// join checks each segment against the one before it and adds everything up.
func (r *Report) join(files []segmentFile) {
	var (
		before *SegmentReport
		last   uint64
		crc    = string(noDigits[:])
	)
	for i := range r.Segments {
		s := &r.Segments[i]
		r.Bytes += s.Bytes
		if s.sound {
			if d := s.heading.link(files[i], last, crc); d != nil {
				r.Damage = append(r.Damage, d)
				if d.Kind == Twice {
					continue
				}
			} else if d := s.digestBefore(before); d != nil {
				r.Damage = append(r.Damage, d)
			}
		}
		for _, d := range s.damage {
			d.After = max(d.After, last) // where s does not say what it continues
		}
		if before != nil && s.From != "" && s.From < before.To {
			s.clockBack(line{t: []byte(s.From), seq: s.First}, []byte(before.To))
		}
		if s.lastCRC != "" {
			before, last, crc = s, max(s.Last, s.heading.AfterSeq), s.lastCRC
		}
		r.Damage = append(r.Damage, s.damage...)
		r.Notices = append(r.Notices, s.notices...)
		r.Records += s.Records
		if s.Void > 0 {
			r.Notices = append(r.Notices, fmt.Sprintf("%s: its last %d records do not count: writing failed there and was taken up in the next segment", s.Name, s.Void))
		}
	}
}

// digestBefore reports where s quotes another digest of the segment before it.
func (s *SegmentReport) digestBefore(before *SegmentReport) *Damage {
	said := s.heading.PreviousSHA256
	if before == nil || said == nil || *said == before.SHA256 {
		return nil
	}
	d := &Damage{Segment: s.Name, After: s.heading.AfterSeq, Kind: Seal}
	if d.Text = fmt.Sprintf("%s had digest %s, now %s", before.Name, *said, before.SHA256); before.SHA256 == "" {
		d.Text = fmt.Sprintf("%s was sealed and is not any more", before.Name)
	}
	return d
}

// twins judges packed segments whose plain ones are still there.
func (r *Report) twins(d disk, all []segmentFile) {
	for i := 1; i < len(all); i++ {
		packed, plain := all[i], all[i-1]
		if packed.number != plain.number {
			continue
		}
		a, b := verifySegment(d, packed, math.MaxUint64, false), verifySegment(d, plain, math.MaxUint64, false)
		if a.SHA256 != "" && a.SHA256 == b.SHA256 && len(a.damage) == 0 {
			r.Notices = append(r.Notices, fmt.Sprintf("%s is a whole copy of %s", packed.name, plain.name))
			continue
		}
		r.Damage = append(r.Damage, &Damage{
			Segment: packed.name, After: b.heading.AfterSeq, Kind: Twice,
			Text: fmt.Sprintf("it does not hold the same as %s", plain.name),
		})
	}
}
