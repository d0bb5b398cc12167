package live

import (
	"barline/model/limit"
	"barline/model/reading"
)

// Effect is work that a step asks for. Effects are carried out in order.
type Effect interface{ effect() }

// Record asks for a line in the logbook. Sync asks that it be on the disk
// before the next effect is carried out.
type Record struct {
	At   reading.Stamp
	Kind Kind
	Data any // encodes to a JSON object
	Sync bool
}

// SendSetpoint asks for a setpoint on the wire. The answer comes back as
// Answered with the same number.
type SendSetpoint struct {
	Command  uint64
	Setpoint limit.Setpoint
}

// SendHold asks for the safe state: valves shut, hold commands of the bench
// file sent, setpoint frozen. It is carried out before it is recorded.
type SendHold struct {
	Command  uint64
	Setpoint limit.Setpoint
}

// Bell asks for the terminal's bell.
type Bell struct{}

// Call asks for the people who are elsewhere.
type Call struct {
	Alarm  string
	Cause  string
	Action string
}

func (Record) effect()       {}
func (SendSetpoint) effect() {}
func (SendHold) effect()     {}
func (Bell) effect()         {}
func (Call) effect()         {}

// Kind is what a record is about, spelled as in the logbook.
type Kind string

const (
	KindStart         Kind = "start"
	KindStop          Kind = "stop"
	KindConfiguration Kind = "configuration"
	KindReading       Kind = "reading"
	KindIntent        Kind = "intent"
	KindCommand       Kind = "command"
	KindReadback      Kind = "readback"
	KindAlarm         Kind = "alarm"
	KindNote          Kind = "note"
	KindCalibration   Kind = "calibration"
	KindNode          Kind = "node"
	KindPrediction    Kind = "prediction"
	KindStep          Kind = "step"
	KindMeans         Kind = "means"
	KindDrift         Kind = "drift"
	KindClock         Kind = "clock"
	KindCapture       Kind = "capture"
	KindSeal          Kind = "seal"
)
