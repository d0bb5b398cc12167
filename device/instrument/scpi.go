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
// when the line is opened, and the queries of a poll end with it. Readings
// are believed only when the identity then comes where it should; otherwise
// they are dropped, and the line is read until the identity comes up.
type scpiProtocol struct {
	in       *Instrument
	end      string
	timeout  time.Duration
	queries  []*channel
	identify string
	identity string // as learnt; empty before
	inStep   bool
	owed     int  // answers that may still come although they were given up
	gaveUp   bool // no way back into step in this poll
	mute     int  // times that the instrument did not say who it is

	text liner
	held []reading.Reading
	buf  [1024]byte
}

// muteAfter is how often an instrument may fail to say who it is before it is
// used without a mark: some never heard of *IDN?.
const muteAfter = 2

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

// steps counts the queries and the identity behind them.
func (s *scpiProtocol) steps() int { return len(s.queries) + 1 }

func (s *scpiProtocol) opened() {
	s.text.forget()
	s.inStep, s.gaveUp, s.owed = false, false, 0
	s.identity, s.mute, s.held = "", 0, s.held[:0]
}

func (s *scpiProtocol) drain(_ link.Line, _ Now, dst []reading.Reading) ([]reading.Reading, error) {
	return dst, nil
}

func (s *scpiProtocol) step(i int, line link.Line, now Now, dst []reading.Reading) ([]reading.Reading, error) {
	if i == len(s.queries) {
		return s.finish(line, now, dst)
	}
	if i == 0 {
		s.held, s.gaveUp = s.held[:0], false
	}
	r, err := s.poll(line, now, s.queries[i])
	if err != nil {
		return dst, err
	}
	s.held = append(s.held, r)
	return dst, nil
}

// poll asks one query. Its error says that the line is gone.
func (s *scpiProtocol) poll(line link.Line, now Now, c *channel) (reading.Reading, error) {
	text, err := s.ask(line, c.spec.Query)
	at := now()
	switch {
	case errors.Is(err, errLost):
		return reading.Reading{}, err
	case err != nil:
		return c.fail(at, err.Error()), nil
	}
	number, err := scpi.ParseNumber(text)
	if err != nil {
		s.in.counts.refused.Add(1)
		s.inStep, s.owed = false, 0
		return c.fail(at, fmt.Sprintf("%s was answered with %v", c.spec.Query, err)), nil
	}
	return c.read(number, at), nil
}

// finish gives the readings of a poll out if the line is in step.
func (s *scpiProtocol) finish(line link.Line, _ Now, dst []reading.Reading) ([]reading.Reading, error) {
	err := s.proveStep(line)
	if errors.Is(err, errLost) {
		return dst, err
	}
	if err != nil {
		s.distrust(err.Error())
	}
	dst = append(dst, s.held...)
	s.held = s.held[:0]
	return dst, nil
}

// distrust makes failures of the readings of this poll so far.
func (s *scpiProtocol) distrust(reason string) {
	for i, r := range s.held {
		if r.Status != reading.Failure {
			s.held[i] = s.queries[i].fail(r.Taken, reason)
		}
	}
}

// proveStep asks for the identity where all answers are in, and returns nil
// if it comes.
func (s *scpiProtocol) proveStep(line link.Line) error {
	if s.mute >= muteAfter { // there is no mark
		return nil
	}
	if !s.inStep {
		if s.gaveUp {
			return errors.New("answers cannot be told apart: " + s.identify + " is not answered")
		}
		return s.resync(line)
	}
	text, err := s.exchange(line, s.identify)
	if err == nil && text == s.identity {
		return nil
	}
	s.inStep, s.owed = false, 1
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
			return "", silence{fmt.Sprintf("no answer to %s within %v", s.identify, s.timeout)}
		}
		if err := s.resync(line); err != nil {
			s.gaveUp = true
			return "", err
		}
	}
	text, err := s.exchange(line, query)
	if err != nil {
		s.inStep, s.owed = false, 1
		if s.mute >= muteAfter { // perhaps it is another instrument by now
			s.mute = 0
		}
	}
	return text, err
}

