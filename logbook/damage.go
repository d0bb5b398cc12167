package logbook

import "fmt"

// Kind of damage, as reports name it.
type Kind string

const (
	// Torn: the last line of an unsealed segment is not whole, as a crash
	// leaves it. What stood there was never acknowledged.
	Torn Kind = "torn tail"
	// Edited: a line is not as it was written.
	Edited Kind = "edited"
	// Missing: records that stood between two others are gone.
	Missing Kind = "missing"
	// Disordered: a record stands where another belongs.
	Disordered Kind = "out of order"
	// Unreadable: bytes that are no record.
	Unreadable Kind = "unreadable"
	// Unchecked: a line looks whole, but what it is checked against is gone.
	Unchecked Kind = "cannot be checked"
	// Heading: a segment does not begin as a segment must.
	Heading Kind = "no segment"
	// Newer: written by a later version of this program.
	Newer Kind = "newer format"
	// Seal: the digest or the counts of a sealed segment are not right, or
	// something stands behind the seal.
	Seal Kind = "broken seal"
	// Twice: two segments claim the same number.
	Twice Kind = "same number twice"
	// Attached: a file beside the record is missing or not as recorded.
	Attached Kind = "attachment"
	// IO: the operating system could not read.
	IO Kind = "cannot be read"
)

// Damage says what is wrong with one place of a logbook, and that the records
// there were left out. It is an error, and reading goes on behind it.
type Damage struct {
	Segment string // name of the file
	Offset  int64  // bytes from the beginning of the (decompressed) segment
	Bytes   int64  // how many bytes were left out
	After   uint64 // seq of the last good record before it
	Kind    Kind
	Text    string // what was seen, what was wanted
}

// Error names the place, the kind and the finding.
func (d *Damage) Error() string {
	return fmt.Sprintf("%s, byte %d, after record %d: %s: %s", d.Segment, d.Offset, d.After, d.Kind, d.Text)
}
