package instrument

import (
	"errors"
	"fmt"
	"os"
	"time"

	"barline/device/lines"
	"barline/device/link"
	"barline/model/reading"
)

// linesProtocol listens to an instrument that talks, by itself or when asked.
type linesProtocol struct {
	in       *Instrument
	pattern  *lines.Pattern
	checksum lines.Checksum
	ask      string // empty where it streams
	end      string
	timeout  time.Duration
	channels []*channel
	fields   []int   // of each channel, its place among the values; wholeSpectrum
	pixels   *pixels // lays out the list of the pattern; nil where none is used
	finds    bool    // a channel is found in the list

	tell   func(*reading.Spectrum) // nil: nobody asks
	counts []float64               // of the newest spectrum
	fresh  bool                    // and it was not told yet

	text   liner
	values []float64
	last   reading.Stamp // when the block before ended
	joined bool          // the first line after opening may be the end of one
	buf    [1024]byte
}

func newLines(in *Instrument) (*linesProtocol, error) {
	p := &linesProtocol{in: in, ask: in.spec.Ask, timeout: in.spec.Timeout.Duration()}
	var err error
	if p.end, err = terminator(in.spec.Terminator); err != nil {
		return nil, err
	}
	if p.pattern, err = lines.Compile(in.spec.Pattern); err != nil {
		return nil, err
	}
	if p.checksum, err = lines.ParseChecksum(in.spec.Checksum); err != nil {
		return nil, err
	}
	if in.spec.Streams && p.ask != "" {
		return nil, errors.New("streams and is asked as well: expected one of the two")
	}
	for i := range in.channels {
		c := &in.channels[i]
		at, ok := p.pattern.Field(c.spec.Field)
		if c.spec.Field != "" && c.spec.Field == p.pattern.List() {
			if at, err = wholeSpectrum, p.useList(c); err != nil {
				return nil, err
			}
		} else if !ok {
			return nil, fmt.Errorf("channel %q: field is %q: expected one of %q", c.spec.Name, c.spec.Field, p.pattern.Names())
		}
		p.channels, p.fields = append(p.channels, c), append(p.fields, at)
	}
	if p.pixels == nil && p.pattern.List() != "" && len(in.spec.Calibration) > 0 {
		if p.pixels, err = newPixels(in.spec); err != nil {
			return nil, err
		}
	}
	return p, nil
}

// wholeSpectrum stands for a channel that is found in the list of the pattern.
const wholeSpectrum = -1

func (p *linesProtocol) useList(c *channel) (err error) {
	switch c.spec.Role {
	case reading.Emission, reading.EmissionWidth, reading.EmissionStrength:
	default:
		return fmt.Errorf("channel %q: {%s...} is a whole spectrum: expected the role emission, emission-width or emission-strength", c.spec.Name, c.spec.Field)
	}
	if p.finds = true; p.pixels == nil {
		p.pixels, err = newPixels(p.in.spec)
	}
	return err
}

// take appends the readings of the line that was parsed last.
func (p *linesProtocol) take(dst []reading.Reading, at reading.Stamp) []reading.Reading {
	var f found
	if p.pixels != nil {
		counts := p.values[len(p.pattern.Names()):]
		if p.finds {
			f = p.pixels.find(counts)
		}
		p.keep(counts)
	}
	for i, c := range p.channels {
		if p.fields[i] == wholeSpectrum {
			dst = append(dst, p.pixels.read(c, f, at))
			continue
		}
		dst = append(dst, c.read(p.values[p.fields[i]], at))
	}
	return dst
}

func (p *linesProtocol) steps() int {
	if p.ask == "" {
		return 0
	}
	return 1
}

func (p *linesProtocol) opened() {
	p.text.forget()
	p.last, p.joined = reading.Stamp{}, false
}

// drainWait is how long a stream may be quiet in one Drain, wall time.
const drainWait = 100 * time.Millisecond

