package alarm

import (
	"fmt"
	"time"

	"barline/model/reading"
)

// Acknowledge says that a person has seen the alarm.
func (l *List) Acknowledge(name string, at reading.Stamp) (Transition, error) {
	return l.person(name, acknowledged, at, "there is nothing to acknowledge")
}

// Reset lets go of a latched alarm whose condition is gone and which has been
// acknowledged.
func (l *List) Reset(name string, at reading.Stamp) (Transition, error) {
	return l.person(name, reset, at, "only an acknowledged alarm whose condition is gone can be reset")
}

func (l *List) person(name string, in stimulus, at reading.Stamp, why string) (Transition, error) {
	i := l.index(name)
	if i < 0 {
		return Transition{}, fmt.Errorf("alarm %q: %w", name, ErrUnknown)
	}
	e := &l.entries[i]
	to, ok := next(e.State, in, l.definitions[i].Latching)
	if e.State.Hidden() || !ok {
		return Transition{}, fmt.Errorf("alarm %q is %s, %s: %w", name, e.State, why, ErrRefused)
	}
	return l.enter(i, to, at), nil
}

// Shelve puts the alarm aside for a stated time, which its definition bounds.
// An alarm that is shelved already gets the new time.
func (l *List) Shelve(name string, d time.Duration, at reading.Stamp) (Transition, error) {
	i := l.index(name)
	if i < 0 {
		return Transition{}, fmt.Errorf("alarm %q: %w", name, ErrUnknown)
	}
	e, most := &l.entries[i], l.definitions[i].ShelveAtMost
	switch {
	case most == 0:
		return Transition{}, fmt.Errorf("alarm %q may not be shelved: %w", name, ErrRefused)
	case d <= 0 || d > most:
		return Transition{}, fmt.Errorf("alarm %q shelved for %v, expected up to %v: %w", name, d, most, ErrRefused)
	case e.State.Hidden() && e.State != Shelved:
		return Transition{}, fmt.Errorf("alarm %q is %s and cannot be shelved: %w", name, e.State, ErrRefused)
	}
	e.Until = at.Mono + d
	return l.enter(i, Shelved, at), nil
}

// Unshelve brings a shelved alarm back before its time.
func (l *List) Unshelve(name string, at reading.Stamp) (Transition, error) {
	return l.leave(name, Shelved, at)
}

// Suppress hides an alarm while on, because it would mean nothing then: the
// emission behind a closed shutter. It is for the program's logic, which may
// call it at every step; ok is false where nothing changed. What a person has
// shelved or taken out of service stays so, and a latching alarm that is not
// normal keeps calling: its latch must not be lost.
func (l *List) Suppress(name string, on bool, at reading.Stamp) (t Transition, ok bool) {
	i := l.index(name)
	if i < 0 {
		return Transition{}, false
	}
	switch s := l.entries[i].State; {
	case on && !s.Hidden() && (s == Normal || !l.definitions[i].Latching):
		return l.enter(i, Suppressed, at), true
	case !on && s == Suppressed:
		return l.reveal(i, at), true
	}
	return Transition{}, false
}

// TakeOut takes an alarm out of service until PutBack.
func (l *List) TakeOut(name string, at reading.Stamp) (Transition, error) {
	i := l.index(name)
	if i < 0 {
		return Transition{}, fmt.Errorf("alarm %q: %w", name, ErrUnknown)
	}
	if l.entries[i].State == OutOfService {
		return Transition{}, fmt.Errorf("alarm %q is out of service already: %w", name, ErrRefused)
	}
	l.entries[i].Until = 0
	return l.enter(i, OutOfService, at), nil
}

// PutBack returns an alarm to service.
func (l *List) PutBack(name string, at reading.Stamp) (Transition, error) {
	return l.leave(name, OutOfService, at)
}

func (l *List) leave(name string, hidden State, at reading.Stamp) (Transition, error) {
	i := l.index(name)
	if i < 0 {
		return Transition{}, fmt.Errorf("alarm %q: %w", name, ErrUnknown)
	}
	if s := l.entries[i].State; s != hidden {
		return Transition{}, fmt.Errorf("alarm %q is %s, not %s: %w", name, s, hidden, ErrRefused)
	}
	return l.reveal(i, at), nil
}
