package instrument

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"time"

	"barline/device/lines"
	"barline/device/link"
)

// errTalks says that bytes come without end and without sense.
var errTalks = errors.New("talks without end")

// mostStray bounds how much is thrown away in one go: beyond it the device
// does not pause at all.
const mostStray = 64 << 10

// flush takes what has arrived unasked and returns how many bytes that were.
func flush(line link.Line, buf []byte) (stray int, err error) {
	for stray < mostStray {
		n, err := line.Read(buf, 0)
		stray += n
		if errors.Is(err, os.ErrDeadlineExceeded) {
			return stray, nil
		}
		if err != nil {
			return stray, lost(err)
		}
	}
	return stray, fmt.Errorf("%d bytes unasked: %w", stray, errTalks)
}

// liner cuts what a line sends into lines of text.
type liner struct {
	buf   []byte // from the start of an unfinished line on
	taken int    // bytes of buf that were handed out already
	size  int    // bytes of the last read
}

// forget drops what is left of earlier reads.
func (l *liner) forget() { l.buf, l.taken = l.buf[:0], 0 }

// fill reads once, waiting up to wait.
func (l *liner) fill(line link.Line, wait time.Duration) error {
	l.buf = append(l.buf[:0], l.buf[l.taken:]...)
	l.taken = 0
	if len(l.buf) > lines.MaxLine {
		n := len(l.buf)
		l.forget()
		return fmt.Errorf("%d bytes without an end of line: %w", n, errTalks)
	}
	if cap(l.buf)-len(l.buf) < 4096 {
		l.buf = append(make([]byte, 0, 2*cap(l.buf)+8192), l.buf...)
	}
	n, err := line.Read(l.buf[len(l.buf):cap(l.buf)], wait)
	l.buf = l.buf[:len(l.buf)+n]
	l.size = n
	return lost(err)
}

// next returns the next whole line without its end, or false. Empty lines are
// passed over: they are the second half of CR LF. The line is good until fill.
func (l *liner) next() ([]byte, bool) {
	for {
		rest := l.buf[l.taken:]
		at := bytes.IndexAny(rest, "\r\n")
		if at < 0 {
			return nil, false
		}
		l.taken += at + 1
		if at > 0 {
			return rest[:at], true
		}
	}
}

// await returns the next line that arrives before the deadline.
func (l *liner) await(line link.Line, deadline time.Time) ([]byte, error) {
	for got := 0; ; got += l.size {
		if text, ok := l.next(); ok {
			return text, nil
		}
		if got > 2*lines.MaxLine {
			return nil, fmt.Errorf("%d bytes without an end of line: %w", got, errTalks)
		}
		if err := l.fill(line, time.Until(deadline)); err != nil {
			return nil, err
		}
	}
}

// terminators that the bench file names.
var terminators = map[string]string{"": "\n", "lf": "\n", "crlf": "\r\n", "cr": "\r"}

func terminator(name string) (string, error) {
	end, ok := terminators[name]
	if !ok {
		return "", fmt.Errorf("terminator is %q: expected lf, crlf or cr", name)
	}
	return end, nil
}

func clip(p []byte) []byte {
	const most = 40
	return p[:min(len(p), most)]
}
