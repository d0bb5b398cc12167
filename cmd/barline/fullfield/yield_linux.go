package fullfield

import (
	"runtime"

	"golang.org/x/sys/unix"
)

// niceness is that of the worker's thread: the instruments and the screen, and
// other programs, come first.
const niceness = 10

// yieldToOthers lowers the priority of the calling goroutine's thread, which
// it keeps to itself. The returned function gives the thread up.
func yieldToOthers() (end func()) {
	runtime.LockOSThread()
	// Refused, it is as fast as before. A thread that was lowered cannot be
	// raised again and must not serve others: it ends with its goroutine.
	if unix.Setpriority(unix.PRIO_PROCESS, unix.Gettid(), niceness) != nil {
		return runtime.UnlockOSThread
	}
	return func() {}
}
