package logbook

import (
	"errors"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"syscall"
	"testing"
	"testing/synctest"
	"time"

	"barline/model/reading"
)

// breaker is a fault that can be switched.
type breaker struct {
	mu  sync.Mutex
	err error
	ops map[string]bool
}

func (b *breaker) set(err error, ops ...string) {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.err, b.ops = err, map[string]bool{}
	for _, op := range ops {
		b.ops[op] = true
	}
}

func (b *breaker) fault(op string) error {
	b.mu.Lock()
	defer b.mu.Unlock()
	if b.ops[op] {
		return b.err
	}
	return nil
}

// TestDiskTroubleAndBack lets the disk fail in several ways for ten seconds at
// a hundred records a second, in memory for about two hundred of them.
func TestDiskTroubleAndBack(t *testing.T) {
	for _, c := range []struct {
		name, reason string
		fail, mend   func(*memDisk, *breaker)
	}{
		{"full", "no space left", func(_ *memDisk, b *breaker) { b.set(syscall.ENOSPC, "write", "create") }, nil},
		{"read-only", "read-only file system", func(_ *memDisk, b *breaker) { b.set(syscall.EROFS, "write", "create", "sync") }, nil},
		{"failing sync", "input/output error", func(_ *memDisk, b *breaker) { b.set(syscall.EIO, "sync") }, nil},
		{"vanished", "is gone", func(d *memDisk, _ *breaker) { d.vanish(true) }, func(d *memDisk, _ *breaker) { d.vanish(false) }},
	} {
		t.Run(c.name, func(t *testing.T) {
			synctest.Test(t, func(t *testing.T) {
				d := newMemDisk(rand.New(rand.NewPCG(1, 1)))
				var faulty breaker
				d.fault = faulty.fault
				const memory = 40_000
				b, err := open(d, Options{MemoryBytes: memory})
				if err != nil {
					t.Fatal(err)
				}
				start := time.Now()
				at := func() reading.Stamp { return stampAt(time.Since(start)) }
				taken, refused := 0, 0
				run := func(seconds int) {
					for range seconds * 100 {
						_, err := b.Append(at(), "reading", reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Value: 9e5, Status: reading.Good})
						switch {
						case err == nil:
							taken++
						case errors.Is(err, ErrFull):
							refused++
						default:
							t.Fatal(err)
						}
						<-time.After(10 * time.Millisecond)
					}
				}
				run(2)
				if h := b.Health(); !h.Writing || h.Written == 0 || h.Waiting > 25 {
					t.Errorf("before: %+v", h)
				}
				c.fail(d, &faulty)
				run(1)
				if h := b.Health(); h.Writing || !strings.Contains(h.Reason, c.reason) {
					t.Errorf("a second into it: %+v, expected a reason with %q", h, c.reason)
				}
				if err := b.Sync(); !errors.Is(err, ErrNotDurable) {
					t.Errorf("sync: %v", err)
				}
				run(9)
				if _, err := b.Append(at(), "note", map[string]string{"text": "disk!"}); err != nil {
					t.Errorf("no room was kept for a note: %v", err)
				}
				h := b.Health()
				if h.Lost != uint64(refused) || refused == 0 || b.stream.bytes > memory+500 {
					t.Errorf("in the end: %+v, %d refused, %d bytes wait", h, refused, b.stream.bytes)
				}
				if faulty.set(nil); c.mend != nil {
					c.mend(d, &faulty)
				}
				<-time.After(1500 * time.Millisecond)
				if h := b.Health(); !h.Writing || h.Reason != "" {
					t.Errorf("mended: %+v", h)
				}
				run(2)
				if err := b.Sync(); err != nil {
					t.Errorf("sync: %v", err)
				}
				if err := b.Close(); err != nil {
					t.Error(err)
				}
				all, damage := readAll(t, d)
				if len(damage) > 0 {
					t.Error(damage)
				}
				var lost struct{ Records, Readings int }
				counts := map[string]int{}
				for _, r := range all {
					if counts[r.Kind]++; r.Kind == kindLost {
						if err := r.Decode(&lost); err != nil {
							t.Error(err)
						}
					}
				}
				if counts["reading"] != taken || counts["note"] != 1 || counts[kindLost] != 1 || lost.Records != refused || lost.Readings != refused {
					t.Errorf("%v written, %d readings taken, %d refused; lost record %+v", counts, taken, refused, lost)
				}
				if r, err := verify(d, true); err != nil || !r.OnlyTorn() {
					t.Error(r.Damage, err)
				}
			})
		})
	}
}

func (d *memDisk) vanish(gone bool) {
	d.mu.Lock()
	defer d.mu.Unlock()
	d.gone = gone
}

