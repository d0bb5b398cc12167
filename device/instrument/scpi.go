package instrument

import (
	"errors"
	"fmt"
	"os"
	"strings"
	"time"

	"barline/device/link"
	"barline/device/scpi"
	"barline/model/reading"
)

// scpiProtocol asks an instrument that answers in lines without a name.
//
// Nothing in an answer says which query it belongs to, so one late or doubled
// answer would shift all that follow. The identity is the mark: it is learnt
// when the line is opened, and asked for behind every query. An answer is
// believed only when the identity then comes where it should, which on a line
// that keeps the order of bytes proves that nothing is still under way. After
// anything else the line is read until the identity comes up.
type scpiProtocol struct {
	in       *Instrument
	end      string
	timeout  time.Duration
	queries  []*channel
	identify string
	identity string // as learnt; empty before
	inStep   bool
	gaveUp   bool // no way back into step in this poll
	told     bool // a command was sent over this line

	text liner
	buf  [1024]byte
}

// noMark in the bench file says that the instrument cannot tell who it is. It
// is then asked without a mark, and the guarantee is gone.
const noMark = "none"

func newSCPI(in *Instrument) (*scpiProtocol, error) {
	s := &scpiProtocol{in: in, identify: in.spec.Identify, timeout: in.spec.Timeout.Duration()}
	var err error
	if s.end, err = terminator(in.spec.Terminator); err != nil {
		return nil, err
	}
	if s.identify == "" {
		s.identify = "*IDN?"
	}
	for i := range in.channels {
		c := &in.channels[i]
		if c.spec.Query == "" && c.spec.Write == "" {
			return nil, fmt.Errorf("channel %q: has neither query nor write", c.spec.Name)
		}
		if c.spec.Write != "" && !strings.Contains(c.spec.Write, "{value}") {
			return nil, fmt.Errorf("channel %q: write is %q: expected {value} where the number goes", c.spec.Name, c.spec.Write)
		}
		if c.spec.Query != "" {
			s.queries = append(s.queries, c)
		}
	}
	return s, nil
}

func (s *scpiProtocol) steps() int { return len(s.queries) }

func (s *scpiProtocol) opened() {
	s.text.forget()
	s.inStep, s.gaveUp, s.told, s.identity = false, false, false, ""
}

func (s *scpiProtocol) drain(_ link.Line, _ Now, dst []reading.Reading) ([]reading.Reading, error) {
	return dst, nil
}

func (s *scpiProtocol) step(i int, line link.Line, now Now, dst []reading.Reading) ([]reading.Reading, error) {
	if i == 0 {
		s.gaveUp = false
	}
	c := s.queries[i]
	number, at, err := s.query(line, now, c)
	switch {
	case errors.Is(err, errLost):
		return dst, err
	case err != nil:
		return append(dst, c.fail(at, err.Error())), nil
	}
	return append(dst, c.read(number, at)), nil
}

// query returns the number that a channel's query is answered with, proven to
// be the answer to it.
func (s *scpiProtocol) query(line link.Line, now Now, c *channel) (number float64, at reading.Stamp, err error) {
	text, err := s.ask(line, c.spec.Query)
	at = now()
	if err != nil {
		return 0, at, err
	}
	number, err = scpi.ParseNumber(text)
	if err != nil {
		s.in.counts.refused.Add(1)
		s.inStep = false
		return 0, at, fmt.Errorf("%s was answered with %w", c.spec.Query, err)
	}
	return number, at, s.prove(line)
}

// marked reports whether there is a mark to tell answers apart by.
func (s *scpiProtocol) marked() bool { return s.identify != noMark }

// prove asks for the identity, and returns nil if that is what comes: the
// answer before it was then the right one.
func (s *scpiProtocol) prove(line link.Line) error {
	if !s.marked() {
		return nil
	}
	text, err := s.exchange(line, s.identify)
	if err == nil && text == s.identity {
		return nil
	}
	s.inStep = false
	if err != nil {
		return err
	}
	s.in.counts.refused.Add(1)
	return fmt.Errorf("answers are out of step: %s was answered with %q", s.identify, clip([]byte(text)))
}

// ask puts the line in step if it is not, and sends one query.
func (s *scpiProtocol) ask(line link.Line, query string) (string, error) {
	if !s.inStep {
		if s.gaveUp {
			return "", s.noIdentity()
		}
		if err := s.resync(line); err != nil {
			s.gaveUp = true
			return "", err
		}
	}
	text, err := s.exchange(line, query)
	if err != nil {
		s.inStep = false
	}
	return text, err
}

// cleanRounds is how often in a row the identity must be what the question
// for it is answered with. Once would not do: it may be the second copy of an
// earlier answer, with a late answer to a query still behind it.
const (
	cleanRounds = 2
	mostRounds  = 8
)

// resync puts the line in step. At first the identity is not known; it is then
// what two questions in a row are answered with.
func (s *scpiProtocol) resync(line link.Line) error {
	if !s.marked() {
		// No mark to look for: what is late has the time of one answer to come.
		return s.wait(line)
	}
	s.in.counts.resynced.Add(1)
	first := s.identity == ""
	err := s.findStep(line)
	if errors.Is(err, os.ErrDeadlineExceeded) {
		return s.noIdentity()
	}
	if err != nil {
		return err
	}
	_, err = flush(line, s.buf[:]) // second copies that have come
	s.text.forget()
	s.inStep = err == nil
	if first && s.inStep && !s.told {
		// Errors from before the line was opened are not those of a command
		// to come.
		if err := s.confirm(line); errors.Is(err, errLost) {
			return err
		}
		if !s.inStep {
			return silence{s.in.spec.Errors + " is not answered"}
		}
	}
	return err
}

