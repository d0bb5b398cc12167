package instrument

import (
	"math"
	"sync/atomic"

	"barline/model/reading"
	"barline/model/unit"
)

// Ambient is the air pressure that gauge pressures count from: first as the
// bench file gives it, then as a barometer measures it. It is safe for
// concurrent use.
type Ambient struct{ bits atomic.Uint64 }

// NewAmbient returns an Ambient of p.
func NewAmbient(p unit.Pascal) *Ambient {
	a := &Ambient{}
	a.set(p)
	return a
}

// Pressure returns the air pressure, absolute.
func (a *Ambient) Pressure() unit.Pascal { return unit.Pascal(math.Float64frombits(a.bits.Load())) }

func (a *Ambient) set(p unit.Pascal) { a.bits.Store(math.Float64bits(float64(p))) }

// Air pressures that can be: from the top of the highest mountain to more than
// was ever measured at sea level (1.09 bar; common knowledge, no source).
const (
	lowestAir  = 0.3 * unit.Bar
	highestAir = 1.15 * unit.Bar
)

// Barometer is a Sink that stands before another and keeps an Ambient up to
// date. A value that no air has is passed on and not counted from.
type Barometer struct {
	Sink
	Air *Ambient
}

// Reading implements Sink.
func (b Barometer) Reading(r reading.Reading) {
	if p := unit.Pascal(r.Value); r.Role == reading.Ambient && r.Status.Usable() && p >= lowestAir && p <= highestAir {
		b.Air.set(p)
	}
	b.Sink.Reading(r)
}

// CountFrom makes the gauge pressures of the instrument count from air, which
// others may share and change.
func (in *Instrument) CountFrom(air *Ambient) {
	for i := range in.channels {
		in.channels[i].ambient = air
	}
}
