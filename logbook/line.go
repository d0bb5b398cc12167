package logbook

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"strconv"
	"time"

	"barline/model/reading"
)

// Kinds that the logbook writes itself.
const (
	kindSegment = "segment"
	kindSeal    = "seal"
	kindLost    = "lost"
)

// formatVersion is the version of the format that doc.go specifies.
const formatVersion = 1

// line is one line of a segment, taken apart. Its slices point into the bytes
// it was parsed from.
type line struct {
	seq  uint64
	t    []byte // stampSize bytes
	mono int64
	kind []byte
	data []byte // a JSON object by its braces; not parsed
	body []byte // what the crc covers
	crc  digits
}

// parseLine takes a line without its LF apart. It checks the envelope
// strictly, the data only for its braces, and the crc not at all.
func parseLine(b []byte) (l line, ok bool) {
	end := len(b) - (tailSize - 1)
	if end < 0 || string(b[end:end+len(crcField)]) != crcField || string(b[len(b)-2:]) != `"}` {
		return l, false
	}
	copy(l.crc[:], b[end+len(crcField):])
	l.body = b[:end]

	rest, ok := bytes.CutPrefix(l.body, []byte(`{"seq":`))
	if !ok {
		return l, false
	}
	if l.seq, rest, ok = cutUint(rest); !ok {
		return l, false
	}
	if rest, ok = bytes.CutPrefix(rest, []byte(`,"t":"`)); !ok || len(rest) < stampSize {
		return l, false
	}
	l.t, rest = rest[:stampSize], rest[stampSize:]
	if !stampShape(l.t) {
		return l, false
	}
	if rest, ok = bytes.CutPrefix(rest, []byte(`","mono_ns":`)); !ok {
		return l, false
	}
	rest, negative := bytes.CutPrefix(rest, []byte{'-'})
	mono, rest, ok := cutUint(rest)
	if !ok || mono > math.MaxInt64 {
		return l, false
	}
	if l.mono = int64(mono); negative {
		l.mono = -l.mono
	}
	if rest, ok = bytes.CutPrefix(rest, []byte(`,"kind":"`)); !ok {
		return l, false
	}
	quote := bytes.IndexByte(rest, '"')
	if quote < 1 || quote > 32 {
		return l, false
	}
	l.kind = rest[:quote]
	for _, c := range l.kind {
		if (c < 'a' || c > 'z') && c != '_' {
			return l, false
		}
	}
	if rest, ok = bytes.CutPrefix(rest[quote:], []byte(`","data":`)); !ok || len(rest) < 2 {
		return l, false
	}
	l.data = rest
	return l, rest[0] == '{' && rest[len(rest)-1] == '}'
}

// cutUint reads a decimal number without leading zeros.
func cutUint(b []byte) (n uint64, rest []byte, ok bool) {
	i := 0
	for ; i < len(b) && b[i]-'0' <= 9; i++ {
		d := uint64(b[i] - '0')
		if i >= 19 && (i > 19 || n > (math.MaxUint64-d)/10) {
			return 0, b, false
		}
		n = n*10 + d
	}
	if i == 0 || i > 1 && b[0] == '0' {
		return 0, b, false
	}
	return n, b[i:], true
}

// stampShape reports whether t is divided as a stamp is. That its digits are
// digits, and a day that exists, is for parseStamp.
func stampShape(t []byte) bool {
	_ = t[stampSize-1]
	return t[4] == '-' && t[7] == '-' && t[10] == 'T' && t[13] == ':' && t[16] == ':' && t[19] == '.' && t[26] == 'Z'
}

// parseStamp reads t; it fails on a day or an hour that does not exist.
func parseStamp(t []byte) (time.Time, error) {
	return time.Parse(stampLayout, string(t))
}

// stamp returns when the line was written; its UTC is zero where t names no
// instant.
func (l line) stamp() reading.Stamp {
	t, _ := parseStamp(l.t)
	return reading.Stamp{UTC: t, Mono: time.Duration(l.mono)}
}

// heading is the data of a segment line.
type heading struct {
	Format         int     `json:"format"`
	Segment        int     `json:"segment"`
	AfterSeq       uint64  `json:"after_seq"`
	AfterCRC       string  `json:"after_crc"`
	PreviousSHA256 *string `json:"previous_sha256"`
}

func (h heading) append(dst []byte) []byte {
	dst = append(dst, `{"format":`...)
	dst = strconv.AppendInt(dst, int64(h.Format), 10)
	dst = append(dst, `,"segment":`...)
	dst = strconv.AppendInt(dst, int64(h.Segment), 10)
	dst = append(dst, `,"after_seq":`...)
	dst = strconv.AppendUint(dst, h.AfterSeq, 10)
	dst = append(dst, `,"after_crc":`...)
	dst = AppendString(dst, h.AfterCRC)
	dst = append(dst, `,"previous_sha256":`...)
	if h.PreviousSHA256 == nil {
		return append(dst, "null}"...)
	}
	return append(AppendString(dst, *h.PreviousSHA256), '}')
}

// seal is the data of a seal line.
type seal struct {
	Records   uint64 `json:"records"`
	Bytes     int64  `json:"bytes"`
	SHA256    string `json:"sha256"`
	Recovered bool   `json:"recovered,omitempty"`
	TornBytes int64  `json:"torn_bytes,omitempty"`
}

func (s seal) append(dst []byte) []byte {
	dst = append(dst, `{"records":`...)
	dst = strconv.AppendUint(dst, s.Records, 10)
	dst = append(dst, `,"bytes":`...)
	dst = strconv.AppendInt(dst, s.Bytes, 10)
	dst = append(dst, `,"sha256":`...)
	dst = AppendString(dst, s.SHA256)
	if s.Recovered {
		dst = append(dst, `,"recovered":true,"torn_bytes":`...)
		dst = strconv.AppendInt(dst, s.TornBytes, 10)
	}
	return append(dst, '}')
}

// parseHeading reads the first line of a segment, which must be whole.
func parseHeading(b []byte) (line, heading, error) {
	l, ok := parseLine(b)
	if !ok || string(l.kind) != kindSegment {
		return l, heading{}, fmt.Errorf("begins with %s, expected a segment line", quote(b))
	}
	if got := checksum(noDigits, l.body); got != l.crc {
		return l, heading{}, fmt.Errorf("segment line has crc %q, computed %q", l.crc[:], got[:])
	}
	var h heading
	if err := json.Unmarshal(l.data, &h); err != nil {
		return l, heading{}, fmt.Errorf("segment line: %w", err)
	}
	return l, h, nil
}

// quote shows bytes of unknown content in a message, cut to length.
func quote(b []byte) string {
	const most = 40
	if len(b) > most {
		return strconv.Quote(string(b[:most])) + "…"
	}
	return strconv.Quote(string(b))
}