func (s *scpiProtocol) noIdentity() error {
	text := fmt.Sprintf("no answer to %s within %v", s.identify, s.timeout)
	if s.identity == "" {
		text += "; where the instrument has none, write identify = \"none\""
	}
	return silence{text}
}

func (s *scpiProtocol) findStep(line link.Line) error {
	clean := 0
	for range mostRounds {
		text, err := s.exchange(line, s.identify)
		if err != nil {
			return err
		}
		if s.identity == "" {
			if s.identity, err = s.learn(line, text); err != nil {
				return err
			}
			text = s.identity
		}
		if clean++; text != s.identity {
			clean = 0
		}
		for deadline := time.Now().Add(s.timeout); text != s.identity; {
			if text, err = s.answer(line, deadline); err != nil {
				return err
			}
		}
		if clean == cleanRounds {
			return nil
		}
	}
	return fmt.Errorf("answers to %s do not come one by one", s.identify)
}

// learn returns the identity, given the first answer to the question for it.
func (s *scpiProtocol) learn(line link.Line, first string) (string, error) {
	second, err := s.exchange(line, s.identify)
	if err != nil {
		return "", err
	}
	if _, err := scpi.ParseNumber(second); first != second || err == nil {
		return "", fmt.Errorf("%s was answered with %q and then with %q: expected the same name twice", s.identify, clip([]byte(first)), clip([]byte(second)))
	}
	return second, nil
}

// wait lets late answers come and drops them.
func (s *scpiProtocol) wait(line link.Line) error {
	deadline := time.Now().Add(s.timeout)
	for {
		n, err := line.Read(s.buf[:], time.Until(deadline))
		s.in.counts.stray.Add(uint64(n))
		if errors.Is(err, os.ErrDeadlineExceeded) {
			s.inStep = true
			return nil
		}
		if err != nil {
			return lost(err)
		}
	}
}

// exchange sends one query and returns the next line.
func (s *scpiProtocol) exchange(line link.Line, query string) (string, error) {
	stray, err := flush(line, s.buf[:])
	stray += len(s.text.buf) - s.text.taken
	s.in.counts.stray.Add(uint64(stray))
	if err != nil {
		return "", err
	}
	if stray > 0 && s.inStep { // perhaps the true answer to the query before
		return "", fmt.Errorf("%d bytes came that nobody had asked for", stray)
	}
	s.text.forget()
	if _, err := line.Write([]byte(query + s.end)); err != nil {
		return "", lost(err)
	}
	s.in.counts.asked.Add(1)
	sent := time.Now()
	text, err := s.answer(line, sent.Add(s.timeout))
	if s.in.spec.Echo && err == nil && text == query {
		text, err = s.answer(line, time.Now().Add(s.timeout))
	}
	if errors.Is(err, os.ErrDeadlineExceeded) {
		s.in.counts.silent.Add(1)
		return "", silence{fmt.Sprintf("no answer to %s within %v", query, s.timeout)}
	}
	if err == nil {
		s.in.counts.answered.Add(1)
		s.in.counts.took(time.Since(sent))
	}
	return text, err
}

func (s *scpiProtocol) answer(line link.Line, deadline time.Time) (string, error) {
	text, err := s.text.await(line, deadline)
	return strings.TrimSpace(string(text)), err
}

func (s *scpiProtocol) write(line link.Line, c *channel, number float64) error {
	return s.command(line, strings.Replace(c.spec.Write, "{value}", string(scpi.AppendNumber(nil, number)), 1))
}

func (s *scpiProtocol) back(line link.Line, c *channel) (float64, error) {
	s.gaveUp = false
	number, _, err := s.query(line, noStamp, c)
	return number, err
}

// command sends text that has no answer.
func (s *scpiProtocol) command(line link.Line, text string) error {
	s.told = true
	if _, err := line.Write([]byte(text + s.end)); err != nil {
		return lost(err)
	}
	if s.in.spec.Echo {
		if back, err := s.answer(line, time.Now().Add(s.timeout)); errors.Is(err, errLost) {
			return err
		} else if err != nil || back != text {
			s.inStep = false
		}
	}
	return nil
}

// mostErrors bounds how long a queue is read.
const mostErrors = 32

// confirm empties the error queue and returns its oldest entry, if any.
func (s *scpiProtocol) confirm(line link.Line) error {
	if s.in.spec.Errors == "" {
		return nil
	}
	var oldest error
	for range mostErrors {
		text, err := s.ask(line, s.in.spec.Errors)
		if err != nil {
			return fmt.Errorf("the error queue does not answer: %w", err)
		}
		entry, err := scpi.ParseError(text)
		switch {
		case err != nil:
			s.inStep = false
			return err
		case entry.Code == 0:
			return oldest
		case oldest == nil:
			oldest = entry
		}
	}
	return oldest
}

func (s *scpiProtocol) idle(line link.Line) error {
	stray, err := flush(line, s.buf[:])
	s.in.counts.stray.Add(uint64(stray))
	return err
}
