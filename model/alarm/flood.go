package alarm

import (
	"time"

	"barline/model/reading"
)

// The performance bounds of ISA-18.2 (2016) and EEMUA 191: more than ten
// alarms in ten minutes are a flood, which lasts until fewer than five come in
// ten minutes; an alarm that stands for more than a day is stale. Three
// raisings in a minute are chatter (common practice, no source).
const (
	floodWithin   = 10 * time.Minute
	floodAbove    = 10
	floodEnds     = 5
	staleAfter    = 24 * time.Hour
	chatterWithin = time.Minute
	chatterCount  = 3
)

// flood counts raisings of the whole list.
type flood struct {
	recent [floodAbove + 1]time.Duration // Mono of the newest, oldest first
	count  uint64
	on     bool
	since  reading.Stamp
	times  uint64
}

func (f *flood) raise(at reading.Stamp) {
	copy(f.recent[:], f.recent[1:])
	f.recent[floodAbove] = at.Mono
	f.count++
	f.pass(at)
}

// pass brings the verdict up to date.
func (f *flood) pass(at reading.Stamp) {
	n := f.within(at.Mono)
	switch {
	case !f.on && n > floodAbove:
		f.on, f.since = true, at
		f.times++
	case f.on && n < floodEnds:
		f.on = false
	}
}

// within counts the raisings of the last ten minutes, up to one more than a
// flood needs.
func (f *flood) within(mono time.Duration) int {
	n := 0
	for k := range min(f.count, uint64(len(f.recent))) {
		if mono-f.recent[len(f.recent)-1-int(k)] < floodWithin {
			n++
		}
	}
	return n
}

// Load is how busy the alarms keep a person.
type Load struct {
	Raised     uint64 // since the list was made, hidden ones not counted
	TenMinutes int    // raised in the last ten minutes, counted up to 11
	Flood      bool
	FloodSince reading.Stamp
	Floods     uint64
	Calling    int // ask for a person now
	Hidden     int // shelved, suppressed or out of service
	Stale      int // standing for more than a day
	Chattering int // raised three times or more within the last minute
}

// Load returns the load at this instant.
func (l *List) Load(at reading.Stamp) Load {
	n := Load{
		Raised: l.flood.count, TenMinutes: l.flood.within(at.Mono),
		Flood: l.flood.on, FloodSince: l.flood.since, Floods: l.flood.times,
	}
	for i := range l.definitions {
		e := &l.entries[i]
		if e.State.Calls() {
			n.Calling++
		}
		if e.State.Hidden() {
			n.Hidden++
		} else if e.Active && at.Mono-e.Raised.Mono > staleAfter {
			n.Stale++
		}
		if e.Chattering(at) {
			n.Chattering++
		}
	}
	return n
}

// Chattering reports whether the alarm was raised three times within the last
// minute: its delays or its deadband are too small.
func (e *Entry) Chattering(at reading.Stamp) bool {
	return e.Count >= chatterCount && at.Mono-e.recent[0] < chatterWithin
}
