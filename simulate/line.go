package simulate

import (
	"errors"
	"fmt"
	"os"
	"time"

	"barline/model/clock"
)

// ErrUnplugged is what a line gives while its cable is pulled.
var ErrUnplugged = errors.New("cable pulled")

// Line is the driver's end of a line in memory. What a request asks for can be
// read as soon as it has been written.
type Line struct {
	bench *Bench
	port  *port
	shut  bool
	wait  time.Duration
}

// Lines returns the lines of all instruments, by the names that the bench file
// gives them. Bench time moves by Advance, or by a clock after Follow.
func (b *Bench) Lines() map[string]*Line {
	lines := map[string]*Line{}
	for name, p := range b.ports {
		lines[name] = &Line{bench: b, port: p}
	}
	return lines
}

// Follow ties the bench to a clock: each use of a line first advances the
// bench to the clock's time, counted from now.
func (b *Bench) Follow(c clock.Clock) {
	b.mu.Lock()
	defer b.mu.Unlock()
	start := c.Now().Mono - b.asked
	b.clock = func() time.Duration { return c.Now().Mono - start }
}

// catchUp advances to the clock that the bench follows. The bench is locked.
func (b *Bench) catchUp() error {
	if b.clock == nil {
		return b.failed
	}
	return b.advance(b.clock())
}

// Write gives a request to the instrument.
func (l *Line) Write(bytes []byte) (int, error) {
	l.bench.mu.Lock()
	defer l.bench.mu.Unlock()
	if err := l.ready(); err != nil {
		return 0, err
	}
	l.port.receive(l.bench, bytes, l.bench.asked)
	return len(bytes), nil
}

// Read takes what the instrument has said. Where it has said nothing within
// the line's timeout, the error is a timeout: errors.Is(err,
// os.ErrDeadlineExceeded).
func (l *Line) Read(into []byte) (int, error) {
	const look = 2 * time.Millisecond
	for end := time.Now().Add(l.wait); ; {
		n, err := l.take(into)
		if n > 0 || err != nil || len(into) == 0 {
			return n, err
		}
		left := time.Until(end)
		if left <= 0 {
			return 0, fmt.Errorf("line %s: %w", l.port.name, os.ErrDeadlineExceeded)
		}
		<-time.After(min(look, left))
	}
}

func (l *Line) take(into []byte) (int, error) {
	l.bench.mu.Lock()
	defer l.bench.mu.Unlock()
	if err := l.ready(); err != nil {
		return 0, err
	}
	n := copy(into, l.port.out)
	l.port.out = l.port.out[n:]
	return n, nil
}

func (l *Line) ready() error {
	if l.shut {
		return fmt.Errorf("line %s: %w", l.port.name, os.ErrClosed)
	}
	if err := l.bench.catchUp(); err != nil {
		return err
	}
	if l.bench.faults.unplugged[l.port.name] {
		return fmt.Errorf("line %s: %w", l.port.name, ErrUnplugged)
	}
	return nil
}

// SetReadTimeout sets how long Read waits on the wall for an instrument that
// talks by itself; 0, as at first, is not at all.
func (l *Line) SetReadTimeout(d time.Duration) error {
	l.bench.mu.Lock()
	defer l.bench.mu.Unlock()
	l.wait = max(d, 0)
	return nil
}

// Close ends the use of the line. The instrument goes on; Lines gives a new
// one.
func (l *Line) Close() error {
	l.bench.mu.Lock()
	defer l.bench.mu.Unlock()
	l.shut = true
	return nil
}
