package instrument

import (
	"errors"
	"sync"

	"barline/model/limit"
)

// ErrSuperseded answers a command that waited when HOLD came.
var ErrSuperseded = errors.New("not sent: HOLD came first")

// errQueueFull answers a command that found no room.
var errQueueFull = errors.New("not sent: the instrument is slower than the commands")

// command is one thing to send.
type command struct {
	number   uint64
	setpoint limit.Setpoint
	order    limit.Order
	kind     kind
}

type kind uint8

const (
	setKind kind = iota
	holdKind
	moveKind
)

// queue holds commands that wait for the line: a HOLD before all else, and a
// few others. When those are too many the newest is refused, so that
// nothing is sent out of order.
type queue struct {
	mu    sync.Mutex
	first []command
	rest  []command
	bell  chan struct{} // rung when something was added
}

const queueLength = 8

func (q *queue) add(c command) error {
	q.mu.Lock()
	defer q.mu.Unlock()
	if len(q.rest) >= queueLength {
		return errQueueFull
	}
	q.rest = append(q.rest, c)
	q.ring()
	return nil
}

// hold puts c first and returns the commands that it drops. It is never
// refused; of several that wait the newest counts, and the others are dropped
// as well.
func (q *queue) hold(c command) []command {
	q.mu.Lock()
	defer q.mu.Unlock()
	dropped := append(q.first, q.rest...)
	q.first, q.rest = []command{c}, nil
	q.ring()
	return dropped
}

func (q *queue) next() (command, bool) {
	q.mu.Lock()
	defer q.mu.Unlock()
	from := &q.first
	if len(*from) == 0 {
		from = &q.rest
	}
	if len(*from) == 0 {
		return command{}, false
	}
	c := (*from)[0]
	*from = (*from)[1:]
	return c, true
}

func (q *queue) ring() {
	select {
	case q.bell <- struct{}{}:
	default:
	}
}
