package instrument

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"time"

	"barline/device/link"
	"barline/device/modbus"
	"barline/model/reading"
)

// rtuWire frames by what a reply must look like and not by silence: neither
// the system nor a converter keeps the gaps between bytes.
type rtuWire struct {
	timeout time.Duration
	perByte time.Duration
	echo    bool
	counts  *counters
	frame   []byte
	buf     []byte
	scratch [256]byte
}

func (w *rtuWire) numbered() bool { return false }

func (w *rtuWire) opened() {}

func (w *rtuWire) idle(line link.Line) error {
	stray, err := flush(line, w.scratch[:])
	w.counts.stray.Add(uint64(stray))
	return err
}

// mostReply bounds what is read while waiting for one reply.
const mostReply = 4096

func (w *rtuWire) exchange(line link.Line, now Now, r modbus.Request) (modbus.Reply, reading.Stamp, error) {
	fail := func(err error) (modbus.Reply, reading.Stamp, error) {
		return modbus.Reply{}, reading.Stamp{}, fmt.Errorf("unit %d: %w", r.Unit, err)
	}
	stray, err := flush(line, w.scratch[:])
	w.counts.stray.Add(uint64(stray))
	if err != nil {
		return fail(err)
	}
	if w.frame, err = modbus.AppendRequestRTU(w.frame[:0], r); err != nil {
		return fail(err)
	}
	if _, err := line.Write(w.frame); err != nil {
		return fail(lost(err))
	}
	w.counts.asked.Add(1)
	sent := time.Now()
	wait := w.timeout + w.perByte*time.Duration(len(w.frame)+5+2*r.Count)
	deadline := sent.Add(wait)
	w.buf = w.buf[:0]
	var seen error // the best explanation of what came instead
	for {
		n, err := line.Read(w.scratch[:], time.Until(deadline))
		if errors.Is(err, os.ErrDeadlineExceeded) {
			w.counts.silent.Add(1)
			return fail(w.explain(seen, wait))
		}
		if err != nil {
			return fail(lost(err))
		}
		w.buf = append(w.buf, w.scratch[:n]...)
		reply, used, err := find(w.buf, w.frame, r, w.echo)
		if used > 0 {
			at := now()
			w.counts.stray.Add(uint64(len(w.buf) - used))
			if err != nil {
				w.counts.refused.Add(1)
				return fail(err)
			}
			w.counts.answered.Add(1)
			w.counts.took(time.Since(sent))
			return reply, at, nil
		}
		if err != nil {
			seen = err
		}
		if len(w.buf) > mostReply {
			w.counts.refused.Add(1)
			return fail(fmt.Errorf("%d bytes that are no reply: %w", len(w.buf), errTalks))
		}
	}
}

// explain says why there was no reply. It wraps os.ErrDeadlineExceeded.
func (w *rtuWire) explain(seen error, wait time.Duration) error {
	switch {
	case seen != nil:
		w.counts.refused.Add(1)
		return silence{fmt.Sprintf("no reply within %v, but a %v", wait.Round(time.Millisecond), seen)}
	case len(w.buf) > 0:
		w.counts.refused.Add(1)
		return silence{fmt.Sprintf("no reply within %v, but %d bytes that are none (% X)", wait.Round(time.Millisecond), len(w.buf), clip(w.buf))}
	}
	return silence{fmt.Sprintf("no reply within %v", wait.Round(time.Millisecond))}
}

// silence is an error that wraps os.ErrDeadlineExceeded without its text.
type silence struct{ text string }

func (s silence) Error() string { return s.text }
func (s silence) Unwrap() error { return os.ErrDeadlineExceeded }

