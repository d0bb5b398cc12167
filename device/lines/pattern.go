package lines

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// ErrLine is wrapped by every refusal of a line.
var ErrLine = errors.New("line does not fit")

// MaxLine is the longest line in bytes that is read; a whole spectrum of 4096
// pixels fits.
const MaxLine = 64 << 10

// Pattern is a compiled pattern. It is safe for concurrent use.
type Pattern struct {
	text  string
	parts []part
	names []string // of the number fields, in order
	list  string   // of the list field
}

type kind uint8

const (
	literal kind = iota
	number
	skip
	list
)

type part struct {
	kind kind
	text string // of a literal, with each run of blanks as one blank
}

// Compile reads a pattern.
func Compile(text string) (*Pattern, error) {
	p := &Pattern{text: text}
	var lit strings.Builder
	flush := func() {
		if s := squeeze(lit.String()); s != "" {
			p.parts = append(p.parts, part{literal, s})
		}
		lit.Reset()
	}
	for i := 0; i < len(text); i++ {
		c := text[i]
		switch {
		case (c == '{' || c == '}') && i+1 < len(text) && text[i+1] == c:
			lit.WriteByte(c)
			i++
		case c == '}':
			return nil, fmt.Errorf("pattern %q: a brace closes that was not opened; write }} for the brace itself", text)
		case c == '{':
			name, _, closed := strings.Cut(text[i+1:], "}")
			if !closed {
				return nil, fmt.Errorf("pattern %q: the brace at character %d is not closed", text, i+1)
			}
			flush()
			if err := p.addField(name); err != nil {
				return nil, fmt.Errorf("pattern %q: %w", text, err)
			}
			i += 1 + len(name)
		case c == '\n' || c == '\r':
			return nil, fmt.Errorf("pattern %q: a pattern is one line", text)
		default:
			lit.WriteByte(c)
		}
	}
	flush()
	if len(p.names) == 0 && p.list == "" {
		return nil, fmt.Errorf("pattern %q: has no field; expected such as %q", text, "P {pressure} bar")
	}
	p.trim()
	for i, x := range p.parts[:len(p.parts)-1] {
		if x.kind == list && p.parts[i+1].text == " " {
			return nil, fmt.Errorf("pattern %q: a blank alone does not end the list {%s...}", text, p.list)
		}
	}
	return p, nil
}

func (p *Pattern) addField(text string) error {
	name, isList := strings.CutSuffix(text, "...")
	if n := len(p.parts); n > 0 && p.parts[n-1].kind != literal {
		return fmt.Errorf("nothing separates {%s} from the field before it", text)
	}
	if name == "_" && !isList {
		p.parts = append(p.parts, part{kind: skip})
		return nil
	}
	if !isName(name) {
		return fmt.Errorf("field {%s}: expected letters, digits, - and _", text)
	}
	if _, ok := p.Field(name); ok || name == p.list {
		return fmt.Errorf("field {%s} stands twice", name)
	}
	if isList {
		if p.list != "" {
			return fmt.Errorf("two lists, {%s...} and {%s...}", p.list, name)
		}
		p.list = name
		p.parts = append(p.parts, part{kind: list})
		return nil
	}
	p.names = append(p.names, name)
	p.parts = append(p.parts, part{kind: number})
	return nil
}

// trim takes the blanks at both ends away, which do not count in a line.
func (p *Pattern) trim() {
	if first := &p.parts[0]; first.kind == literal {
		first.text = strings.TrimLeft(first.text, " ")
	}
	if last := &p.parts[len(p.parts)-1]; last.kind == literal {
		last.text = strings.TrimRight(last.text, " ")
	}
	kept := p.parts[:0]
	for _, x := range p.parts {
		if x.kind != literal || x.text != "" {
			kept = append(kept, x)
		}
	}
	p.parts = kept
}

// String returns the pattern as it was written.
func (p *Pattern) String() string { return p.text }

// Names returns the number fields in the order of the line. The caller must
// not change the slice.
func (p *Pattern) Names() []string { return p.names }

// List returns the name of the list field, or "".
func (p *Pattern) List() string { return p.list }

// Field returns the place of a number field among Names.
func (p *Pattern) Field(name string) (place int, ok bool) {
	for i, n := range p.names {
		if n == name {
			return i, true
		}
	}
	return 0, false
}

