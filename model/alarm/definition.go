package alarm

import (
	"errors"
	"fmt"
	"time"
)

// Capacity is how many alarms one bench can have.
const Capacity = 48

// Priority says how soon a person must act.
type Priority uint8

const (
	High   Priority = 1 // now
	Medium Priority = 2 // soon
	Low    Priority = 3 // before the day is over
)

var priorityText = [...]string{"", "high", "medium", "low"}

// String returns the priority in a word.
func (p Priority) String() string {
	if p >= High && p <= Low {
		return priorityText[p]
	}
	return fmt.Sprintf("priority %d", uint8(p))
}

// Definition is what an alarm means and how it behaves. It never changes
// while a bench runs.
type Definition struct {
	Name        string // such as "cell A stale"; unique
	Priority    Priority
	Cause       string // what happened
	Consequence string // what follows, or what the bench does about it
	Action      string // what a person should press or check

	OnDelay  time.Duration // the condition must hold for so long
	OffDelay time.Duration // and be gone for so long
	Deadband float64       // SI unit of the quantity; for High and Low
	Latching bool          // stays until it is reset by hand

	// ShelveAtMost is the longest time that the alarm may be put aside;
	// zero: not at all. A latching alarm cannot be put aside, or its latch
	// would be lost.
	ShelveAtMost time.Duration
}

func (d Definition) check() error {
	switch {
	case d.Name == "":
		return errors.New("an alarm has no name")
	case d.Priority < High || d.Priority > Low:
		return fmt.Errorf("alarm %q: %v, expected 1 to 3", d.Name, d.Priority)
	case d.Action == "":
		return fmt.Errorf("alarm %q asks nobody to do anything: it is an event, not an alarm", d.Name)
	case d.OnDelay < 0 || d.OffDelay < 0 || d.ShelveAtMost < 0:
		return fmt.Errorf("alarm %q: a delay is negative", d.Name)
	case d.Latching && d.ShelveAtMost > 0:
		return fmt.Errorf("alarm %q latches and may be shelved: expected one of both", d.Name)
	case !(d.Deadband >= 0):
		return fmt.Errorf("alarm %q: deadband %v, expected 0 or more", d.Name, d.Deadband)
	}
	return nil
}
