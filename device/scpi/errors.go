package scpi

import (
	"fmt"
	"strconv"
	"strings"
)

// Error is one entry of an instrument's error queue (SCPI-99, volume 2,
// section 21.8). Code 0 says that the queue is empty.
type Error struct {
	Code int
	Text string
}

// Codes that the standard gives a meaning (SCPI-99, volume 2, chapter 21).
var (
	NoError         = Error{0, "No error"}
	CommandError    = Error{-100, "Command error"}
	UndefinedHeader = Error{-113, "Undefined header"}
	DataOutOfRange  = Error{-222, "Data out of range"}
	QueueOverflow   = Error{-350, "Queue overflow"}
)

// Error says what the instrument reported.
func (e Error) Error() string { return fmt.Sprintf("instrument reports error %d, %q", e.Code, e.Text) }

// ParseError reads an answer to SYSTem:ERRor? such as -113,"Undefined header".
func ParseError(line string) (Error, error) {
	code, text, found := strings.Cut(strings.Trim(line, " \t\r\n"), ",")
	n, err := strconv.Atoi(strings.TrimSpace(code))
	text = strings.TrimSpace(text)
	if !found || err != nil || n < -32768 || n > 32767 || len(text) < 2 || text[0] != '"' || text[len(text)-1] != '"' {
		return Error{}, fmt.Errorf("error queue answers %q, which is %w: expected such as 0,\"No error\"", clip(line), ErrSyntax)
	}
	inner := strings.ReplaceAll(text[1:len(text)-1], `""`, "\x00")
	if strings.Contains(inner, `"`) {
		return Error{}, fmt.Errorf("error queue answers %q, which is %w: a quote is not closed", clip(line), ErrSyntax)
	}
	return Error{n, strings.ReplaceAll(inner, "\x00", `"`)}, nil
}

// Line returns e as an instrument sends it.
func (e Error) Line() string {
	return strconv.Itoa(e.Code) + `,"` + strings.ReplaceAll(e.Text, `"`, `""`) + `"`
}

// Queue is an instrument's error queue: first in, first out, of a fixed
// length; when it is full the newest entry becomes QueueOverflow. The zero
// value holds up to 16 entries.
type Queue struct {
	entries []Error
}

const queueLength = 16

// Push adds e.
func (q *Queue) Push(e Error) {
	if len(q.entries) == queueLength {
		q.entries[queueLength-1] = QueueOverflow
		return
	}
	q.entries = append(q.entries, e)
}

// Pop removes and returns the oldest entry, or NoError.
func (q *Queue) Pop() Error {
	if len(q.entries) == 0 {
		return NoError
	}
	e := q.entries[0]
	q.entries = q.entries[1:]
	return e
}

// Clear empties the queue, as *CLS does.
func (q *Queue) Clear() { q.entries = nil }