// drain reads what has come and stamps its lines. A block of lines that came
// since the block before is spread evenly over the time between the two; a
// single line, or one after a pause, carries the time of its last byte.
func (p *linesProtocol) drain(line link.Line, now Now, dst []reading.Reading) ([]reading.Reading, error) {
	err := p.text.fill(line, drainWait)
	at := now()
	switch {
	case errors.Is(err, os.ErrDeadlineExceeded):
		return dst, nil
	case errors.Is(err, errTalks):
		p.in.counts.refused.Add(1)
		return failure(dst, p.channels, at, err.Error()), nil
	case err != nil:
		return dst, err
	}
	start := len(dst)
	var refused error
	whole := 0
	for {
		text, ok := p.text.next()
		if !ok {
			break
		}
		whole++
		if err := p.parse(text); err != nil {
			if !p.joined { // most likely we came in the middle of it
				p.joined = true
				whole--
				continue
			}
			p.in.counts.refused.Add(1)
			refused = err
			continue
		}
		p.joined = true
		p.in.counts.answered.Add(1)
		first := len(dst)
		dst = p.take(dst, at)
		for i := range dst[first:] {
			dst[first+i].Taken.Mono = time.Duration(whole) // its place, until the number of lines is known
		}
	}
	if whole == 0 {
		return dst, nil
	}
	p.pass(at)
	p.spread(dst[start:], whole, at)
	if len(dst) == start && refused != nil {
		dst = failure(dst, p.channels, at, refused.Error())
	}
	p.last = at
	return dst, nil
}

// longestSpread is the longest time over which a block is spread: after a
// longer one the lines more likely came at its end.
const longestSpread = 200 * time.Millisecond

func (p *linesProtocol) spread(block []reading.Reading, whole int, at reading.Stamp) {
	since := at.Mono - p.last.Mono
	if p.last.UTC.IsZero() || since > longestSpread || since < 0 {
		since = 0
	}
	for i := range block {
		place := block[i].Taken.Mono
		back := since - since*place/time.Duration(whole)
		block[i].Taken = reading.Stamp{UTC: at.UTC.Add(-back), Mono: at.Mono - back}
	}
}

func (p *linesProtocol) parse(text []byte) error {
	body, err := p.checksum.Open(text)
	if err != nil {
		return err
	}
	p.values, err = p.pattern.Parse(p.values[:0], body)
	return err
}

func (p *linesProtocol) step(_ int, line link.Line, now Now, dst []reading.Reading) ([]reading.Reading, error) {
	refused, err := p.askOnce(line)
	at := now()
	switch {
	case errors.Is(err, errLost):
		return dst, err
	case err != nil && refused != nil:
		return failure(dst, p.channels, at, refused.Error()), nil
	case errors.Is(err, os.ErrDeadlineExceeded):
		return failure(dst, p.channels, at, fmt.Sprintf("no line within %v", p.timeout)), nil
	case err != nil:
		return failure(dst, p.channels, at, err.Error()), nil
	}
	dst = p.take(dst, at)
	p.pass(at)
	return dst, nil
}

// askOnce asks for a line and reads until one fits. Refused is why the last
// line that did not fit was refused.
func (p *linesProtocol) askOnce(line link.Line) (refused, err error) {
	stray, err := flush(line, p.buf[:])
	p.in.counts.stray.Add(uint64(stray))
	if err != nil {
		return nil, err
	}
	p.text.forget()
	if _, err := line.Write([]byte(p.ask + p.end)); err != nil {
		return nil, lost(err)
	}
	p.in.counts.asked.Add(1)
	sent := time.Now()
	deadline := sent.Add(p.timeout)
	for {
		text, err := p.text.await(line, deadline)
		if err != nil {
			if errors.Is(err, os.ErrDeadlineExceeded) {
				p.in.counts.silent.Add(1)
			}
			return refused, err
		}
		if p.in.spec.Echo && string(text) == p.ask {
			continue
		}
		if refused = p.parse(text); refused == nil {
			p.in.counts.answered.Add(1)
			p.in.counts.took(time.Since(sent))
			return nil, nil
		}
		p.in.counts.refused.Add(1)
	}
}

var errTakesNothing = errors.New("instruments that talk in lines take no values")

func (p *linesProtocol) write(link.Line, *channel, float64) error { return errTakesNothing }

func (p *linesProtocol) back(link.Line, *channel) (float64, error) { return 0, errTakesNothing }

func (p *linesProtocol) confirm(link.Line) error { return nil }

func (p *linesProtocol) command(line link.Line, text string) error {
	_, err := line.Write([]byte(text + p.end))
	return lost(err)
}

func (p *linesProtocol) idle(line link.Line) error {
	stray, err := flush(line, p.buf[:])
	p.in.counts.stray.Add(uint64(stray))
	return err
}
