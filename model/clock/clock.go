// Package clock tells bench time: the time of stamps, polling, staleness,
// alarm delays and procedures. Under simulation it may run faster than life.
// Silent intervals on a line, disk syncs and redraws are wall time and use
// package time directly.
package clock

import (
	"sync"
	"time"

	"barline/model/reading"
)

// Clock tells bench time and waits in it.
type Clock interface {
	// Now returns the present instant. Mono never steps back.
	Now() reading.Stamp
	// Wall returns how long d of bench time lasts on the wall.
	Wall(d time.Duration) time.Duration
}

// Scaled is a clock that runs speed times as fast as life. It is safe for
// concurrent use.
//
// At any speed but 1 it is the clock of a simulation, and stands still while
// nobody looks at it for longer than a moment: a machine that stalls for a
// tenth of a second must not make two seconds of bench time pass between a
// question and its answer.
type Scaled struct {
	speed float64

	mu   sync.Mutex
	utc  time.Time // at the start
	last time.Time // carries the runtime's monotonic reading
	mono time.Duration
}

// longestLook is the longest time on the wall that may pass between two looks
// at the clock of a simulation and still count.
const longestLook = 10 * time.Millisecond

// NewScaled starts a clock at the present instant. Speed must be positive;
// 1 is real time.
func NewScaled(speed float64) *Scaled {
	if !(speed > 0) {
		panic("clock: speed must be positive")
	}
	now := time.Now()
	return &Scaled{speed: speed, utc: now.UTC().Round(0), last: now}
}

// Now implements Clock. At speed 1 UTC follows the system clock, so that a
// step of it is seen; otherwise it runs from the start at the given speed.
func (c *Scaled) Now() reading.Stamp {
	c.mu.Lock()
	defer c.mu.Unlock()
	now := time.Now()
	passed := now.Sub(c.last)
	c.last = now
	if c.speed == 1 {
		c.mono += passed
		return reading.Stamp{UTC: now.UTC().Round(0), Mono: c.mono}
	}
	c.mono += time.Duration(float64(min(passed, longestLook)) * c.speed)
	return reading.Stamp{UTC: c.utc.Add(c.mono), Mono: c.mono}
}

// Wall implements Clock.
func (c *Scaled) Wall(d time.Duration) time.Duration { return time.Duration(float64(d) / c.speed) }

// Fake is a clock that moves only when it is told to. It is safe for
// concurrent use.
type Fake struct {
	mu  sync.Mutex
	now reading.Stamp
}

// NewFake returns a clock standing at utc.
func NewFake(utc time.Time) *Fake { return &Fake{now: reading.Stamp{UTC: utc.UTC()}} }

// Now implements Clock.
func (c *Fake) Now() reading.Stamp {
	c.mu.Lock()
	defer c.mu.Unlock()
	return c.now
}

// Wall implements Clock: on a fake clock nothing waits on the wall.
func (c *Fake) Wall(time.Duration) time.Duration { return 0 }

// Advance moves the clock on by d, which must not be negative.
func (c *Fake) Advance(d time.Duration) {
	if d < 0 {
		panic("clock: bench time cannot run backwards")
	}
	c.mu.Lock()
	c.now.UTC, c.now.Mono = c.now.UTC.Add(d), c.now.Mono+d
	c.mu.Unlock()
}

// Step moves UTC alone by d, as a correction of the system clock does.
func (c *Fake) Step(d time.Duration) {
	c.mu.Lock()
	c.now.UTC = c.now.UTC.Add(d)
	c.mu.Unlock()
}
