package simulate

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"

	"golang.org/x/sys/unix"
)

// folder is the folder with the ports of one bench, and the lock that says that
// somebody serves them.
type folder struct {
	dir  string
	lock *os.File
}

const lockName = "lock"

// newFolder makes a folder for ports, and clears away those of benches that
// ended without doing so, which are the ones whose lock nobody holds.
func newFolder() (folder, error) {
	old, _ := filepath.Glob(filepath.Join(os.TempDir(), "heron-*", lockName))
	for _, name := range old {
		clearAbandoned(name)
	}
	dir, err := os.MkdirTemp("", "heron-")
	if err != nil {
		return folder{}, fmt.Errorf("simulated bench: no place for its ports: %w", err)
	}
	// Locked before it has its name, so that nobody takes it for abandoned.
	unnamed := filepath.Join(dir, lockName+".new")
	f, err := os.OpenFile(unnamed, os.O_CREATE|os.O_EXCL|os.O_RDWR, 0o600)
	if err == nil {
		err = control(f, func(fd int) error { return unix.Flock(fd, unix.LOCK_EX|unix.LOCK_NB) })
		err = errors.Join(err, os.Rename(unnamed, filepath.Join(dir, lockName)))
	}
	if err != nil {
		if f != nil {
			err = errors.Join(err, f.Close())
		}
		return folder{}, errors.Join(fmt.Errorf("simulated bench: %w", err), os.RemoveAll(dir))
	}
	return folder{dir, f}, nil
}

// leave removes the folder.
func (f folder) leave() error {
	return errors.Join(os.RemoveAll(f.dir), f.lock.Close())
}

// clearAbandoned removes the folder of a lock that nobody holds.
func clearAbandoned(lock string) {
	f, err := os.OpenFile(lock, os.O_RDWR, 0)
	if err != nil {
		return // another user's, or gone
	}
	defer f.Close()
	if control(f, func(fd int) error { return unix.Flock(fd, unix.LOCK_EX|unix.LOCK_NB) }) == nil {
		_ = os.RemoveAll(filepath.Dir(lock))
	}
}
