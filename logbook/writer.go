package logbook

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"hash"
	"io/fs"
	"time"

	"barline/model/reading"
)

// end is where a logbook ends and the next segment continues.
type end struct {
	seq    uint64  // of the last record, 0 where there is none
	crc    digits  // of that record
	number int     // of the last segment, 0 where there is none
	sha256 *string // digest of that segment, nil where it was not sealed
}

// writer brings chunks to the disk. It belongs to one goroutine.
//
// It trusts nothing after a failure: what was not surely synced goes into a
// new segment, because after a failed sync the operating system may have
// dropped pages and still call the next sync a success.
type writer struct {
	disk    disk
	lock    file
	options Options
	end     end
	open    *openSegmentFile // nil before the first record and after a failure
	failed  time.Time        // of the last commit; zero where it went well
	sealed  func(segmentFile)
}

// openSegmentFile is the segment that is being written.
type openSegmentFile struct {
	segmentFile
	f       file
	first   reading.Stamp // of the first record
	last    reading.Stamp
	size    int64
	durable int64 // of size, surely on the disk
	records uint64
	sum     hash.Hash
	stamper stamper
}

const retryEvery = time.Second

// commit writes and syncs everything that waits in s. While the disk fails it
// tries once a second, or at once where it is urgent.
func (w *writer) commit(s *stream, now time.Time, urgent bool) {
	if !w.failed.IsZero() && !urgent && now.Sub(w.failed) < retryEvery {
		return
	}
	chunks := s.take(now)
	err := w.present()
	if err == nil {
		err = w.write(s, chunks)
	}
	w.failed = time.Time{}
	if err != nil {
		w.failed = now
		w.abandon()
	}
	s.release(err)
}

// present reports whether the folder is still the one that was opened: one
// that was removed or unmounted under us takes writes without complaint.
func (w *writer) present() error {
	if w.open != nil && !w.disk.is(w.open.name, w.open.f) {
		return fmt.Errorf("the folder %s is gone, or %s in it", w.disk, w.open.name)
	}
	if w.disk.is(lockName, w.lock) {
		return nil
	}
	lock, err := w.disk.lock()
	if err != nil && w.disk.is(lockName, w.lock) {
		return nil // the folder came back in between, with our own lock in it
	}
	if errors.Is(err, fs.ErrNotExist) {
		return fmt.Errorf("the folder %s is gone", w.disk)
	}
	if err != nil {
		return err
	}
	w.lock.Close()
	w.lock = lock
	if w.open != nil {
		return nil // only the lock was removed
	}
	c, err := listContents(w.disk)
	if err != nil {
		return err
	}
	if n := len(c.segments); n > 0 && c.segments[n-1].number != w.end.number {
		return fmt.Errorf("the folder %s ends with segment %d, expected %d: another program has written there meanwhile",
			w.disk, c.segments[n-1].number, w.end.number)
	}
	return nil
}

// write brings chunks to the disk with one sync for each segment that they go
// to, and settles them with s as they are durable.
func (w *writer) write(s *stream, chunks []chunk) error {
	for len(chunks) > 0 {
		if w.open != nil && !w.fits(&chunks[0]) {
			if err := w.seal(); err != nil {
				return err
			}
		}
		if w.open == nil {
			if err := w.start(chunks[0].first); err != nil {
				return err
			}
		}
		n := 0
		for n < len(chunks) && (n == 0 || w.fits(&chunks[n])) {
			if err := w.open.append(chunks[n].lines); err != nil {
				return err
			}
			w.open.records += uint64(chunks[n].records)
			w.open.last = chunks[n].last
			n++
		}
		if err := w.sync(); err != nil {
			return err
		}
		w.end.seq, w.end.crc = chunks[n-1].seq, chunks[n-1].crc
		s.settle(n)
		chunks = chunks[n:]
	}
	return nil
}

// fits reports whether c belongs in the open segment.
func (w *writer) fits(c *chunk) bool {
	o := w.open
	return !laterDay(o.first.UTC, c.first.UTC) && (o.records == 0 || o.size+int64(len(c.lines)) <= w.options.SegmentBytes)
}

// start opens the next segment and writes its first line. It syncs that by
// itself: records in a file whose first line was lost would be hard to place.
func (w *writer) start(at reading.Stamp) error {
	for number := w.end.number + 1; ; number++ {
		s := segmentFile{number: number, name: segmentName(number, plainSuffix)}
		f, err := w.disk.create(s.name)
		if errors.Is(err, fs.ErrExist) && number < w.end.number+1000 {
			continue // left by an attempt that failed
		}
		if err != nil {
			return err
		}
		w.open = &openSegmentFile{segmentFile: s, f: f, first: at, last: at, sum: sha256.New()}
		break
	}
	h := heading{
		Format: formatVersion, Segment: w.open.number,
		AfterSeq: w.end.seq, AfterCRC: string(w.end.crc[:]), PreviousSHA256: w.end.sha256,
	}
	b := appendHead(nil, &w.open.stamper, w.end.seq, at, kindSegment)
	b, _ = appendTail(h.append(b), 0, noDigits)
	if err := w.open.append(b); err != nil {
		return err
	}
	if err := w.sync(); err != nil {
		return err
	}
	if err := w.disk.syncDir(""); err != nil {
		w.open.durable = 0
		return err
	}
	w.end.number, w.end.sha256 = w.open.number, nil
	return nil
}

// sync makes the open segment durable.
func (w *writer) sync() error {
	if err := w.open.f.Sync(); err != nil {
		return err
	}
	w.open.durable = w.open.size
	return nil
}

// seal ends the open segment with its digest.
func (w *writer) seal() error {
	o := w.open
	digest := hex.EncodeToString(o.sum.Sum(nil))
	b := appendHead(nil, &o.stamper, w.end.seq, o.last, kindSeal)
	b = seal{Records: o.records, Bytes: o.size, SHA256: digest}.append(b)
	b, _ = appendTail(b, 0, w.end.crc)
	if err := o.append(b); err != nil {
		return err
	}
	if err := w.sync(); err != nil {
		return err
	}
	w.end.sha256 = &digest
	w.open = nil
	if w.sealed != nil {
		w.sealed(o.segmentFile)
	}
	return o.f.Close()
}

// abandon gives up the open segment behind what is durable in it. Errors do
// not matter: whatever is left there is repeated in the next segment.
func (w *writer) abandon() {
	if w.open == nil {
		return
	}
	o := w.open
	w.open = nil
	if o.durable == 0 {
		o.f.Close()
		w.disk.remove(o.name)
		return
	}
	o.f.Truncate(o.durable)
	o.f.Close()
}

// finish seals the open segment.
func (w *writer) finish() error {
	var err error
	if w.open != nil {
		if err = w.seal(); err != nil {
			err = fmt.Errorf("logbook: the last segment could not be sealed: %w", err)
			w.abandon()
		}
	}
	return err
}

func (o *openSegmentFile) append(b []byte) error {
	if _, err := o.f.WriteAt(b, o.size); err != nil {
		return err
	}
	o.sum.Write(b)
	o.size += int64(len(b))
	return nil
}