// resync reads until the identity comes up. At first it is not known: it is
// then what two questions in a row are answered with.
func (s *scpiProtocol) resync(line link.Line) error {
	if s.mute >= muteAfter {
		// No mark to look for: what is late has the time of one answer to come.
		return s.wait(line)
	}
	s.in.counts.resynced.Add(1)
	text, err := s.exchange(line, s.identify)
	if err == nil && s.identity == "" {
		if s.identity, err = s.learn(line, text); err != nil {
			return err
		}
	}
	deadline, late := time.Now().Add(s.timeout), 0
	for ; err == nil && text != s.identity; text, err = s.answer(line, deadline) {
		late++
	}
	if late > s.owed { // then answers before were those to other queries
		s.distrust("answers were out of step")
	}
	s.owed = 0
	if errors.Is(err, os.ErrDeadlineExceeded) {
		if s.identity == "" {
			s.mute++
		}
		return silence{fmt.Sprintf("no answer to %s within %v", s.identify, s.timeout)}
	}
	if err != nil {
		return err
	}
	s.inStep, s.mute = true, 0
	return nil
}

// learn returns the identity, given the first answer to the question for it.
func (s *scpiProtocol) learn(line link.Line, first string) (string, error) {
	second, err := s.exchange(line, s.identify)
	if err != nil {
		return "", err
	}
	if _, err := scpi.ParseNumber(second); first != second || err == nil {
		s.mute++
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
	s.in.counts.stray.Add(uint64(stray))
	if err != nil {
		return "", err
	}
	s.text.forget()
	if _, err := line.Write([]byte(query + s.end)); err != nil {
		return "", lost(err)
	}
	s.in.counts.asked.Add(1)
	text, err := s.answer(line, time.Now().Add(s.timeout))
	if s.in.spec.Echo && err == nil && text == query {
		text, err = s.answer(line, time.Now().Add(s.timeout))
	}
	if errors.Is(err, os.ErrDeadlineExceeded) {
		s.in.counts.silent.Add(1)
		return "", silence{fmt.Sprintf("no answer to %s within %v", query, s.timeout)}
	}
	if err == nil {
		s.in.counts.answered.Add(1)
	}
	return text, err
}

func (s *scpiProtocol) answer(line link.Line, deadline time.Time) (string, error) {
	text, err := s.text.await(line, deadline)
	return strings.TrimSpace(string(text)), err
}

func (s *scpiProtocol) write(line link.Line, c *channel, number float64) (float64, error) {
	text := strings.Replace(c.spec.Write, "{value}", string(scpi.AppendNumber(nil, number)), 1)
	s.gaveUp = false
	if err := s.command(line, text); err != nil {
		return 0, err
	}
	answer, err := s.ask(line, c.spec.Query)
	if err == nil {
		err = s.proveStep(line)
	}
	if err != nil {
		return 0, fmt.Errorf("sent, but not read back: %w", err)
	}
	return scpi.ParseNumber(answer)
}

// command sends text that has no answer, and asks the error queue about it.
func (s *scpiProtocol) command(line link.Line, text string) error {
	if _, err := line.Write([]byte(text + s.end)); err != nil {
		return lost(err)
	}
	if s.in.spec.Errors == "" {
		return nil
	}
	return s.readErrors(line)
}

// mostErrors bounds how long a queue is read.
const mostErrors = 32

// readErrors empties the error queue and returns its oldest entry, if any.
func (s *scpiProtocol) readErrors(line link.Line) error {
	var oldest error
	for range mostErrors {
		text, err := s.ask(line, s.in.spec.Errors)
		if err != nil {
			return fmt.Errorf("sent, but the error queue does not answer: %w", err)
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
