package link

import (
	"fmt"
	"io"
	"os"
	"sync"
	"sync/atomic"
	"time"
)

// pump is a Line over a port that knows no deadlines: a goroutine reads, and
// each write has a watchdog. It is used where the system gives nothing better.
type pump struct {
	name     string
	port     io.ReadWriteCloser
	patience time.Duration
	quiet    time.Duration
	touched  time.Time

	in   chan []byte // closed when the port is gone
	rest []byte
	gone error // why; read after in is closed

	closed  atomic.Bool
	writing sync.Mutex // held while bytes are handed to the port
	once    sync.Once
	done    chan struct{} // the reader has ended
}

const pumpDepth = 64 // blocks that wait; then the reader waits too

func newPump(name string, port io.ReadWriteCloser, patience, quiet time.Duration) *pump {
	p := &pump{name: name, port: port, patience: patience, quiet: quiet,
		in: make(chan []byte, pumpDepth), done: make(chan struct{})}
	go p.read()
	return p
}

func (p *pump) read() {
	defer close(p.done)
	defer close(p.in)
	buf := make([]byte, 4096)
	for !p.closed.Load() {
		n, err := p.port.Read(buf)
		if n > 0 {
			p.in <- append([]byte(nil), buf[:n]...)
		}
		if err != nil { // none and no bytes is how some ports report a timeout
			p.gone = err
			return
		}
	}
	p.gone = os.ErrClosed
}

// Read implements Line.
func (p *pump) Read(dst []byte, wait time.Duration) (int, error) {
	if len(dst) == 0 {
		return 0, fmt.Errorf("%s: %w", p.name, errEmptyRead)
	}
	if len(p.rest) == 0 {
		var err error
		if p.rest, err = p.next(wait); err != nil {
			return 0, err
		}
	}
	n := copy(dst, p.rest)
	p.rest = p.rest[n:]
	return n, nil
}

func (p *pump) next(wait time.Duration) ([]byte, error) {
	timer := time.NewTimer(max(wait, 0))
	defer timer.Stop()
	select {
	case block, ok := <-p.in:
		if !ok {
			return nil, fmt.Errorf("%s: %w", p.name, p.gone)
		}
		p.touched = time.Now()
		return block, nil
	default:
	}
	select {
	case block, ok := <-p.in:
		if !ok {
			return nil, fmt.Errorf("%s: %w", p.name, p.gone)
		}
		p.touched = time.Now()
		return block, nil
	case <-timer.C:
		return nil, os.ErrDeadlineExceeded
	}
}

// Write implements Line. Where the port swallows nothing for the patience of
// the line, the writer stays behind until the port lets go of it, and the line
// takes no further bytes.
func (p *pump) Write(msg []byte) (int, error) {
	if rest := p.quiet - time.Since(p.touched); p.quiet > 0 && rest > 0 {
		pause(rest)
	}
	type result struct {
		n   int
		err error
	}
	out := make(chan result, 1)
	own := append([]byte(nil), msg...)
	go func() {
		p.writing.Lock()
		defer p.writing.Unlock()
		if p.closed.Load() { // a closed port's number may be another file's by now
			out <- result{0, os.ErrClosed}
			return
		}
		n, err := p.port.Write(own)
		out <- result{n, err}
	}()
	timer := time.NewTimer(p.patience)
	defer timer.Stop()
	select {
	case r := <-out:
		p.touched = time.Now()
		if r.err != nil {
			return r.n, fmt.Errorf("%s: %w", p.name, r.err)
		}
		return r.n, nil
	case <-timer.C:
		p.closed.Store(true)
		return 0, fmt.Errorf("%s: takes no bytes for %v", p.name, p.patience)
	}
}

// Close implements Line. It waits for a write that is under way, unless that
// is stuck.
func (p *pump) Close() (err error) {
	p.once.Do(func() {
		p.closed.Store(true)
		for give := time.Now().Add(p.patience); !p.writing.TryLock(); pause(time.Millisecond) {
			if time.Now().After(give) {
				err = p.port.Close()
				return
			}
		}
		err = p.port.Close()
		p.writing.Unlock()
		for range p.in { // lets a reader go that waits for room
		}
		<-p.done
	})
	return err
}
