package logbook

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"maps"
	"math/rand/v2"
	"strings"
	"sync"
	"syscall"
)

// memDisk is a disk in memory that remembers what was synced. It can be cut
// off at any operation, and then loses of the rest what a real one may lose:
// any of the writes since the last sync, a part of one, names that were
// created or changed since the folder was synced.
type memDisk struct {
	mu      sync.Mutex
	names   map[string]*memInode
	durable map[string]*memInode // names as of the last syncDir

	ops    int
	cutAt  int                   // operation that the power fails in; 0 is never
	fault  func(op string) error // asked before each operation; may be nil
	random *rand.Rand
	gone   bool // the folder vanished
}

type memInode struct {
	data   []byte
	synced []byte
	since  []memWrite // changes since synced
}

// memWrite is a write, or a truncation where data is nil.
type memWrite struct {
	at   int64
	data []byte
}

var errCut = errors.New("power failed")

func newMemDisk(r *rand.Rand) *memDisk {
	return &memDisk{names: map[string]*memInode{}, durable: map[string]*memInode{}, random: r}
}

func (d *memDisk) String() string { return "memory" }

// step counts an operation and says whether it fails. partial tells that the
// power fails in the middle of it.
func (d *memDisk) step(op string) (partial bool, err error) {
	if d.cutAt > 0 && d.ops >= d.cutAt {
		return false, errCut
	}
	d.ops++
	if d.cutAt > 0 && d.ops >= d.cutAt {
		return true, errCut
	}
	if d.gone && op != "write" && op != "sync" {
		return false, fs.ErrNotExist
	}
	if d.fault != nil {
		return false, d.fault(op)
	}
	return false, nil
}

func (d *memDisk) list() ([]string, error) {
	d.mu.Lock()
	defer d.mu.Unlock()
	if _, err := d.step("list"); err != nil {
		return nil, err
	}
	var names []string
	for n := range d.names {
		if !strings.Contains(n, "/") {
			names = append(names, n)
		}
	}
	return names, nil
}

func (d *memDisk) create(name string) (file, error) {
	d.mu.Lock()
	defer d.mu.Unlock()
	if _, err := d.step("create"); err != nil {
		return nil, err
	}
	if d.names[name] != nil {
		return nil, fs.ErrExist
	}
	d.names[name] = &memInode{}
	return &memFile{d, d.names[name]}, nil
}

func (d *memDisk) open(name string) (file, error) {
	d.mu.Lock()
	defer d.mu.Unlock()
	if _, err := d.step("open"); err != nil {
		return nil, err
	}
	if d.names[name] == nil {
		return nil, fs.ErrNotExist
	}
	return &memFile{d, d.names[name]}, nil
}

func (d *memDisk) openWritable(name string) (file, error) { return d.open(name) }

func (d *memDisk) rename(from, to string) error {
	d.mu.Lock()
	defer d.mu.Unlock()
	if _, err := d.step("rename"); err != nil {
		return err
	}
	if d.names[from] == nil {
		return fs.ErrNotExist
	}
	d.names[to] = d.names[from]
	delete(d.names, from)
	return nil
}

func (d *memDisk) remove(name string) error {
	d.mu.Lock()
	defer d.mu.Unlock()
	if _, err := d.step("remove"); err != nil {
		return err
	}
	if d.names[name] == nil {
		return fs.ErrNotExist
	}
	delete(d.names, name)
	return nil
}

func (d *memDisk) makeDir(string) error { return nil }

func (d *memDisk) syncDir(string) error {
	d.mu.Lock()
	defer d.mu.Unlock()
	if _, err := d.step("syncdir"); err != nil {
		return err
	}
	d.durable = maps.Clone(d.names)
	return nil
}

func (d *memDisk) is(name string, f file) bool {
	d.mu.Lock()
	defer d.mu.Unlock()
	return !d.gone && d.names[name] == f.(*memFile).inode
}

func (d *memDisk) lock() (file, error) {
	d.mu.Lock()
	defer d.mu.Unlock()
	if _, err := d.step("lock"); err != nil {
		return nil, err
	}
	if d.names[lockName] == nil {
		d.names[lockName] = &memInode{}
	}
	return &memFile{d, d.names[lockName]}, nil
}

