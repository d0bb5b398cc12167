// Package modbus turns Modbus requests and replies into bytes and back. It
// does no I/O and keeps no time.
//
// A Request asks one unit to read or write registers; a Reply answers it, or
// carries an Exception. Both sides of the wire are here, for two framings:
// RTU (unit, message, CRC) on serial lines and TCP (a header with a
// transaction number). Functions 03, 04, 06 and 16 are spoken, no others.
//
// Decoding is strict: a frame is accepted only whole, with nothing behind it,
// and what is accepted encodes to the same bytes again. A reply does not say
// which register it is about; Answers tells as much as can be told, and the
// rest is the caller's care (see Shape).
//
// Register addresses count from 0, as on the wire. Numbers of more than one
// register have no order of words in the standard; Format and Order say how
// they lie.
//
// Sources: MODBUS Application Protocol Specification V1.1b3 (2012); MODBUS
// over Serial Line V1.02 (2006); MODBUS Messaging on TCP/IP V1.0b (2006).
package modbus