// TestSlowDisk holds a sync back: nobody but Sync waits, and Health says so.
func TestSlowDisk(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		d := newMemDisk(rand.New(rand.NewPCG(1, 1)))
		b, err := open(&slowDiskDouble{memDisk: d, wait: 4 * time.Second}, Options{})
		if err != nil {
			t.Fatal(err)
		}
		before := time.Now()
		for range 100 {
			if _, err := b.Append(stampAt(0), "note", struct{}{}); err != nil {
				t.Fatal(err)
			}
		}
		if time.Since(before) != 0 {
			t.Error("append waited")
		}
		<-time.After(3 * time.Second)
		if h := b.Health(); h.Writing || !strings.Contains(h.Reason, "not answered") || h.Waiting != 100 {
			t.Errorf("%+v", h)
		}
		if err := b.Sync(); !errors.Is(err, ErrNotDurable) {
			t.Errorf("sync that takes longer than its time: %v", err)
		}
		<-time.After(20 * time.Second)
		if h := b.Health(); !h.Writing || h.Written != 100 {
			t.Errorf("%+v", h)
		}
		b.Close()
		<-time.After(time.Minute)
	})
}

type slowDiskDouble struct {
	*memDisk
	wait time.Duration
}

func (d *slowDiskDouble) create(name string) (file, error) {
	f, err := d.memDisk.create(name)
	if err != nil {
		return nil, err
	}
	return slowFile{f.(*memFile), d.wait}, nil
}

func (d *slowDiskDouble) is(name string, f file) bool {
	if s, ok := f.(slowFile); ok {
		f = s.memFile
	}
	return d.memDisk.is(name, f)
}

type slowFile struct {
	*memFile
	wait time.Duration
}

func (f slowFile) Sync() error {
	<-time.After(f.wait)
	return f.memFile.Sync()
}

// TestFolderTakenAway removes and restores a real folder while it is written.
func TestFolderTakenAway(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "book")
	b, err := Open(dir, Options{})
	if err != nil {
		t.Fatal(err)
	}
	note := func(text string) {
		t.Helper()
		if _, err := b.Append(stampAt(0), "note", map[string]string{"text": text}); err != nil {
			t.Fatal(err)
		}
	}
	note("before")
	if err := b.Sync(); err != nil {
		t.Fatal(err)
	}
	away := dir + "-away"
	if err := os.Rename(dir, away); err != nil {
		t.Fatal(err)
	}
	note("while away")
	if err := b.Sync(); !errors.Is(err, ErrNotDurable) || !strings.Contains(err.Error(), "gone") {
		t.Errorf("folder away: %v", err)
	}
	if err := os.Rename(away, dir); err != nil {
		t.Fatal(err)
	}
	note("back")
	if err := b.Sync(); err != nil {
		t.Errorf("folder back: %v", err)
	}
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
	if r := sound(t, dir); r.Records != 3 {
		t.Errorf("%d records, expected 3", r.Records)
	}
}

// TestSecondProgramInAnotherFolder lets the folder be replaced by one that
// another program writes: this one must not write there.
func TestSecondProgramInAnotherFolder(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "book")
	b, err := Open(dir, Options{})
	if err != nil {
		t.Fatal(err)
	}
	b.Append(stampAt(0), "note", struct{}{})
	if err := b.Sync(); err != nil {
		t.Fatal(err)
	}
	if err := os.Rename(dir, dir+"-away"); err != nil {
		t.Fatal(err)
	}
	other, err := Open(dir, Options{})
	if err != nil {
		t.Fatal(err)
	}
	b.Append(stampAt(0), "note", struct{}{})
	if err := b.Sync(); err == nil {
		t.Error("wrote into a folder that another program holds")
	}
	if err := other.Close(); err != nil {
		t.Error(err)
	}
	if err := b.Close(); err != nil {
		t.Log(err)
	}
}

// A panic behind the book is told, and neither Sync nor Close waits for ever.
func TestWriterThatBreaksDownSaysSo(t *testing.T) {
	d := newMemDisk(nil)
	told := make(chan any, 1)
	b, err := open(d, Options{SyncTimeout: time.Second, untidy: true, Panicked: func(v any, _ []byte) { told <- v }})
	if err != nil {
		t.Fatal(err)
	}
	d.mu.Lock()
	d.fault = func(string) error { panic("out of order") }
	d.mu.Unlock()
	if _, err := b.Append(reading.Stamp{UTC: time.Unix(1, 0).UTC()}, "note", map[string]string{"text": "x"}); err != nil {
		t.Fatal(err)
	}
	if err := b.Sync(); err == nil {
		t.Error("Sync says that all is on the disk")
	}
	select {
	case v := <-told:
		if v != "out of order" {
			t.Errorf("told %v", v)
		}
	case <-time.After(10 * time.Second):
		t.Fatal("nobody was told")
	}
	if err := b.Close(); !errors.Is(err, ErrNotDurable) {
		t.Errorf("Close gives %v, expected %v", err, ErrNotDurable)
	}
}
