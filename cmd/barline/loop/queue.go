package loop

import (
	"sync"

	"barline/model/live"
)

// maxReadings bounds the readings that wait for the core: half a second of
// 8 channels at 1 kHz. Beyond it the newest is refused and counted, because
// the older ones explain what happened.
const maxReadings = 4096

// queue carries events from the instruments' goroutines to the loop. Pushing
// never blocks. Readings are bounded; links, answers and intents are rare and
// are never refused.
type queue struct {
	mu       sync.Mutex
	events   []live.Event
	readings int
	dropped  uint64
	ready    chan struct{} // capacity 1: something is waiting
}

func newQueue() *queue { return &queue{ready: make(chan struct{}, 1)} }

func (q *queue) push(e live.Event) {
	q.mu.Lock()
	isReading := false
	switch e.(type) {
	case live.Read, measured:
		isReading = true
	}
	switch {
	case isReading && q.readings >= maxReadings:
		q.dropped++
	case isReading:
		q.readings++
		fallthrough
	default:
		q.events = append(q.events, e)
	}
	q.mu.Unlock()
	select {
	case q.ready <- struct{}{}:
	default:
	}
}

// take moves all waiting events to the caller and leaves into for the next
// ones. It also returns how many readings were refused since the start.
func (q *queue) take(into []live.Event) ([]live.Event, uint64) {
	q.mu.Lock()
	defer q.mu.Unlock()
	taken := q.events
	clear(into)
	q.events, q.readings = into[:0], 0
	return taken, q.dropped
}
