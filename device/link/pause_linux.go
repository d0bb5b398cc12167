package link

import (
	"time"

	"golang.org/x/sys/unix"
)

// pause waits for a silent interval. The runtime's timers are coarse (about
// 0.7 ms late here); the kernel's are not, and a bus of many units pays this
// at every message.
func pause(d time.Duration) {
	left := unix.NsecToTimespec(d.Nanoseconds())
	for unix.Nanosleep(&left, &left) == unix.EINTR {
	}
}
