package logbook

import (
	"context"
	"errors"
	"fmt"
	"runtime/debug"
	"sync"
	"time"

	"barline/model/reading"
)

// Options are the settings of a Book. The zero value is what a bench wants.
type Options struct {
	CommitEvery  time.Duration // longest wait in memory on a sound disk; 200 ms
	SegmentBytes int64         // a segment ends before it grows beyond this; 64 MiB
	MemoryBytes  int           // for records that wait for the disk; 32 MiB
	SyncTimeout  time.Duration // longest wait of Sync and Close; 5 s
	Compress     bool          // compress segments after they are sealed, in the background
	// Panicked is told of a panic of the goroutines behind the book, which
	// then writes no more; nil lets the program end.
	Panicked func(value any, stack []byte)

	untidy bool // leave indexes and compression alone
}

func (o Options) withDefaults() Options {
	if o.CommitEvery <= 0 {
		o.CommitEvery = 200 * time.Millisecond
	}
	if o.SegmentBytes <= 0 {
		o.SegmentBytes = 64 << 20
	}
	if o.MemoryBytes <= 0 {
		o.MemoryBytes = 32 << 20
	}
	if o.SyncTimeout <= 0 {
		o.SyncTimeout = 5 * time.Second
	}
	return o
}

var (
	// ErrFull is wrapped by Append where memory is full because the disk
	// takes nothing. The record is lost, and counted.
	ErrFull = errors.New("logbook: no room")
	// ErrNotDurable is wrapped by Sync and Close where records did not reach
	// the disk. They still wait, unless the Book is closed.
	ErrNotDurable = errors.New("logbook: not on disk")
	// ErrClosed is returned by every method after Close.
	ErrClosed = errors.New("logbook: closed")
)

// Health is how a Book fares.
type Health struct {
	Writing bool   // records reach the disk
	Reason  string // why not
	Written uint64 // records on disk since Open
	Waiting int    // records in memory, not yet on disk
	Lost    uint64 // records that will never be written
}

// Book is a logbook open for appending. Its methods are safe for concurrent
// use. None but Open, Sync, Attach and Close ever waits for the disk.
type Book struct {
	options Options
	disk    disk
	stream  stream

	wake    chan struct{} // commit now
	done    chan struct{} // Close was called
	stopped chan struct{} // the committer has ended
	closing sync.Once
	closed  error // of Close, valid once stopped
}

// Open opens the logbook in the folder dir, which is made where it is missing,
// and locks it against other programs. After a crash the last segment is
// closed behind its last whole record; what stood behind that is set aside.
// It fails with one error that names dir where the folder cannot be written
// or another program writes in it. It waits for the disk.
func Open(dir string, o Options) (*Book, error) {
	d, err := makeFolder(dir)
	if err != nil {
		return nil, err
	}
	return open(d, o)
}

func open(d disk, o Options) (*Book, error) {
	lock, err := d.lock()
	if err != nil {
		if errors.Is(err, errLocked) {
			return nil, fmt.Errorf("logbook %s is written by another program: %w", d, err)
		}
		return nil, fmt.Errorf("logbook %s cannot be written: %w", d, err)
	}
	end, err := recoverEnd(d)
	if err != nil {
		lock.Close()
		return nil, fmt.Errorf("logbook %s cannot be continued: %w", d, err)
	}
	b := &Book{
		options: o.withDefaults(),
		disk:    d,
		wake:    make(chan struct{}, 1),
		done:    make(chan struct{}),
		stopped: make(chan struct{}),
	}
	b.stream.begin(b.options.MemoryBytes, end)
	w := &writer{disk: d, lock: lock, options: b.options, end: end}
	ctx, stopTidying := context.WithCancel(context.Background())
	var tidying sync.WaitGroup
	if !o.untidy {
		sealed := make(chan segmentFile, 16)
		w.sealed = func(s segmentFile) {
			select {
			case sealed <- s:
			default: // the next program will see to it
			}
		}
		tidying.Go(func() { _ = b.guarded(func() { tidy(ctx, d, o.Compress, sealed) }) })
	}
	go func() {
		if err := b.guarded(func() { b.keep(w) }); err != nil {
			b.closed = err
		}
		stopTidying()
		tidying.Wait()
		w.lock.Close() // nothing was written through it
		close(b.stopped)
	}()
	return b, nil
}

