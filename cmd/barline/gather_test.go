package main

import (
	"errors"
	"fmt"
	"strings"
	"testing"

	"barline/device/instrument"
	"barline/model/reading"
)

type heard struct {
	instrument.Sink
	said []string
}

func (h *heard) Answer(command uint64, err error, _ reading.Stamp) {
	h.said = append(h.said, fmt.Sprint(command, " ", err))
}

func TestOneAnswerOfSeveralInstruments(t *testing.T) {
	h := &heard{}
	g := newGather(h)
	g.expect(1, 3)
	g.Answer(1, nil, reading.Stamp{})
	g.Answer(2, nil, reading.Stamp{}) // of one instrument alone
	g.Answer(1, errors.New("the vent valve sticks"), reading.Stamp{})
	if got := strings.Join(h.said, "; "); got != "2 <nil>" {
		t.Errorf("before all have answered: %s", got)
	}
	g.Answer(1, nil, reading.Stamp{})
	g.Answer(1, nil, reading.Stamp{}) // the number is done with
	if got := strings.Join(h.said, "; "); got != "2 <nil>; 1 the vent valve sticks; 1 <nil>" {
		t.Errorf("said: %s", got)
	}
}
