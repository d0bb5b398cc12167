//go:build !linux

package link

import "time"

// pause waits for a silent interval.
func pause(d time.Duration) { time.Sleep(d) }