// Parse appends to dst one value for each of Names, then those of the list.
// The line carries neither terminator nor checksum. NaN stands where the
// instrument says that it has no value. On error dst comes back unchanged.
// It allocates nothing where dst has room.
func (p *Pattern) Parse(dst []float64, line []byte) ([]float64, error) {
	rest := trimBlanks(line)
	out, listAt := dst, -1
	var listText []byte
	for i, x := range p.parts {
		if x.kind == literal {
			var ok bool
			if rest, ok = cutLiteral(rest, x.text); !ok {
				return dst, fmt.Errorf("%q: expected %q at %q: %w", clip(line), x.text, clip(rest), ErrLine)
			}
			continue
		}
		var field []byte
		field, rest = p.cutField(rest, i)
		switch x.kind {
		case number:
			v, ok := parseNumber(field)
			if !ok {
				return dst, fmt.Errorf("%q: %q is no number for {%s}: %w", clip(line), clip(field), p.names[len(out)-len(dst)], ErrLine)
			}
			out = append(out, v)
		case list:
			listAt, listText = len(out), field
		}
	}
	if len(rest) != 0 {
		return dst, fmt.Errorf("%q: %q behind the end of the pattern: %w", clip(line), clip(rest), ErrLine)
	}
	if listAt < 0 {
		return out, nil
	}
	return p.parseList(dst, out, line, listText)
}

func (p *Pattern) parseList(dst, out []float64, line, text []byte) ([]float64, error) {
	for len(text) > 0 {
		end := 0
		for end < len(text) && !isSeparator(text[end]) {
			end++
		}
		v, ok := parseNumber(text[:end])
		if !ok {
			return dst, fmt.Errorf("%q: %q is no number of {%s...}: %w", clip(line), clip(text[:end]), p.list, ErrLine)
		}
		out = append(out, v)
		text = text[end:]
		if len(text) == 0 {
			break
		}
		// One comma or semicolon, with or without blanks; or blanks alone.
		text = trimLeft(text)
		if len(text) > 0 && (text[0] == ',' || text[0] == ';') {
			text = trimLeft(text[1:])
			if len(text) == 0 {
				return dst, fmt.Errorf("%q: {%s...} ends in a separator: %w", clip(line), p.list, ErrLine)
			}
		}
	}
	return out, nil
}

// cutField returns the text of the field that is part i, without the blanks
// that pad it, and what follows it.
func (p *Pattern) cutField(s []byte, i int) (field, rest []byte) {
	s = trimLeft(s)
	end := len(s)
	if i+1 < len(p.parts) {
		end = p.fieldEnd(s, i)
	}
	return trimBlanks(s[:end]), s[end:]
}

// fieldEnd returns where the literal behind field i begins. A number or a word
// ends at the first blank; a list may hold blanks, and ends at what the
// literal says beside them.
func (p *Pattern) fieldEnd(s []byte, i int) int {
	next := p.parts[i+1].text
	mark := next
	if next[0] == ' ' {
		if p.parts[i].kind != list {
			if at := bytes.IndexAny(s, " \t"); at >= 0 {
				return at
			}
			return len(s)
		}
		mark = strings.Trim(next, " ")
	}
	at := strings.Index(bytesAsString(s), mark[:1])
	if at < 0 {
		return len(s)
	}
	for next[0] == ' ' && at > 0 && isBlank(s[at-1]) {
		at--
	}
	return at
}

// Append writes a line, without terminator and checksum: values as Parse
// gives them. NaN becomes "---". It refuses a wrong number of values.
func (p *Pattern) Append(dst []byte, values []float64) ([]byte, error) {
	if len(values) < len(p.names) || p.list == "" && len(values) > len(p.names) {
		return dst, fmt.Errorf("pattern %q has %d fields, got %d values", p.text, len(p.names), len(values))
	}
	one, many := values[:len(p.names)], values[len(p.names):]
	for _, x := range p.parts {
		switch x.kind {
		case literal:
			dst = append(dst, x.text...)
		case number:
			dst = appendNumber(dst, one[0])
			one = one[1:]
		case skip:
			dst = append(dst, '-')
		case list:
			for i, v := range many {
				if i > 0 {
					dst = append(dst, ',')
				}
				dst = appendNumber(dst, v)
			}
		}
	}
	return dst, nil
}

func appendNumber(dst []byte, v float64) []byte {
	switch a := math.Abs(v); {
	case math.IsNaN(v):
		return append(dst, "---"...)
	case a != 0 && (a < 1e-6 || a >= 1e15):
		return strconv.AppendFloat(dst, v, 'e', -1, 64)
	}
	return strconv.AppendFloat(dst, v, 'f', -1, 64)
}
