// Package instrument turns the instruments of the bench file into readings,
// and checked commands into messages.
//
// An Instrument knows the protocol and the channels of one instrument. It
// works on any open link.Line, starts no goroutine and reads the clock it is
// given, once, when the last byte of an answer has arrived. One that is asked
// is Polled, one that talks by itself is Drained.
//
// What leaves here is SI and absolute: a gauge pressure has the air pressure
// added, a wavelength in air has become one in vacuum. What is wrong with a
// value stands on the reading, as status and reason. An error is returned
// only where the line itself is gone and must be opened anew.
//
// An answer is never taken for the answer to another question. Where a
// protocol does not say which question an answer belongs to, a late or doubled
// answer would shift all that follow; see modbus.go and scpi.go for how each
// is kept in step. The assumption is a line that keeps the order of bytes.
//
// Only a limit.Setpoint or a limit.Order that its limits made is ever sent, each
// is read back, and none is sent twice. What moves is asked once that it
// answers; where it has come to is for the polls to show.
//
// A Runner owns one line: it opens, polls, reopens, and passes results on.
package instrument
