package logbook

import (
	"errors"
	"io/fs"
	"slices"
)

// State of a segment.
type State string

const (
	Finished   State = "sealed"     // sealed, and sound when it was indexed
	Unfinished State = "not sealed" // being written, or cut off
	Damaged    State = "damaged"    // Verify tells how
)

// SegmentSummary says what is in a segment without checking all of it again.
type SegmentSummary struct {
	Name      string
	Records   uint64
	FileBytes int64  // as it lies on the disk
	From, To  string // least and greatest t, RFC 3339; empty where there is no record
	State     State
}

// Summary says what is in a logbook.
type Summary struct {
	Folder   string
	Segments []SegmentSummary
	Kinds    []string // that occur, ascending
}

// Segments returns how many segments the folder dir holds; one that does not
// exist or is no logbook holds none.
func Segments(dir string) (int, error) {
	c, err := listContents(folder(dir))
	if errors.Is(err, fs.ErrNotExist) {
		return 0, nil
	}
	return len(once(c.segments)), err
}

// Summarise goes by the indexes where it can, so that it is quick; use Verify
// to know whether a logbook is sound.
func Summarise(dir string) (Summary, error) { return summarise(folder(dir)) }

func summarise(d disk) (Summary, error) {
	sum := Summary{Folder: d.String()}
	c, err := listContents(d)
	if err != nil {
		return sum, err
	}
	files := once(c.segments)
	headings := peekHeadings(d, files)
	for i, s := range files {
		part := SegmentSummary{Name: s.name, FileBytes: fileSize(d, s.name)}
		kinds := []string(nil)
		if x, ok := indexOf(d, s); ok {
			part.Records, part.From, part.To, part.State = x.All.Records, x.All.From, x.All.To, Finished
			kinds = x.All.Kinds
		} else {
			kinds = part.walk(d, s, bound(headings[i+1:]))
		}
		for _, k := range kinds {
			if !slices.Contains(sum.Kinds, k) {
				sum.Kinds = append(sum.Kinds, k)
			}
		}
		sum.Segments = append(sum.Segments, part)
	}
	slices.Sort(sum.Kinds)
	return sum, nil
}

// walk fills in what an index would know, and returns the kinds.
func (p *SegmentSummary) walk(d disk, s segmentFile, bound uint64) []string {
	p.State = Damaged
	r, err := openSegment(d, s)
	if err != nil {
		return nil
	}
	defer r.Close()
	w := newWalker(r, s.name)
	_, damage := w.begin()
	var g gauge
	sound := damage == nil || damage.Kind == Torn
	for damage == nil || damage.Kind == Heading {
		l, found, more := w.next()
		if !more {
			break
		}
		if found != nil {
			sound = sound && found.Kind == Torn
		} else if !w.sealed && l.seq <= bound {
			g.add(&l)
		}
	}
	all := g.done()
	if p.Records, p.From, p.To = all.Records, all.From, all.To; sound {
		p.State = Unfinished
	}
	return all.Kinds
}

func fileSize(d disk, name string) int64 {
	f, err := d.open(name)
	if err != nil {
		return 0
	}
	defer f.Close()
	size, err := f.Size()
	if err != nil {
		return 0
	}
	return size
}
