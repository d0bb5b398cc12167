//go:build linux || darwin || freebsd || openbsd

package link

import (
	"errors"
	"fmt"
	"os"
	"syscall"
	"time"

	"go.bug.st/serial"
)

// openSerial opens a port. The serial library sets the port up and holds it;
// bytes go through a file of our own on the same device, because the runtime
// gives files what the library lacks: deadlines, also for writes, and no write
// through a number that has become another file's.
func openSerial(name string, s setting, patience, quiet time.Duration) (Line, error) {
	// The first to open must be us: afterwards the library shuts the door.
	f, err := os.OpenFile(name, os.O_RDWR|syscall.O_NOCTTY|syscall.O_NONBLOCK, 0)
	if err != nil {
		return nil, explainPort(name, err)
	}
	if err := lock(f); err != nil {
		return nil, explainPort(name, errors.Join(err, f.Close()))
	}
	port, err := serial.Open(name, &s.mode)
	if err != nil {
		return nil, explainPort(name, errors.Join(err, f.Close()))
	}
	// What came in before is older than the first question.
	if err := port.ResetInputBuffer(); err != nil {
		return nil, explainPort(name, errors.Join(err, port.Close(), f.Close()))
	}
	return &stream{
		name: "port " + name, rx: f, tx: f, patience: patience, quiet: quiet,
		closing: func() error {
			err := f.Close()
			if errors.Is(err, os.ErrClosed) {
				return nil
			}
			return errors.Join(err, port.Close())
		},
	}, nil
}

// lock keeps a second program out that runs as root, for whom the exclusive
// mode of a terminal means nothing.
func lock(f *os.File) error {
	raw, err := f.SyscallConn()
	if err != nil {
		return err
	}
	var lockErr error
	if err := raw.Control(func(fd uintptr) {
		lockErr = syscall.Flock(int(fd), syscall.LOCK_EX|syscall.LOCK_NB)
	}); err != nil {
		return err
	}
	if errors.Is(lockErr, syscall.EWOULDBLOCK) {
		return fmt.Errorf("%w: %w", errLocked, lockErr)
	}
	return lockErr
}