// find looks for the reply to r in what has arrived. Used is how many bytes
// were consumed when it was found, else 0; err is then why something that
// looks like a reply is none, and otherwise the unit's exception.
//
// Garbage before the reply is passed over: a frame begins where a whole one
// with the right CRC, unit, function and length lies.
func find(buf, sent []byte, r modbus.Request, echo bool) (reply modbus.Reply, used int, err error) {
	start := 0
	if echo {
		// The reply to a single write equals its request, so our own bytes
		// must be known as such before anything else is looked at.
		at := bytes.Index(buf, sent)
		if at < 0 {
			return reply, 0, nil
		}
		start = at + len(sent)
	}
	for at := start; at < len(buf); at++ {
		size := modbus.ReplySizeRTU(buf[at:])
		if size <= 0 || at+size > len(buf) {
			continue
		}
		candidate, frameErr := modbus.DecodeReplyRTU(buf[at : at+size])
		if frameErr != nil {
			continue
		}
		answer := candidate.Answers(r)
		if errors.Is(answer, modbus.ErrMismatch) {
			err = answer
			at += size - 1
			continue
		}
		return candidate, at + size, answer
	}
	return reply, 0, err
}

// tcpWire numbers its requests, so that a late or doubled reply is known.
type tcpWire struct {
	timeout time.Duration
	counts  *counters
	number  uint16
	frame   []byte
	buf     []byte
	scratch [512]byte
}

func (w *tcpWire) numbered() bool { return true }

func (w *tcpWire) opened() { w.buf = w.buf[:0] }

func (w *tcpWire) exchange(line link.Line, now Now, r modbus.Request) (modbus.Reply, reading.Stamp, error) {
	fail := func(err error) (modbus.Reply, reading.Stamp, error) {
		return modbus.Reply{}, reading.Stamp{}, fmt.Errorf("unit %d: %w", r.Unit, err)
	}
	w.number++
	var err error
	if w.frame, err = modbus.AppendRequestTCP(w.frame[:0], w.number, r); err != nil {
		return fail(err)
	}
	if _, err := line.Write(w.frame); err != nil {
		return fail(lost(err))
	}
	w.counts.asked.Add(1)
	sent := time.Now()
	deadline := sent.Add(w.timeout)
	for {
		reply, found, err := w.take(w.number)
		if err != nil && !found {
			return fail(err)
		}
		if found {
			at := now()
			if err == nil {
				err = reply.Answers(r)
			}
			if err != nil {
				w.counts.refused.Add(1)
				return fail(err)
			}
			w.counts.answered.Add(1)
			w.counts.took(time.Since(sent))
			return reply, at, nil
		}
		n, err := line.Read(w.scratch[:], time.Until(deadline))
		if errors.Is(err, os.ErrDeadlineExceeded) {
			w.counts.silent.Add(1)
			return fail(silence{fmt.Sprintf("no reply within %v", w.timeout)})
		}
		if err != nil {
			return fail(lost(err))
		}
		w.buf = append(w.buf, w.scratch[:n]...)
	}
}

// take looks for the reply with this number among the whole frames that have
// come, and drops those before it. Where it is found, err says what is wrong
// with it; else err says that the line is lost.
func (w *tcpWire) take(number uint16) (reply modbus.Reply, found bool, err error) {
	for size := modbus.SizeTCP(w.buf); size != 0 && size <= len(w.buf); size = modbus.SizeTCP(w.buf) {
		if size < 0 { // nothing marks the start of the next frame
			w.counts.refused.Add(1)
			return reply, false, lost(fmt.Errorf("bytes that are no modbus over TCP (% X)", clip(w.buf)))
		}
		got, reply, err := modbus.DecodeReplyTCP(w.buf[:size])
		w.buf = append(w.buf[:0], w.buf[size:]...)
		if got == number {
			return reply, true, err
		}
		w.counts.stray.Add(uint64(size))
	}
	return reply, false, nil
}

// idle keeps the start of a frame whose rest is still to come.
func (w *tcpWire) idle(line link.Line) error {
	for range mostStray / len(w.scratch) {
		n, err := line.Read(w.scratch[:], 0)
		if errors.Is(err, os.ErrDeadlineExceeded) {
			return nil
		}
		if err != nil {
			return lost(err)
		}
		w.buf = append(w.buf, w.scratch[:n]...)
		if _, _, err := w.take(w.number + 1); err != nil { // which has not been asked yet
			return err
		}
	}
	return errTalks
}
