package logbook

import (
	"math"
	"time"

	"barline/model/reading"
)

// Deadband decides which readings of one channel go into the record: the
// first, one that differs from the last recorded value by more than Width,
// one with another status or reason, and one at every Heartbeat.
//
// So the channel can be rebuilt: until the next record the last one stands,
// and at every reading that was left out it is right within Width. A record
// that is older than Heartbeat says that no reading came.
//
// The zero value records every reading.
type Deadband struct {
	Width     float64       // SI unit of the channel's role
	Heartbeat time.Duration // of bench time

	last  reading.Reading
	seen  bool
	whole time.Duration // until when every reading is recorded
}

// CaptureUntil records every reading that is taken before the bench time end.
func (d *Deadband) CaptureUntil(end time.Duration) { d.whole = end }

// Due reports whether r is to be recorded, and takes it as recorded if so.
func (d *Deadband) Due(r reading.Reading) bool {
	if d.seen && d.covers(r) {
		return false
	}
	d.last, d.seen = r, true
	return true
}

// covers reports whether the last record says enough about r.
func (d *Deadband) covers(r reading.Reading) bool {
	age := r.Taken.Mono - d.last.Taken.Mono
	if age >= d.Heartbeat || r.Taken.Mono < d.whole || r.Status != d.last.Status || r.Reason != d.last.Reason {
		return false
	}
	if r.Status == reading.Failure { // there is no value
		return true
	}
	if math.IsNaN(r.Value) || math.IsNaN(d.last.Value) {
		return math.IsNaN(r.Value) && math.IsNaN(d.last.Value)
	}
	return math.Abs(r.Value-d.last.Value) <= d.Width
}