// crash returns the disk as it is found after the power came back.
func (d *memDisk) crash() *memDisk {
	d.mu.Lock()
	defer d.mu.Unlock()
	after := newMemDisk(d.random)
	seen := map[*memInode]*memInode{}
	keep := func(name string, i *memInode) {
		if seen[i] == nil {
			data := i.survivor(d.random)
			seen[i] = &memInode{data: data, synced: append([]byte(nil), data...)}
		}
		after.names[name] = seen[i]
	}
	for name, i := range d.durable {
		// A change of name that was not synced may have reached the disk.
		if d.names[name] == i || d.random.IntN(2) == 0 {
			keep(name, i)
		}
	}
	for name, i := range d.names {
		if d.durable[name] != i && d.random.IntN(2) == 0 {
			keep(name, i)
		}
	}
	for _, i := range d.durable { // an inode never vanishes altogether
		if seen[i] == nil {
			for name, named := range d.names {
				if named == i {
					keep(name, i)
				}
			}
		}
	}
	delete(after.names, lockName)
	after.durable = maps.Clone(after.names)
	return after
}

// survivor draws what of the unsynced writes reached the disk.
func (i *memInode) survivor(r *rand.Rand) []byte {
	data := append([]byte(nil), i.synced...)
	since := i.since
	reorder := r.IntN(4) == 0
	if !reorder && len(since) > 0 { // a prefix, its last write torn
		since = since[:r.IntN(len(since)+1)]
	}
	for n, w := range since {
		if reorder && r.IntN(2) == 0 {
			continue
		}
		if w.data == nil {
			data = resize(data, w.at)
			continue
		}
		part := w.data
		if n == len(since)-1 && r.IntN(2) == 0 {
			part = part[:r.IntN(len(part)+1)]
		}
		data = resize(data, max(int64(len(data)), w.at+int64(len(part))))
		copy(data[w.at:], part)
	}
	return data
}

func resize(b []byte, size int64) []byte {
	if int64(len(b)) >= size {
		return b[:size]
	}
	return append(b, make([]byte, size-int64(len(b)))...)
}

type memFile struct {
	d     *memDisk
	inode *memInode
}

func (f *memFile) ReadAt(p []byte, at int64) (int, error) {
	f.d.mu.Lock()
	defer f.d.mu.Unlock()
	if at >= int64(len(f.inode.data)) {
		return 0, io.EOF
	}
	n := copy(p, f.inode.data[at:])
	if n < len(p) {
		return n, io.EOF
	}
	return n, nil
}

func (f *memFile) WriteAt(p []byte, at int64) (int, error) {
	f.d.mu.Lock()
	defer f.d.mu.Unlock()
	partial, err := f.d.step("write")
	n := len(p)
	if err != nil {
		if n = 0; partial || errors.Is(err, syscall.ENOSPC) {
			n = f.d.random.IntN(len(p) + 1)
		}
	}
	if n > 0 {
		i := f.inode
		i.data = resize(i.data, max(int64(len(i.data)), at+int64(n)))
		copy(i.data[at:], p[:n])
		i.since = append(i.since, memWrite{at, append([]byte(nil), p[:n]...)})
	}
	return n, err
}

// Sync that fails leaves the unsynced writes readable and never to be synced,
// as some operating systems do.
func (f *memFile) Sync() error {
	f.d.mu.Lock()
	defer f.d.mu.Unlock()
	partial, err := f.d.step("sync")
	i := f.inode
	switch {
	case err == nil:
		i.synced, i.since = append([]byte(nil), i.data...), nil
	case partial && f.d.random.IntN(2) == 0:
		i.synced, i.since = append([]byte(nil), i.data...), nil
	case !errors.Is(err, errCut):
		i.since = nil
	}
	return err
}

func (f *memFile) Truncate(size int64) error {
	f.d.mu.Lock()
	defer f.d.mu.Unlock()
	if _, err := f.d.step("truncate"); err != nil {
		return err
	}
	f.inode.data = resize(f.inode.data, size)
	f.inode.since = append(f.inode.since, memWrite{at: size})
	return nil
}

func (f *memFile) Size() (int64, error) {
	f.d.mu.Lock()
	defer f.d.mu.Unlock()
	return int64(len(f.inode.data)), nil
}

func (f *memFile) Close() error { return nil }

// dump shows the disk in a failure.
func (d *memDisk) dump() string {
	d.mu.Lock()
	defer d.mu.Unlock()
	var b strings.Builder
	for n, i := range d.names {
		fmt.Fprintf(&b, "--- %s, %d bytes\n%s\n", n, len(i.data), i.data)
	}
	return b.String()
}
