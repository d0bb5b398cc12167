package simulate

import (
	"errors"
	"fmt"
	"os"
	"sync/atomic"
	"time"

	"barline/model/clock"
)

// ErrUnplugged is what a line gives while its cable is pulled.
var ErrUnplugged = errors.New("cable pulled")

// Line is the driver's end of a line in memory. What a request asks for can be
// read as soon as it has been written. Write and Read are for one goroutine at
// a time; Close may come from any.
type Line struct {
	bench *Bench
	port  *port
	shut  atomic.Bool
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
	b.waits = c.Wall(time.Second) > 0
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

// Read takes what the instrument has said. It waits up to wait on the wall for
// the first byte if the bench follows a clock that runs by itself, else not at
// all. Silence is an error that wraps os.ErrDeadlineExceeded.
func (l *Line) Read(into []byte, wait time.Duration) (int, error) {
	const look = 2 * time.Millisecond
	if len(into) == 0 {
		return 0, fmt.Errorf("line %s: read into no bytes", l.port.name)
	}
	for end := time.Now().Add(wait); ; {
		n, waits, err := l.take(into)
		if n > 0 || err != nil {
			return n, err
		}
		left := time.Until(end)
		if left <= 0 || !waits {
			return 0, fmt.Errorf("line %s says nothing: %w", l.port.name, os.ErrDeadlineExceeded)
		}
		<-time.After(min(look, left))
	}
}

func (l *Line) take(into []byte) (n int, waits bool, err error) {
	l.bench.mu.Lock()
	defer l.bench.mu.Unlock()
	if err := l.ready(); err != nil {
		return 0, false, err
	}
	n = copy(into, l.port.out)
	l.port.out = l.port.out[n:]
	return n, l.bench.waits, nil
}

func (l *Line) ready() error {
	if l.shut.Load() {
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

// Close ends the use of the line. The instrument goes on; Lines gives a new
// one.
func (l *Line) Close() error {
	l.shut.Store(true)
	return nil
}
