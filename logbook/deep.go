package logbook

import (
	"encoding/json"
	"errors"
	"fmt"
)

// checker parses records to the last byte.
type checker struct{}

// line reports what is wrong with a record whose envelope is sound.
func (c *checker) line(l line) error {
	if _, err := parseStamp(l.t); err != nil {
		return fmt.Errorf("t %q is no time: %w", l.t, err)
	}
	if !json.Valid(l.data) {
		return errors.New("its data is not JSON")
	}
	return nil
}

func (r *Report) verifySpectra(disk) {}
