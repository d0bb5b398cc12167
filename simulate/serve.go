package simulate

import (
	"context"
	"errors"
	"time"

	"barline/model/clock"
)

// ErrNoTerminals is returned by Serve where the system has no
// pseudo-terminals. Follow and Lines do the same in memory.
var ErrNoTerminals = errors.New("this system has no pseudo-terminals")

// Serve opens a pseudo-terminal for each instrument and lets it talk there, at
// the pace of the clock and of its baud rate, until ctx ends. The ports are
// paths by the names that the bench file gives the instruments; a pulled cable
// takes its path away until it is plugged in again. Wait returns when all has
// ended.
func (b *Bench) Serve(ctx context.Context, c clock.Clock) (ports map[string]string, err error) {
	b.Follow(c)
	return b.serve(ctx, c)
}

// Wait returns when everything that Serve started has ended.
func (b *Bench) Wait() { b.serving.Wait() }

// Err returns why the bench stands still, or nil while its physics goes on.
func (b *Bench) Err() error {
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.failed
}

// pace is how fast an instrument's line is.
type pace struct {
	baud, bits int           // bits of a character, start and stop included
	think      time.Duration // before it answers
	streams    bool
}

var paces = map[string]pace{
	gaugesLine:       {baud: 19200, bits: 11, think: 4 * time.Millisecond},
	controllerLine:   {baud: 38400, bits: 10, think: 3 * time.Millisecond},
	spectrometerLine: {baud: 115200, bits: 10, streams: true},
}

// lasts is the bench time that characters take on the line.
func (p pace) lasts(characters int) time.Duration {
	return time.Duration(characters*p.bits) * time.Second / time.Duration(p.baud)
}

// look is how often, on the wall, a line looks up when nothing comes.
func (p pace) look(c clock.Clock) time.Duration {
	const seldom = 20 * time.Millisecond
	if !p.streams {
		return seldom
	}
	return min(max(c.Wall(Frame), time.Millisecond), seldom)
}

// exchange gives bytes to the instrument at port p and takes what it says. A
// pulled cable gives ErrUnplugged.
func (b *Bench) exchange(p *port, in []byte, at time.Duration) ([]byte, error) {
	b.mu.Lock()
	defer b.mu.Unlock()
	if err := b.catchUp(); err != nil {
		return nil, err
	}
	if b.faults.unplugged[p.name] {
		return nil, ErrUnplugged
	}
	if len(in) > 0 {
		p.receive(b, in, at)
	}
	out := p.out
	p.out = nil
	return out, nil
}
