package alarm

import (
	"math"

	"barline/model/reading"
)

// Evaluate gives the condition of an alarm as it is at this instant. The
// transition is to be recorded where ok. A name that is not in the list
// changes nothing: Get tells.
func (l *List) Evaluate(name string, c Condition, at reading.Stamp) (t Transition, ok bool) {
	i := l.index(name)
	if i < 0 {
		return Transition{}, false
	}
	l.entries[i].seen = c
	return l.step(i, at)
}

// High evaluates an alarm whose condition is a value above limit; it goes
// when the value is below limit by the deadband. NaN is unknown.
func (l *List) High(name string, value, limit float64, at reading.Stamp) (Transition, bool) {
	return l.Evaluate(name, l.beyond(name, value-limit), at)
}

// Low evaluates an alarm whose condition is a value below limit; it goes when
// the value is above limit by the deadband. NaN is unknown.
func (l *List) Low(name string, value, limit float64, at reading.Stamp) (Transition, bool) {
	return l.Evaluate(name, l.beyond(name, limit-value), at)
}

// beyond turns how far a value is past its limit into a condition.
func (l *List) beyond(name string, excess float64) Condition {
	i := l.index(name)
	if i < 0 || math.IsNaN(excess) {
		return Unknown
	}
	if l.entries[i].Active {
		return When(excess > -l.definitions[i].Deadband)
	}
	return When(excess > 0)
}

// Tick lets time pass: delays end and shelving runs out. It returns one
// transition a call; call it until ok is false.
func (l *List) Tick(at reading.Stamp) (t Transition, ok bool) {
	l.flood.pass(at)
	for i := range l.definitions {
		if t, ok := l.step(i, at); ok {
			return t, true
		}
	}
	return Transition{}, false
}

// step moves alarm i to where its last condition and the time put it.
func (l *List) step(i int, at reading.Stamp) (Transition, bool) {
	e, d := &l.entries[i], &l.definitions[i]
	changed := false
	switch now := e.seen == Present; {
	case e.seen == Unknown || now == e.Active:
		e.pending = false
	case !e.pending:
		e.pending, e.from = true, at.Mono
	}
	if delay := d.OnDelay; e.pending {
		if e.Active {
			delay = d.OffDelay
		}
		if at.Mono-e.from >= delay {
			e.pending, e.Active, changed = false, !e.Active, true
			if e.Active {
				e.Raised = at
			}
		}
	}
	if e.State == Shelved && at.Mono >= e.Until {
		return l.reveal(i, at), true
	}
	if !changed {
		return Transition{}, false
	}
	if e.State.Hidden() {
		return l.report(i, e.State, at), true
	}
	in := cleared
	if e.Active {
		in = raised
	}
	to, ok := next(e.State, in, d.Latching)
	if !ok {
		return Transition{}, false
	}
	return l.enter(i, to, at), true
}

// enter puts alarm i into a state and counts it where it was raised.
func (l *List) enter(i int, to State, at reading.Stamp) Transition {
	e := &l.entries[i]
	from := e.State
	e.State, e.Since = to, at
	if to == Unacknowledged {
		e.Count++
		copy(e.recent[:], e.recent[1:])
		e.recent[chatterCount-1] = at.Mono
		l.flood.raise(at)
	}
	return l.report(i, from, at)
}

// reveal ends hiding: the alarm takes the state that the process has.
func (l *List) reveal(i int, at reading.Stamp) Transition {
	e := &l.entries[i]
	e.Until = 0
	if e.Active {
		return l.enter(i, Unacknowledged, at)
	}
	return l.enter(i, Normal, at)
}

func (l *List) report(i int, from State, at reading.Stamp) Transition {
	e, d := &l.entries[i], &l.definitions[i]
	return Transition{Name: d.Name, Priority: d.Priority, From: from, To: e.State, Active: e.Active, At: at, Until: e.Until}
}
