package link

import "time"

// Line is an open line. One goroutine at a time uses it; Close may come from
// any.
type Line interface {
	// Read waits up to wait for the first byte and returns what is there.
	// It never returns 0, nil: a line that stays silent gives an error that
	// wraps os.ErrDeadlineExceeded, and one that is gone any other error.
	// A wait of zero takes what has already arrived.
	Read(p []byte, wait time.Duration) (n int, err error)
	// Write sends all of p or returns an error.
	Write(p []byte) (n int, err error)
	Close() error
}