// guarded runs f and hands a panic of it to whoever wants to know.
func (b *Book) guarded(f func()) (err error) {
	defer func() {
		v := recover()
		if v == nil {
			return
		}
		if b.options.Panicked == nil {
			panic(v)
		}
		err = fmt.Errorf("%w: the writer broke down: %v", ErrNotDurable, v)
		b.options.Panicked(v, debug.Stack())
	}()
	f()
	return nil
}

// Append adds a record of the given kind and returns its number. It encodes
// data before it returns, so data may change afterwards, and never waits for
// the disk. Data is one JSON object: a reading.Reading (or a pointer to one)
// and an Appender are written without detour, anything else by encoding/json;
// numbers that are not finite become null with a reason.
//
// Where memory is full the record is lost and ErrFull is returned. Readings
// give way first: a part of memory is kept for the other kinds.
func (b *Book) Append(at reading.Stamp, kind string, data any) (seq uint64, err error) {
	if !validKind(kind) {
		return 0, fmt.Errorf("logbook: kind %q, expected 1 to 32 of a-z and underscore", kind)
	}
	if kind == kindSegment || kind == kindSeal || kind == kindLost {
		return 0, fmt.Errorf("logbook: kind %q is written by the logbook itself", kind)
	}
	if err := checkStamp(at); err != nil {
		return 0, err
	}
	seq, err = b.stream.append(at, kind, data)
	if err == nil && urgent(kind) {
		b.commitSoon()
	}
	return seq, err
}

// urgent reports whether a record of this kind starts a commit by itself.
func urgent(kind string) bool {
	switch kind {
	case "intent", "command", "alarm", "note", "start", "stop":
		return true
	}
	return false
}

func (b *Book) commitSoon() {
	select {
	case b.wake <- struct{}{}:
	default:
	}
}

// Sync waits until everything appended so far is on the disk. Call it before
// an instrument hears of anything that moves gas. It returns an error that
// wraps ErrNotDurable as soon as the disk refuses, and after SyncTimeout at
// the latest.
func (b *Book) Sync() error {
	answer, ok := b.stream.await()
	if !ok {
		return nil
	}
	b.commitSoon()
	timeout := time.NewTimer(b.options.SyncTimeout)
	defer timeout.Stop()
	select {
	case err := <-answer:
		return err
	case <-timeout.C:
		return fmt.Errorf("%w: no answer for %v", ErrNotDurable, b.options.SyncTimeout)
	case <-b.stopped:
		select {
		case err := <-answer:
			return err
		default:
			return ErrClosed
		}
	}
}

// Health says how the book fares. It waits for nothing.
func (b *Book) Health() Health { return b.stream.health(time.Now()) }

// Close writes what waits, seals the segment with its SHA-256 and gives up the
// lock. It waits for the disk, for SyncTimeout at most. Its error says how
// many records could not be written.
func (b *Book) Close() error {
	b.closing.Do(func() {
		b.stream.close()
		close(b.done)
	})
	timeout := time.NewTimer(b.options.SyncTimeout)
	defer timeout.Stop()
	select {
	case <-b.stopped:
		return b.closed
	case <-timeout.C:
		return fmt.Errorf("%w: %d records, no answer for %v", ErrNotDurable, b.Health().Waiting, b.options.SyncTimeout)
	}
}

// keep brings records to the disk until the book is closed.
func (b *Book) keep(w *writer) {
	ticker := time.NewTicker(b.options.CommitEvery)
	defer ticker.Stop()
	for {
		select {
		case <-b.wake:
			w.commit(&b.stream, time.Now(), true)
		case <-ticker.C:
			w.commit(&b.stream, time.Now(), false)
		case <-b.done:
			w.commit(&b.stream, time.Now(), true)
			err := w.finish()
			if left := b.stream.health(time.Now()); left.Waiting > 0 {
				err = fmt.Errorf("%w: %d records could not be written: %s", ErrNotDurable, left.Waiting, left.Reason)
			}
			b.closed = err
			return
		}
	}
}
