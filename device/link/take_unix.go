//go:build unix

package link

import (
	"io"
	"os"
	"syscall"
	"time"
)

// takeNow reads what has already arrived. A read deadline of now would not do:
// the runtime answers it without looking.
func takeNow(f file, p []byte) (n int, err error) {
	conn, ok := f.(syscall.Conn)
	if !ok {
		return 0, os.ErrInvalid
	}
	raw, err := conn.SyscallConn()
	if err != nil {
		return 0, err
	}
	if err := f.SetReadDeadline(time.Time{}); err != nil {
		return 0, err
	}
	var readErr error
	err = raw.Read(func(fd uintptr) bool {
		for {
			n, readErr = syscall.Read(int(fd), p)
			if readErr != syscall.EINTR {
				return true // done, whatever came: do not wait
			}
		}
	})
	switch {
	case err != nil:
		return 0, err
	case readErr == syscall.EAGAIN:
		return 0, os.ErrDeadlineExceeded
	case readErr != nil:
		return 0, readErr
	case n == 0:
		return 0, io.EOF
	}
	return n, nil
}
