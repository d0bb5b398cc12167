package logbook

import (
	"encoding/json"
	"errors"
	"fmt"
)

// checker parses records to the last byte.
type checker struct {
	day [len("2026-12-01T")]byte // of the last sound t
}

// line reports what is wrong with a record whose envelope is sound.
func (c *checker) line(l line) error {
	if !c.sameDay(l.t) {
		if _, err := parseStamp(l.t); err != nil {
			return fmt.Errorf("t %q is no time: %w", l.t, err)
		}
		copy(c.day[:], l.t)
	}
	if !json.Valid(l.data) {
		return errors.New("its data is not JSON")
	}
	return nil
}

// sameDay reports whether t is a time of the day that was seen last; that is
// quicker to find than whether it is a time at all.
func (c *checker) sameDay(t []byte) bool {
	if string(t[:len(c.day)]) != string(c.day[:]) {
		return false
	}
	two := func(i int) (n byte) {
		tens, ones := t[i]-'0', t[i+1]-'0'
		if tens > 9 || ones > 9 {
			return 100
		}
		return tens*10 + ones
	}
	return two(11) < 24 && two(14) < 60 && two(17) < 60 && two(20) < 100 && two(22) < 100 && two(24) < 100
}

func (r *Report) verifySpectra(disk) {}
