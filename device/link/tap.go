package link

import (
	"errors"
	"fmt"
	"os"
	"sync"
	"time"
)

// Bounds of a traffic file: at trafficSize it becomes name.1, name.1 becomes
// name.2, and so on; the oldest goes.
const (
	trafficSize = 8 << 20
	trafficKept = 4
)

// tap is a Line that keeps every byte in a file, one line a read or write:
//
//	2026-12-01T11:42:05.123456Z < 01 04 04 41 C8 00 00 6F F1
//
// where < came in and > went out. A disk that does not take it is no reason
// to stop measuring: the tap then says so in the file's next line, if ever.
type tap struct {
	Line
	name string
	size int64 // at which the file is moved aside

	mu      sync.Mutex
	file    *os.File
	written int64
	missed  int
	buf     []byte
}

func openTap(line Line, name string) (*tap, error) {
	t := &tap{Line: line, name: name, size: trafficSize}
	if err := t.open(); err != nil {
		return nil, fmt.Errorf("traffic file: %w", err)
	}
	return t, nil
}

func (t *tap) open() error {
	f, err := os.OpenFile(t.name, os.O_CREATE|os.O_APPEND|os.O_WRONLY, 0o644)
	if err != nil {
		return err
	}
	info, err := f.Stat()
	if err != nil {
		return errors.Join(err, f.Close())
	}
	t.file, t.written = f, info.Size()
	return nil
}

// Read implements Line.
func (t *tap) Read(p []byte, wait time.Duration) (int, error) {
	n, err := t.Line.Read(p, wait)
	if n > 0 {
		t.keep('<', p[:n])
	}
	return n, err
}

// Write implements Line.
func (t *tap) Write(p []byte) (int, error) {
	n, err := t.Line.Write(p)
	if n > 0 {
		t.keep('>', p[:n])
	}
	return n, err
}

// Close implements Line.
func (t *tap) Close() error {
	err := t.Line.Close()
	t.mu.Lock()
	defer t.mu.Unlock()
	if t.file != nil {
		err = errors.Join(err, t.file.Close())
		t.file = nil
	}
	return err
}

const hexDigits = "0123456789ABCDEF"

func (t *tap) keep(direction byte, p []byte) {
	t.mu.Lock()
	defer t.mu.Unlock()
	if t.file == nil {
		return
	}
	b := time.Now().UTC().AppendFormat(t.buf[:0], "2006-01-02T15:04:05.000000Z07:00")
	if t.missed > 0 {
		b = fmt.Appendf(b, " (%d entries before this one were not kept)", t.missed)
	}
	b = append(b, ' ', direction)
	for _, c := range p {
		b = append(b, ' ', hexDigits[c>>4], hexDigits[c&0xF])
	}
	b = append(b, '\n')
	t.buf = b
	n, err := t.file.Write(b)
	t.written += int64(n)
	if err != nil {
		t.missed++
		return
	}
	t.missed = 0
	if t.written >= t.size {
		t.rotate()
	}
}

// rotate moves the files up by one. Where that fails the file grows on.
func (t *tap) rotate() {
	old := t.file
	for i := trafficKept - 1; i >= 1; i-- {
		_ = os.Rename(fmt.Sprintf("%s.%d", t.name, i), fmt.Sprintf("%s.%d", t.name, i+1)) // most often there is none yet
	}
	if os.Rename(t.name, t.name+".1") != nil {
		t.written = 0
		return
	}
	if t.open() != nil {
		t.file, t.written = old, 0
		return
	}
	_ = old.Close() // its bytes were handed over one by one
}
