package scpi

import (
	"fmt"
	"strings"
)

// Unit is one unit of a program message.
type Unit struct {
	Header string // without the question mark; absolute, without a leading colon
	Query  bool
	Args   []string // blanks trimmed, quotes kept
}

// ParseMessage reads one line of program message units, the terminator
// already cut off. A header that does not begin with a colon or an asterisk
// continues the path of the one before it (SCPI-99, volume 1, section 6.2.4):
// "SOUR:PRES:LEV 3;MODE?" asks for SOUR:PRES:MODE.
func ParseMessage(line string) ([]Unit, error) {
	var units []Unit
	path := ""
	for _, text := range splitOutsideQuotes(line, ';') {
		text = strings.Trim(text, " \t\r\n")
		if text == "" {
			continue
		}
		header, rest, _ := strings.Cut(text, " ")
		u := Unit{}
		u.Header, u.Query = strings.CutSuffix(header, "?")
		switch {
		case strings.HasPrefix(u.Header, "*"): // leaves the path as it is
		case strings.HasPrefix(u.Header, ":"):
			u.Header = u.Header[1:]
			path = parent(u.Header)
		default:
			u.Header = path + u.Header
			path = parent(u.Header)
		}
		if !isHeader(u.Header) {
			return nil, fmt.Errorf("header %q is %w", clip(header), ErrSyntax)
		}
		if rest = strings.Trim(rest, " \t"); rest != "" {
			for _, a := range splitOutsideQuotes(rest, ',') {
				u.Args = append(u.Args, strings.Trim(a, " \t"))
			}
		}
		units = append(units, u)
	}
	if len(units) == 0 {
		return nil, fmt.Errorf("an empty message is %w", ErrSyntax)
	}
	return units, nil
}

// String returns u as one unit of a message.
func (u Unit) String() string {
	text := u.Header
	if !strings.HasPrefix(text, "*") {
		text = ":" + text
	}
	if u.Query {
		text += "?"
	}
	if len(u.Args) > 0 {
		text += " " + strings.Join(u.Args, ",")
	}
	return text
}

// Matches reports whether the header of u is keyword, in which capitals are
// the short form: "SOURce:PRESsure:LEVel" takes SOUR:PRES:LEV and the long
// form of every part, in any case, and nothing in between.
func (u Unit) Matches(keyword string) bool {
	have, want := strings.Split(u.Header, ":"), strings.Split(keyword, ":")
	if len(have) != len(want) {
		return false
	}
	for i, w := range want {
		if !strings.EqualFold(have[i], w) && !strings.EqualFold(have[i], short(w)) {
			return false
		}
	}
	return true
}

// short returns the capitals and digits of a keyword.
func short(keyword string) string {
	end := strings.IndexFunc(keyword, func(r rune) bool { return r >= 'a' && r <= 'z' })
	if end < 0 {
		return keyword
	}
	return keyword[:end]
}

func parent(header string) string { return header[:strings.LastIndexByte(header, ':')+1] }

func isHeader(h string) bool {
	h = strings.TrimPrefix(h, "*")
	if h == "" {
		return false
	}
	for part := range strings.SplitSeq(h, ":") {
		if part == "" || !isLetter(part[0]) {
			return false
		}
		for i := range len(part) {
			if c := part[i]; !isLetter(c) && !isDigit(c) && c != '_' {
				return false
			}
		}
	}
	return true
}

func isLetter(c byte) bool { return c >= 'A' && c <= 'Z' || c >= 'a' && c <= 'z' }

// splitOutsideQuotes cuts s at each sep that does not stand in quotes.
func splitOutsideQuotes(s string, sep byte) []string {
	var parts []string
	var quote byte
	start := 0
	for i := range len(s) {
		switch c := s[i]; {
		case quote != 0:
			if c == quote {
				quote = 0
			}
		case c == '"' || c == '\'':
			quote = c
		case c == sep:
			parts = append(parts, s[start:i])
			start = i + 1
		}
	}
	return append(parts, s[start:])
}

// TrimTerminator cuts NL, CR or CR NL off the end of a line.
func TrimTerminator(line []byte) []byte {
	for len(line) > 0 && (line[len(line)-1] == '\n' || line[len(line)-1] == '\r') {
		line = line[:len(line)-1]
	}
	return line
}

// Identity is the answer to *IDN? (IEEE 488.2, section 10.14).
type Identity struct {
	Maker, Model, Serial, Firmware string
}

// ParseIdentity reads the four fields of an answer to *IDN?.
func ParseIdentity(line string) (Identity, error) {
	f := strings.SplitN(line, ",", 4)
	if len(f) != 4 {
		return Identity{}, fmt.Errorf("identity %q is %w: expected maker, model, serial number, firmware", clip(line), ErrSyntax)
	}
	for i := range f {
		f[i] = strings.TrimSpace(f[i])
	}
	return Identity{f[0], f[1], f[2], f[3]}, nil
}

// String returns the answer as one line.
func (id Identity) String() string {
	return strings.Join([]string{id.Maker, id.Model, id.Serial, id.Firmware}, ",")
}
