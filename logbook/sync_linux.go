package logbook

import (
	"os"

	"golang.org/x/sys/unix"
)

// syncData brings content and length to the disk, not the times of the file.
func syncData(f *os.File) error {
	for {
		if err := unix.Fdatasync(int(f.Fd())); err != unix.EINTR {
			return os.NewSyscallError("fdatasync", err)
		}
	}
}
