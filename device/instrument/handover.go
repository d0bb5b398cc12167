package instrument

import (
	"cmp"
	"slices"
	"sync"
	"time"

	"barline/model/bench"
	"barline/model/reading"
	"barline/model/unit"
)

// Handover is a Sink that stands before another where several gauges of
// different range have the same role. One of them is in charge: its readings
// keep the role, those of the others pass on without one, to be shown and
// recorded and to drive nothing.
//
// The finest gauge that can tell is in charge. It hands over upwards near the
// top of its range, where the next one has long been within its own, and takes
// over again only well below that, so that a pressure that lingers there does
// not hop between two gauges that differ by their errors. A gauge that fails or
// falls silent hands over at once.
type Handover struct {
	next   Sink
	mu     sync.Mutex
	groups map[reading.Role]*gauges
}

// Shares of the range of a gauge at which it hands over and takes over.
const (
	handsOverAt = 0.95
	takesOverAt = 0.85
)

// gauges are those of one role, finest first.
type gauges struct {
	scales []scale
	latest []reading.Reading
	charge int // -1 before the first usable reading
	stale  time.Duration
}

// scale is the range of one gauge in the units of its readings: absolute, and
// after the gas factor.
type scale struct {
	channel   string
	low, high float64
}

func newScale(c bench.Channel, ambient unit.Pascal) scale {
	s := scale{c.Name, c.Low, c.High}
	if c.GasFactor > 0 {
		s.low, s.high = s.low*c.GasFactor, s.high*c.GasFactor
	}
	if c.Gauge {
		s.low, s.high = s.low+float64(ambient), s.high+float64(ambient)
	}
	return s
}

// NewHandover returns a Handover for the channels of a bench, whose gauge
// pressures count from ambient. A gauge that has said nothing for stale, bench
// time, is not in charge.
func NewHandover(channels []bench.Channel, ambient unit.Pascal, stale time.Duration, next Sink) *Handover {
	h := &Handover{next: next, groups: map[reading.Role]*gauges{}}
	for _, c := range channels {
		if c.Role == reading.NoRole {
			continue
		}
		g := h.groups[c.Role]
		if g == nil {
			g = &gauges{charge: -1, stale: stale}
			h.groups[c.Role] = g
		}
		g.scales = append(g.scales, newScale(c, ambient))
	}
	for role, g := range h.groups {
		if len(g.scales) < 2 {
			delete(h.groups, role)
			continue
		}
		slices.SortStableFunc(g.scales, func(a, b scale) int { return cmp.Compare(a.high, b.high) })
		g.latest = make([]reading.Reading, len(g.scales))
	}
	return h
}

// Reading implements Sink.
func (h *Handover) Reading(r reading.Reading) {
	h.mu.Lock()
	if g := h.groups[r.Role]; g != nil && !g.inCharge(r) {
		r.Role = reading.NoRole
	}
	h.mu.Unlock()
	h.next.Reading(r)
}

// Link implements Sink.
func (h *Handover) Link(instrument string, up bool, reason string, at reading.Stamp) {
	h.next.Link(instrument, up, reason, at)
}

// Answer implements Sink.
func (h *Handover) Answer(command uint64, err error, at reading.Stamp) {
	h.next.Answer(command, err, at)
}

// inCharge takes a reading and reports whether its gauge is in charge.
func (g *gauges) inCharge(r reading.Reading) bool {
	me := slices.IndexFunc(g.scales, func(s scale) bool { return s.channel == r.Channel })
	if me < 0 {
		return true // not of this bench: nothing to hand over to
	}
	g.latest[me] = r
	switch {
	case g.charge < 0 || !g.able(g.charge, r.Taken):
		g.charge = g.choose(r.Taken, handsOverAt)
	case me < g.charge && g.below(me, takesOverAt):
		g.charge = me
	case me == g.charge && !g.below(me, handsOverAt):
		if next := g.choose(r.Taken, handsOverAt); next >= 0 {
			g.charge = next
		}
	}
	// Where no gauge can tell, each says so under its role.
	return g.charge < 0 || g.charge == me
}

// able reports whether gauge i has a usable reading that is young enough.
func (g *gauges) able(i int, now reading.Stamp) bool {
	return g.latest[i].Status.Usable() && now.Mono-g.latest[i].Taken.Mono <= g.stale
}

// below reports whether gauge i reads less than a share of its range.
func (g *gauges) below(i int, share float64) bool {
	s := g.scales[i]
	return g.latest[i].Status.Usable() && g.latest[i].Value < s.low+share*(s.high-s.low)
}

// choose returns the finest able gauge below a share of its range, else the
// coarsest that is able, else -1.
func (g *gauges) choose(now reading.Stamp, share float64) int {
	last := -1
	for i := range g.scales {
		if !g.able(i, now) {
			continue
		}
		if g.below(i, share) {
			return i
		}
		last = i
	}
	return last
}
