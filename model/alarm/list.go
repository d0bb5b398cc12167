package alarm

import (
	"errors"
	"fmt"
	"time"

	"barline/model/reading"
)

// Errors of what a person asked for.
var (
	ErrUnknown = errors.New("no such alarm")
	ErrRefused = errors.New("refused")
)

// Condition is the process side of an alarm.
type Condition uint8

const (
	// Unknown keeps the state as it is: a dead gauge proves nothing. It
	// starts running delays anew. It is the zero value.
	Unknown Condition = iota
	Absent
	Present
)

// When returns Present where holds, else Absent.
func When(holds bool) Condition {
	if holds {
		return Present
	}
	return Absent
}

// Entry is the state of one alarm.
type Entry struct {
	State  State
	Active bool          // the condition holds, delays applied; also while hidden
	Since  reading.Stamp // when State began
	Raised reading.Stamp // when Active last began
	Until  time.Duration // bench Mono at which shelving ends
	Count  uint64        // how often it was raised while not hidden

	pending bool                        // the condition differs from Active and a delay runs
	from    time.Duration               // since when
	seen    Condition                   // last condition given
	recent  [chatterCount]time.Duration // Mono of the newest raisings, oldest first
}

// List is the state of all alarms of a bench. Copying it is a picture of that
// instant. The zero List has no alarms.
type List struct {
	definitions []Definition // shared by all copies, never written to
	entries     [Capacity]Entry
	flood       flood
}

// Transition is a change to be recorded. From and To are equal where only the
// condition of a hidden alarm changed.
type Transition struct {
	Name     string
	Priority Priority
	From, To State
	Active   bool
	At       reading.Stamp
	Until    time.Duration // bench Mono; where To is Shelved
}

// Rings reports whether the transition should call a person with sound.
func (t Transition) Rings() bool { return t.To == Unacknowledged && t.From != Unacknowledged }

// String writes the transition as the record shows it.
func (t Transition) String() string {
	condition := "condition absent"
	if t.Active {
		condition = "condition present"
	}
	if t.From == t.To {
		return fmt.Sprintf("%s: %s, %s", t.Name, t.To, condition)
	}
	return fmt.Sprintf("%s: %s, was %s, %s", t.Name, t.To, t.From, condition)
}

// New returns a list of alarms that are all normal at the instant at.
func New(definitions []Definition, at reading.Stamp) (List, error) {
	var l List
	if len(definitions) > Capacity {
		return l, fmt.Errorf("%d alarms, expected at most %d", len(definitions), Capacity)
	}
	for i, d := range definitions {
		if err := d.check(); err != nil {
			return List{}, err
		}
		for _, other := range definitions[:i] {
			if other.Name == d.Name {
				return List{}, fmt.Errorf("two alarms are named %q", d.Name)
			}
		}
		l.entries[i].Since = at
	}
	l.definitions = append([]Definition(nil), definitions...)
	return l, nil
}

// Len returns how many alarms there are.
func (l *List) Len() int { return len(l.definitions) }

// At returns the i-th alarm in the order of the definitions; 0 <= i < Len.
func (l *List) At(i int) (Definition, Entry) { return l.definitions[i], l.entries[i] }

// Get returns the alarm with this name.
func (l *List) Get(name string) (Definition, Entry, bool) {
	i := l.index(name)
	if i < 0 {
		return Definition{}, Entry{}, false
	}
	return l.definitions[i], l.entries[i], true
}

func (l *List) index(name string) int {
	for i := range l.definitions {
		if l.definitions[i].Name == name {
			return i
		}
	}
	return -1
}

// Standing appends the indices of the alarms that are not normal to dst, the
// most urgent first: what calls before what does not, then by priority, then
// the newest first. Hidden ones come last.
func (l *List) Standing(dst []int) []int {
	start := len(dst)
	for i := range l.definitions {
		if l.entries[i].State == Normal {
			continue
		}
		dst = append(dst, i)
		for k := len(dst) - 1; k > start && l.before(dst[k], dst[k-1]); k-- {
			dst[k], dst[k-1] = dst[k-1], dst[k]
		}
	}
	return dst
}

// before reports whether alarm i is more urgent than alarm j.
func (l *List) before(i, j int) bool {
	a, b := &l.entries[i], &l.entries[j]
	if ra, rb := rank(a.State), rank(b.State); ra != rb {
		return ra < rb
	}
	if pa, pb := l.definitions[i].Priority, l.definitions[j].Priority; pa != pb {
		return pa < pb
	}
	return a.Since.Mono > b.Since.Mono
}

func rank(s State) int {
	switch {
	case s == Unacknowledged || s == LatchedUnacknowledged:
		return 0
	case s == Acknowledged || s == LatchedAcknowledged:
		return 1
	case s == ReturnedUnacknowledged:
		return 2
	}
	return 3
}
