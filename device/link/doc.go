// Package link holds open lines to instruments: a serial port, a TCP
// connection, or the standard streams of a child process.
//
// A Line is bytes with a patience. Whatever lies beneath, silence is an error
// (os.ErrDeadlineExceeded) and never a read of nothing, a line that is gone
// says so at once, and no byte is written after Close. An Opener, built from
// one instrument of the bench file, opens such a line again and again.
//
// Waiting here is wall time: a cable knows nothing of bench time. The package
// knows no protocol beyond the silence that one may ask for between messages.
package link
