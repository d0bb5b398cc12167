package logbook

import (
	"errors"
	"os"

	"golang.org/x/sys/windows"
)

// lockFile takes the lock for this open file; it ends with the process, also
// when that is killed. It lies far behind the text so that others can read it.
func lockFile(f *os.File) error {
	at := windows.Overlapped{OffsetHigh: 1}
	err := windows.LockFileEx(windows.Handle(f.Fd()),
		windows.LOCKFILE_EXCLUSIVE_LOCK|windows.LOCKFILE_FAIL_IMMEDIATELY, 0, 1, 0, &at)
	if errors.Is(err, windows.ERROR_LOCK_VIOLATION) {
		return errLocked
	}
	return err
}

// syncDir does nothing: the file system journals names by itself.
func syncDir(string) error { return nil }

func syncData(f *os.File) error { return f.Sync() }
