package lines

import (
	"bytes"
	"fmt"
	"strconv"

	"barline/device/modbus"
)

// Checksum is what stands behind a line so that a damaged one is noticed.
type Checksum uint8

const (
	NoChecksum Checksum = iota
	XOR8                // exclusive or of all bytes, two digits
	CRC16               // that of Modbus over all bytes, four digits
)

var checksumText = [...]string{"none", "xor8", "crc16"}

// ParseChecksum returns the checksum that text names; "" is none.
func ParseChecksum(text string) (Checksum, error) {
	if text == "" {
		return NoChecksum, nil
	}
	for i, t := range checksumText {
		if t == text {
			return Checksum(i), nil
		}
	}
	return 0, fmt.Errorf("checksum %q: expected one of %q", text, checksumText)
}

// String returns the name of c as ParseChecksum takes it.
func (c Checksum) String() string { return checksumText[c] }

const capitals = "0123456789ABCDEF"

// Seal appends an asterisk and the checksum of line[start:] to line.
func (c Checksum) Seal(line []byte, start int) []byte {
	sum, digits := c.sum(line[start:])
	if digits == 0 {
		return line
	}
	line = append(line, '*')
	for shift := 4 * (digits - 1); shift >= 0; shift -= 4 {
		line = append(line, capitals[sum>>shift&0xF])
	}
	return line
}

// Open returns line without its checksum, or an error where that is missing
// or wrong. Without a checksum it returns line.
func (c Checksum) Open(line []byte) ([]byte, error) {
	if c == NoChecksum {
		return line, nil
	}
	at := bytes.LastIndexByte(line, '*')
	if at < 0 {
		return nil, fmt.Errorf("%q has no checksum: %w", clip(line), ErrLine)
	}
	want, digits := c.sum(line[:at])
	text := line[at+1:]
	got, err := strconv.ParseUint(string(text), 16, 16)
	// Capitals only: a case that does not count is a bit that is not checked.
	if err != nil || len(text) != digits || !bytes.Equal(text, bytes.ToUpper(text)) {
		return nil, fmt.Errorf("%q: checksum %q, expected %d capital hexadecimal digits: %w", clip(line), clip(text), digits, ErrLine)
	}
	if uint16(got) != want {
		return nil, fmt.Errorf("%q: checksum %0*X, computed %0*X: %w", clip(line), digits, got, digits, want, ErrLine)
	}
	return line[:at], nil
}

func (c Checksum) sum(p []byte) (sum uint16, digits int) {
	switch c {
	case XOR8:
		for _, b := range p {
			sum ^= uint16(b)
		}
		return sum, 2
	case CRC16:
		return modbus.CRC(p), 4
	}
	return 0, 0
}
