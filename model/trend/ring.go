package trend

import (
	"math"
	"time"
)

// extent is the shape of one level: how wide its buckets are and how many it
// keeps.
type extent struct {
	width time.Duration
	count int
}

// Five levels, from three minutes in fine detail to a month in hours: 5 100
// buckets or about 200 kB a ring. Each reaches a tenth further back than the
// round span it is drawn for, so that a chart does not change level while it
// scrolls.
var extents = [...]extent{
	{200 * time.Millisecond, 900}, // 2 min and more
	{2 * time.Second, 1000},       // 30 min
	{20 * time.Second, 1200},      // 6 h
	{4 * time.Minute, 1200},       // 3 days
	{time.Hour, 800},              // 30 days
}

// refresh is the share of a bucket's width by which the newest bucket of a
// view may lag. Without it every view would copy every level.
const refresh = 8

// Ring is the history of one quantity. It has a single owner; views of it may
// be read by anybody.
type Ring struct {
	levels [len(extents)]level
	first  time.Duration // earliest time added
}

type level struct {
	buckets []Bucket // ring; index of a bucket is its number modulo the length
	newest  int64    // number of the newest bucket: Start / width
	first   int64    // number of the oldest bucket that was ever reached
	begun   bool

	seen   time.Duration // newest time added
	copied time.Duration // seen when copy was made
	copy   []Bucket      // shared by the views since then, never written to
}

// NewRing returns an empty history.
func NewRing() *Ring {
	r := &Ring{}
	for i := range r.levels {
		r.levels[i].buckets = make([]Bucket, extents[i].count)
	}
	return r
}

// Add folds the value v, taken at bench Mono t, into every level. NaN and
// infinities never enter: what was not measured is a gap. A value older than
// the ring remembers is left out. Add allocates nothing.
func (r *Ring) Add(t time.Duration, v float64) {
	if math.IsNaN(v) || math.IsInf(v, 0) || t < 0 {
		return
	}
	if !r.levels[0].begun || t < r.first {
		r.first = t
	}
	for i := range r.levels {
		r.levels[i].add(extents[i].width, t, v)
	}
}

func (l *level) add(width, t time.Duration, v float64) {
	number, size := int64(t/width), int64(len(l.buckets))
	if !l.begun {
		l.begun, l.first, l.newest = true, number, number-1
	}
	if number <= l.newest-size {
		return
	}
	// Everything between is a gap; more than a whole ring of it is one lap.
	for n := max(l.newest+1, number-size+1); n <= number; n++ {
		l.buckets[n%size] = Bucket{Start: time.Duration(n) * width}
	}
	l.newest = max(l.newest, number)
	l.first = min(l.first, number)
	l.seen = max(l.seen, t)

	b := &l.buckets[number%size]
	if b.Start != time.Duration(number)*width {
		*b = Bucket{Start: time.Duration(number) * width}
	}
	if b.Count == 0 {
		b.Min, b.Max, b.Mean = v, v, v
	}
	b.Count++
	b.Min, b.Max = min(b.Min, v), max(b.Max, v)
	b.Mean += (v - b.Mean) / float64(b.Count)
}

// View returns the history so far, or nil where nothing was added. Views share
// what has not changed between them; the newest bucket of a level may lag by
// an eighth of its width, and finer levels hold what it lacks.
func (r *Ring) View() *View {
	if !r.levels[0].begun {
		return nil
	}
	v := &View{First: r.first, Levels: make([]Level, len(r.levels))}
	for i := range r.levels {
		v.Levels[i] = Level{Width: extents[i].width, Buckets: r.levels[i].view(extents[i].width)}
	}
	return v
}

func (l *level) view(width time.Duration) []Bucket {
	if l.copy != nil && l.seen-l.copied < width/refresh && l.copy[len(l.copy)-1].Start == time.Duration(l.newest)*width {
		return l.copy
	}
	size := int64(len(l.buckets))
	oldest := max(l.first, l.newest-size+1)
	out := make([]Bucket, 0, l.newest-oldest+1)
	for n := oldest; n <= l.newest; n++ {
		b := l.buckets[n%size]
		if b.Start != time.Duration(n)*width { // never reached: values came out of order
			b = Bucket{Start: time.Duration(n) * width}
		}
		out = append(out, b)
	}
	l.copy, l.copied = out, l.seen
	return out
}

// Since returns the finest level that reaches back to t, or as far as any
// level does. It is the zero Level where there is no history.
func (v *View) Since(t time.Duration) Level {
	if v == nil || len(v.Levels) == 0 {
		return Level{}
	}
	reach := max(t, v.First)
	for _, l := range v.Levels {
		if len(l.Buckets) > 0 && l.Buckets[0].Start <= reach {
			return l
		}
	}
	return v.Levels[len(v.Levels)-1]
}
