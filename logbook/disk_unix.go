//go:build unix

package logbook

import (
	"errors"
	"os"

	"golang.org/x/sys/unix"
)

// lockFile takes the lock for this open file; it ends with the process, also
// when that is killed.
func lockFile(f *os.File) error {
	err := unix.Flock(int(f.Fd()), unix.LOCK_EX|unix.LOCK_NB)
	if errors.Is(err, unix.EWOULDBLOCK) {
		return errLocked
	}
	return err
}

func syncDir(path string) error {
	d, err := os.Open(path)
	if err != nil {
		return err
	}
	defer d.Close()
	return d.Sync()
}
