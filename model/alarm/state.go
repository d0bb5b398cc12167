package alarm

import "fmt"

// State is where an alarm stands, in the words of the standards' state model;
// the letter is theirs too.
type State uint8

const (
	Normal                 State = iota // A: nothing to do
	Unacknowledged                      // B: the condition holds and nobody has seen it
	Acknowledged                        // C: the condition holds, somebody knows
	ReturnedUnacknowledged              // D: it held and went, and nobody has seen it
	LatchedUnacknowledged               // E: it held and went, must be acknowledged and reset
	LatchedAcknowledged                 // F: it held and went, must be reset
	Shelved                             // G: put aside by a person for a stated time
	Suppressed                          // H: hidden by design, while it would mean nothing
	OutOfService                        // I: taken out by a person until put back
	stateCount
)

var stateText = [stateCount]string{
	"normal", "unacknowledged", "acknowledged", "returned unacknowledged",
	"latched unacknowledged", "latched acknowledged", "shelved", "suppressed by design", "out of service",
}

// String returns the state's name.
func (s State) String() string {
	if s < stateCount {
		return stateText[s]
	}
	return fmt.Sprintf("alarm state %d", uint8(s))
}

// MarshalText writes the state's name.
func (s State) MarshalText() ([]byte, error) {
	if s >= stateCount {
		return nil, fmt.Errorf("%v: expected one below %d", s, stateCount)
	}
	return []byte(stateText[s]), nil
}

// UnmarshalText reads the state's name.
func (s *State) UnmarshalText(text []byte) error {
	for i, t := range stateText {
		if t == string(text) {
			*s = State(i)
			return nil
		}
	}
	return fmt.Errorf("alarm state %q: expected one of %q", text, stateText)
}

// Calls reports whether the state asks for a person now.
func (s State) Calls() bool {
	return s == Unacknowledged || s == ReturnedUnacknowledged || s == LatchedUnacknowledged
}

// Hidden reports whether the state keeps an alarm from calling.
func (s State) Hidden() bool { return s == Shelved || s == Suppressed || s == OutOfService }

// stimulus is what moves an alarm that is not hidden.
type stimulus uint8

const (
	raised  stimulus = iota // the condition came, past the on-delay
	cleared                 // the condition went, past the off-delay
	acknowledged
	reset
)

// next returns the state after a stimulus; ok is false where the stimulus
// means nothing in that state. It is not for hidden states.
func next(s State, in stimulus, latching bool) (to State, ok bool) {
	switch in {
	case raised: // whatever was latched or seen before, this is a new alarm
		if s != Unacknowledged && s != Acknowledged {
			return Unacknowledged, true
		}
	case cleared:
		switch {
		case s == Unacknowledged && latching:
			return LatchedUnacknowledged, true
		case s == Unacknowledged:
			return ReturnedUnacknowledged, true
		case s == Acknowledged && latching:
			return LatchedAcknowledged, true
		case s == Acknowledged:
			return Normal, true
		}
	case acknowledged:
		switch s {
		case Unacknowledged:
			return Acknowledged, true
		case ReturnedUnacknowledged:
			return Normal, true
		case LatchedUnacknowledged:
			return LatchedAcknowledged, true
		}
	case reset:
		if s == LatchedAcknowledged {
			return Normal, true
		}
	}
	return s, false
}
