package link

import (
	"errors"
	"fmt"
	"io"
	"os"
	"time"
)

// file is what os.File and net.TCPConn share: bytes with deadlines, guarded by
// the runtime against use after Close.
type file interface {
	io.ReadWriteCloser
	SetReadDeadline(t time.Time) error
	SetWriteDeadline(t time.Time) error
}

// stream is a Line over files that have deadlines.
type stream struct {
	name     string
	rx, tx   file
	patience time.Duration // how long the line may refuse bytes
	quiet    time.Duration // silence kept before each message sent
	touched  time.Time     // when the last byte passed
	closing  func() error
	why      func() string // more about a line that is gone; may be nil
}

var errEmptyRead = errors.New("read into nothing")

// Read implements Line.
func (s *stream) Read(p []byte, wait time.Duration) (int, error) {
	if len(p) == 0 { // some systems answer this as if the line were gone
		return 0, fmt.Errorf("%s: %w", s.name, errEmptyRead)
	}
	var n int
	var err error
	if wait <= 0 {
		n, err = takeNow(s.rx, p)
	} else {
		if err = s.rx.SetReadDeadline(time.Now().Add(wait)); err == nil {
			n, err = s.rx.Read(p)
		}
	}
	if n > 0 {
		if s.quiet > 0 {
			s.touched = time.Now()
		}
		return n, nil // an error beside bytes comes again at the next read
	}
	if err == nil {
		err = io.EOF
	}
	return 0, s.explain(err)
}

// Write implements Line.
func (s *stream) Write(p []byte) (int, error) {
	if s.quiet > 0 {
		if rest := s.quiet - time.Since(s.touched); rest > 0 {
			pause(rest)
		}
	}
	if err := s.tx.SetWriteDeadline(time.Now().Add(s.patience)); err != nil {
		return 0, s.explain(err)
	}
	n, err := s.tx.Write(p)
	if s.quiet > 0 {
		s.touched = time.Now()
	}
	if errors.Is(err, os.ErrDeadlineExceeded) {
		// Not wrapped: half a message is on its way, so this is no silence
		// after which one may ask again, but a line to open anew.
		return n, fmt.Errorf("%s: takes no bytes for %v", s.name, s.patience)
	}
	if err != nil {
		return n, s.explain(err)
	}
	return n, nil
}

// Close implements Line.
func (s *stream) Close() error { return s.closing() }

func (s *stream) explain(err error) error {
	if errors.Is(err, os.ErrDeadlineExceeded) {
		return os.ErrDeadlineExceeded
	}
	if errors.Is(err, os.ErrClosed) {
		return fmt.Errorf("%s: %w", s.name, os.ErrClosed)
	}
	more := ""
	if s.why != nil {
		more = s.why()
	}
	if errors.Is(err, io.EOF) {
		return fmt.Errorf("%s: the other end is gone%s: %w", s.name, more, io.EOF)
	}
	return fmt.Errorf("%s: %w%s", s.name, err, more)
}
