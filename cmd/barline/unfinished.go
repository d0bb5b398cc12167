package main

import (
	"fmt"
	"time"

	"barline/logbook"
	"barline/model/live"
	"barline/model/reading"
)

// unfinishedWithin is how long an unfinished program is offered.
const unfinishedWithin = 7 * 24 * time.Hour

// unfinished returns the program that an earlier session left unfinished in the
// logbook in dir, by its newest records; nil where there is none.
func unfinished(dir string) (*live.Unfinished, error) {
	n, err := logbook.Segments(dir)
	if err != nil || n == 0 {
		return nil, err
	}
	sum, err := logbook.Summarise(dir)
	if err != nil {
		return nil, err
	}
	last := ""
	for _, s := range sum.Segments {
		last = max(last, s.To)
	}
	end, err := time.Parse(time.RFC3339, last)
	if err != nil {
		return nil, nil // not one record
	}
	var u live.Unfinished
	kinds := []string{string(live.KindIntent), string(live.KindStep), string(live.KindCommand)}
	for r, err := range logbook.Records(dir, logbook.Filter{From: end.Add(-unfinishedWithin), Kinds: kinds}) {
		if err != nil {
			continue // a torn tail is what a crash leaves; log verify tells of more
		}
		at := reading.Stamp{UTC: r.UTC, Mono: r.Mono}
		switch live.Kind(r.Kind) {
		case live.KindIntent:
			err = see[live.IntentData](&u, at, r)
		case live.KindStep:
			err = see[live.StepData](&u, at, r)
		case live.KindCommand:
			err = see[live.CommandData](&u, at, r)
		}
		if err != nil {
			return nil, err
		}
	}
	if u.Program() == nil {
		return nil, nil
	}
	return &u, nil
}

func see[D any](u *live.Unfinished, at reading.Stamp, r logbook.Record) error {
	var d D
	if err := r.Decode(&d); err != nil {
		return err
	}
	u.See(at, d)
	return nil
}

// offer says at the start what an earlier session left. Nothing goes on by
// itself. A logbook that cannot be read is no reason not to start: opening it
// tells.
func (s *session) offer() *live.Unfinished {
	u, err := unfinished(s.folder)
	if err != nil {
		fmt.Fprintf(s.stderr, "barline: whether a program was left unfinished in %s is not known: %v\n", s.folder, err)
	}
	if u != nil && !s.resumes {
		done, _ := u.Steps()
		fmt.Fprintf(s.stderr, "barline: %v.\nbarline: Nothing goes on by itself: --resume of barline run goes on with step %d, and so does r on the dashboard.\n", u, done+1)
	}
	return u
}
