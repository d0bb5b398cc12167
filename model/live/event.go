package live

import (
	"time"

	"barline/model/anchor"
	"barline/model/reading"
	"barline/model/unit"
)

// Event is something that happened. Its time is the only time that the core
// knows.
type Event interface {
	When() reading.Stamp
}

// Read is a reading from an instrument.
type Read struct {
	Reading reading.Reading
}

// Tick says that bench time has moved on. The loop sends one every 50 ms.
type Tick struct {
	At reading.Stamp
}

// LinkChanged says that the line to an instrument opened or was lost.
type LinkChanged struct {
	At         reading.Stamp
	Instrument string
	Up         bool
	Reason     string
}

// Asked says that a person or a procedure intends something.
type Asked struct {
	At     reading.Stamp
	Intent Intent
}

// Answered is an instrument's answer to the command with this number.
type Answered struct {
	At      reading.Stamp
	Command uint64
	Err     string // empty where the instrument took it
}

// RecordChanged says how the logbook fares.
type RecordChanged struct {
	At     reading.Stamp
	Health RecordHealth
}

// RecordHealth is the state of the logbook.
type RecordHealth struct {
	Writing bool   // records reach the disk
	Reason  string // why not
	Written uint64 // records on disk
	Waiting int    // records in memory, not yet on disk
	Lost    uint64 // records that will never be written
}

// ModelChanged brings a predictor that knows more, such as one that stands on
// full-field runs of this bench. It is asked from now on.
type ModelChanged struct {
	At            reading.Stamp
	Predictor     Predictor // nil: only the progress has changed
	Answer        string
	Nodes         int           // full-field runs that it stands on
	Runs          []anchor.Node // those of them that no event brought before; never changed
	NodesPlanned  int
	LeftOutMetres unit.Metre // error at nodes left out, rms; 0 where not known
}

func (e Read) When() reading.Stamp          { return e.Reading.Taken }
func (e Tick) When() reading.Stamp          { return e.At }
func (e LinkChanged) When() reading.Stamp   { return e.At }
func (e Asked) When() reading.Stamp         { return e.At }
func (e Answered) When() reading.Stamp      { return e.At }
func (e RecordChanged) When() reading.Stamp { return e.At }
func (e ModelChanged) When() reading.Stamp  { return e.At }

// Intent is what somebody wants done. Intents say what, never how.
type Intent interface{ intent() }

type (
	// Hold freezes the bench: inlet, pump and vent shut, setpoint frozen.
	// It needs no arming and is never refused.
	Hold struct{}
	// Arm makes commands that move gas possible for a limited time.
	Arm struct{}
	// Disarm ends that time.
	Disarm struct{}
	// GoTo ramps the setpoint to Target within the allowed rates.
	GoTo struct{ Target unit.Pascal }
	// Note is a remark for the logbook.
	Note struct{ Text string }
	// Acknowledge says that a person has seen the alarm with this name.
	Acknowledge struct{ Alarm string }
	// Reset ends a latched alarm whose condition is gone.
	Reset struct{ Alarm string }
	// Shelve puts an alarm aside for a stated time; Unshelve brings it back.
	Shelve struct {
		Alarm string
		For   time.Duration
	}
	Unshelve struct{ Alarm string }
)

func (Hold) intent()        {}
func (Arm) intent()         {}
func (Disarm) intent()      {}
func (GoTo) intent()        {}
func (Note) intent()        {}
func (Acknowledge) intent() {}
func (Reset) intent()       {}
func (Shelve) intent()      {}
func (Unshelve) intent()    {}
