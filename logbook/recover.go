package logbook

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"strconv"

	"barline/model/reading"
)

// makeFolder makes dir where it is missing. The folder above must exist for
// at least one level, so that a misspelt mount point is noticed.
func makeFolder(dir string) (disk, error) {
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return nil, fmt.Errorf("logbook %s cannot be made: %w", dir, err)
	}
	return folder(dir), nil
}

// recoverEnd finds where a logbook ends. A last segment that was cut off by a
// crash is closed behind its last whole record; the bytes behind that are set
// aside, never dropped. Anything worse is left for Verify to report, and
// writing goes on behind the highest record that is sound.
func recoverEnd(d disk) (end, error) {
	c, err := listContents(d)
	if err != nil {
		return end{}, err
	}
	e := end{crc: noDigits}
	for i := len(c.segments) - 1; i >= 0; i-- {
		s := c.segments[i]
		if i > 0 && c.segments[i-1].number == s.number {
			continue // the packed copy of a segment that is still there
		}
		e.number = max(e.number, s.number)
		sure, err := recoverSegment(d, s, &e)
		if err != nil {
			return e, fmt.Errorf("%s: %w", s.name, err)
		}
		if sure {
			break
		}
	}
	return e, nil
}

// ending is what a walk over the last segment found.
type ending struct {
	seq     uint64
	crc     digits
	records uint64 // sound ones
	size    int64  // of everything up to the last sound line
	last    reading.Stamp
	digest  *string
	sealed  bool
	rest    bool // bytes stand behind size
	spoilt  bool // damage stands in front of size

	begun    bool // its first line is sound and that of its number
	stranger bool // its first line is sound and that of another number
	fragment bool // there is not even a whole first line
}

// recoverSegment takes into e where s ends, and closes s where a crash left it
// open. sure is false where s does not begin as the segment of its number, so
// that the logbook may well end in one before it.
func recoverSegment(d disk, s segmentFile, e *end) (sure bool, err error) {
	r, err := openSegment(d, s)
	if err != nil {
		return false, err
	}
	g, err := findEnd(newWalker(r, s.name), s.number)
	r.Close()
	switch {
	case err != nil:
		return false, err
	case g.fragment:
		to, err := freeName(d, segmentName(s.number, tornSuffix))
		if err != nil {
			return false, err
		}
		return false, d.rename(s.name, to)
	case g.stranger, g.seq < e.seq, !g.begun && g.records == 0:
		return false, nil
	}
	e.seq, e.crc, e.sha256 = g.seq, g.crc, g.digest
	if !g.begun || g.sealed || g.spoilt || s.packed {
		return g.begun, nil
	}
	e.sha256, err = closeSegment(d, s, g)
	return true, err
}

// findEnd walks to the end of segment number.
func findEnd(w *walker, number int) (g ending, err error) {
	h, damage := w.begin()
	switch {
	case damage == nil && h.Segment != number:
		return ending{stranger: true}, nil
	case damage == nil:
		g.begun = true
		g.seq, g.size, g.last = h.AfterSeq, w.offset, w.head
		copy(g.crc[:], h.AfterCRC)
	case damage.Kind == IO, damage.Kind == Newer:
		return g, errors.New(damage.Text)
	case damage.Kind == Torn:
		return ending{fragment: true}, nil
	default:
		g.rest = true
	}
	for {
		l, damage, more := w.next()
		switch {
		case !more:
			return g, nil
		case damage != nil && damage.Kind == IO:
			return g, errors.New(damage.Text)
		case damage != nil:
			g.rest = true
			continue
		}
		g.spoilt = g.spoilt || g.rest
		g.rest = false
		g.size = w.offset
		g.last = l.stamp()
		if g.sealed = w.sealed; g.sealed {
			var s seal
			if json.Unmarshal(l.data, &s) == nil {
				g.digest = &s.SHA256
			}
			continue
		}
		g.seq, g.crc = l.seq, l.crc
		g.records++
	}
}

// closeSegment sets aside what stands behind g.size and seals the segment.
// Each step may be cut off and done again.
func closeSegment(d disk, s segmentFile, g ending) (*string, error) {
	f, err := d.openWritable(s.name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	size, err := f.Size()
	if err != nil {
		return nil, err
	}
	if size > g.size {
		if err := setAside(d, segmentName(s.number, tornSuffix), io.NewSectionReader(f, g.size, size-g.size)); err != nil {
			return nil, err
		}
		if err := f.Truncate(g.size); err != nil {
			return nil, err
		}
	}
	sum := sha256.New()
	if _, err := io.Copy(sum, io.NewSectionReader(f, 0, g.size)); err != nil {
		return nil, err
	}
	digest := hex.EncodeToString(sum.Sum(nil))
	b := appendHead(nil, new(stamper), g.seq, g.last, kindSeal)
	b = seal{Records: g.records, Bytes: g.size, SHA256: digest, Recovered: true, TornBytes: size - g.size}.append(b)
	b, _ = appendTail(b, 0, g.crc)
	if _, err := f.WriteAt(b, g.size); err != nil {
		return nil, err
	}
	return &digest, f.Sync()
}

// setAside keeps a torn tail in a file of its own.
func setAside(d disk, name string, tail io.Reader) error {
	name, err := freeName(d, name)
	if err != nil {
		return err
	}
	f, err := d.create(name)
	if err != nil {
		return err
	}
	defer f.Close()
	if _, err := io.Copy(io.NewOffsetWriter(f, 0), tail); err != nil {
		return err
	}
	if err := f.Sync(); err != nil {
		return err
	}
	return d.syncDir("")
}

// freeName returns name, or name with the lowest number behind it that no
// file has.
func freeName(d disk, name string) (string, error) {
	try := name
	for n := 2; ; n++ {
		f, err := d.open(try)
		if errors.Is(err, fs.ErrNotExist) {
			return try, nil
		}
		if err != nil {
			return "", err
		}
		f.Close()
		try = name + "." + strconv.Itoa(n)
	}
}
