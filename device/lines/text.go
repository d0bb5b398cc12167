package lines

import (
	"math"
	"strconv"
	"strings"
	"unsafe"
)

// bytesAsString lets package strings and strconv read p without a copy. The
// string is not kept beyond the call that it is made for.
func bytesAsString(p []byte) string { return unsafe.String(unsafe.SliceData(p), len(p)) }

func isBlank(c byte) bool { return c == ' ' || c == '\t' }

func isSeparator(c byte) bool { return isBlank(c) || c == ',' || c == ';' }

func trimLeft(s []byte) []byte {
	for len(s) > 0 && isBlank(s[0]) {
		s = s[1:]
	}
	return s
}

func trimBlanks(s []byte) []byte {
	s = trimLeft(s)
	for len(s) > 0 && isBlank(s[len(s)-1]) {
		s = s[:len(s)-1]
	}
	return s
}

// squeeze makes one blank of each run of blanks.
func squeeze(s string) string {
	var b strings.Builder
	blank := false
	for i := range len(s) {
		if isBlank(s[i]) {
			blank = true
			continue
		}
		if blank {
			b.WriteByte(' ')
			blank = false
		}
		b.WriteByte(s[i])
	}
	if blank {
		b.WriteByte(' ')
	}
	return b.String()
}

// cutLiteral takes text off the front of s; one blank of text stands for one
// or more of s.
func cutLiteral(s []byte, text string) (rest []byte, ok bool) {
	for i := range len(text) {
		if text[i] != ' ' {
			if len(s) == 0 || s[0] != text[i] {
				return s, false
			}
			s = s[1:]
			continue
		}
		if len(s) == 0 || !isBlank(s[0]) {
			return s, false
		}
		s = trimLeft(s)
	}
	return s, true
}

func isName(s string) bool {
	for i := range len(s) {
		c := s[i]
		if !(c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' || c >= '0' && c <= '9' || c == '_' || c == '-') {
			return false
		}
	}
	return s != "" && s != "_"
}

// parseNumber reads a decimal number; ok is false where text is none. NaN
// stands for "no value" in the spellings that instruments use.
func parseNumber(text []byte) (v float64, ok bool) {
	if len(text) == 0 {
		return 0, false
	}
	digits, dashes := 0, 0
	for _, c := range text {
		switch {
		case c >= '0' && c <= '9':
			digits++
		case c == '-':
			dashes++
		case c == '+' || c == '.' || c == 'e' || c == 'E':
		default:
			if s := bytesAsString(text); strings.EqualFold(s, "nan") {
				return math.NaN(), true
			}
			return 0, false
		}
	}
	if digits == 0 {
		return math.NaN(), dashes == len(text) && dashes >= 2
	}
	v, err := strconv.ParseFloat(bytesAsString(text), 64)
	if err != nil {
		return 0, false
	}
	if math.Abs(v-9.91e37) < 1e33 { // what SCPI instruments send for "none"
		return math.NaN(), true
	}
	return v, true
}

func clip(s []byte) string {
	const most = 60
	if len(s) <= most {
		return string(s)
	}
	return string(s[:most]) + "…"
}
