//go:build !unix

package link

import "time"

// takeNow reads what has already arrived, or within a millisecond: without
// file descriptors there is no way to look without waiting.
func takeNow(f file, p []byte) (int, error) {
	if err := f.SetReadDeadline(time.Now().Add(time.Millisecond)); err != nil {
		return 0, err
	}
	return f.Read(p)
}
