// Package alarm keeps the alarms of a bench and their states, as ANSI/ISA-18.2
// (2016) and IEC 62682 (2022) name them.
//
// An alarm is a condition that needs a person to act: it has a Definition,
// made once, that says cause, consequence and what to do. A List holds the
// states of all alarms. It is a value of fixed size: a copy is a picture of
// that instant, and nothing in it allocates once it is made.
//
// The process side says whether the condition holds, through Evaluate, High
// or Low; on-delay, off-delay and deadband stand between a flickering
// condition and the state. The person's side acknowledges, shelves for a
// stated time, and resets what is latched. What the program knows to be
// meaningless is suppressed by design; what is under repair is out of service.
// These three hide an alarm without losing it: its process side is followed
// all the same, and every change comes back as a Transition to be recorded.
//
// The list refuses to shelve what its definition does not allow, to reset an
// alarm whose condition still holds, and to acknowledge what nobody raised.
// It counts chatter and floods, so that a bad alarm is seen to be one.
package alarm
