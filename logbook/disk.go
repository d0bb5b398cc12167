package logbook

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
)

// disk is the folder of one logbook. Tests stand a failing one in its place.
// Names are relative to the folder, with forward slashes.
type disk interface {
	list() ([]string, error)                // names in the folder, in any order
	create(name string) (file, error)       // fails with fs.ErrExist where it exists
	open(name string) (file, error)         // for reading
	openWritable(name string) (file, error) // existing, for reading and writing
	rename(from, to string) error           // replaces to
	remove(name string) error
	makeDir(name string) error // no error where it exists
	syncDir(name string) error // makes creations and renames in it durable; "" is the folder
	is(name string, f file) bool
	lock() (file, error) // fails with errLocked where another program holds it
	String() string
}

// file is an open file. WriteAt beyond the end extends it.
type file interface {
	io.ReaderAt
	io.WriterAt
	io.Closer
	Sync() error
	Truncate(size int64) error
	Size() (int64, error)
}

const lockName = "lock"

var errLocked = errors.New("held by another program")

// folder is a disk in the operating system's file system.
type folder string

func (d folder) path(name string) string { return filepath.Join(string(d), filepath.FromSlash(name)) }

func (d folder) String() string { return string(d) }

func (d folder) list() ([]string, error) {
	entries, err := os.ReadDir(string(d))
	names := make([]string, len(entries))
	for i, e := range entries {
		names[i] = e.Name()
		if e.IsDir() {
			names[i] += "/"
		}
	}
	return names, err
}

func (d folder) create(name string) (file, error) {
	return d.openFile(name, os.O_RDWR|os.O_CREATE|os.O_EXCL)
}
func (d folder) open(name string) (file, error)         { return d.openFile(name, os.O_RDONLY) }
func (d folder) openWritable(name string) (file, error) { return d.openFile(name, os.O_RDWR) }

func (d folder) openFile(name string, flag int) (file, error) {
	f, err := os.OpenFile(d.path(name), flag, 0o644)
	if err != nil {
		return nil, err
	}
	return osFile{f}, nil
}

func (d folder) rename(from, to string) error { return os.Rename(d.path(from), d.path(to)) }
func (d folder) remove(name string) error     { return os.Remove(d.path(name)) }
func (d folder) syncDir(name string) error    { return syncDir(d.path(name)) }

func (d folder) makeDir(name string) error {
	err := os.Mkdir(d.path(name), 0o755)
	if errors.Is(err, fs.ErrExist) {
		return nil
	}
	return err
}

// is reports whether name still names the open file f: a folder that was
// removed or unmounted under us takes writes without complaint.
func (d folder) is(name string, f file) bool {
	named, err := os.Stat(d.path(name))
	if err != nil {
		return false
	}
	held, err := f.(osFile).Stat()
	return err == nil && os.SameFile(named, held)
}

func (d folder) lock() (file, error) {
	f, err := os.OpenFile(d.path(lockName), os.O_RDWR|os.O_CREATE, 0o644)
	if err != nil {
		return nil, err
	}
	if err := lockFile(f); err != nil {
		holder := make([]byte, 200)
		n, _ := f.ReadAt(holder, 0)
		f.Close()
		if n > 0 {
			return nil, fmt.Errorf("%w (%s)", err, holder[:n])
		}
		return nil, err
	}
	// Who holds it is written for people only, so a failure does no harm.
	if err := f.Truncate(0); err == nil {
		fmt.Fprintf(f, "process %d", os.Getpid())
	}
	return osFile{f}, nil
}

// osFile gives os.File the method that it lacks and a cheaper Sync.
type osFile struct{ *os.File }

func (f osFile) Size() (int64, error) {
	info, err := f.Stat()
	if err != nil {
		return 0, err
	}
	return info.Size(), nil
}

func (f osFile) Sync() error { return syncData(f.File) }
