package scpi

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// ErrSyntax is wrapped by every refusal of text.
var ErrSyntax = errors.New("not valid scpi")

// What stands for values that are none (SCPI-99, volume 1, section 7.2.1).
const (
	notANumber = 9.91e37
	infinity   = 9.9e37
)

// ParseNumber reads an NR1, NR2 or NR3 number (IEEE 488.2, section 8.7) such
// as "-100", "12.5" or "1.25E+01". In every spelling 9.91E37 is NaN, and
// 9.9E37 and -9.9E37 are infinities. Blanks round the number are allowed.
func ParseNumber(text string) (float64, error) {
	text = strings.Trim(text, " \t")
	if !isNumber(text) {
		return 0, fmt.Errorf("%q is %w: expected a number such as 12.5 or 1.25E+01", clip(text), ErrSyntax)
	}
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return 0, fmt.Errorf("%q is %w: too large a number", clip(text), ErrSyntax)
	}
	switch {
	case near(v, notANumber):
		return math.NaN(), nil
	case near(math.Abs(v), infinity):
		return math.Copysign(math.Inf(1), v), nil
	}
	return v, nil
}

// near allows for an instrument that computes in single precision.
func near(v, mark float64) bool { return math.Abs(v-mark) <= 1e-5*mark }

// isNumber tells NRf text from what strconv reads beyond it, such as "inf",
// "0x10" or "1_000".
func isNumber(s string) bool {
	i, digits := 0, 0
	if i < len(s) && (s[i] == '+' || s[i] == '-') {
		i++
	}
	for ; i < len(s) && isDigit(s[i]); i++ {
		digits++
	}
	if i < len(s) && s[i] == '.' {
		for i++; i < len(s) && isDigit(s[i]); i++ {
			digits++
		}
	}
	if digits == 0 {
		return false
	}
	if i < len(s) && (s[i] == 'E' || s[i] == 'e') {
		i++
		if i < len(s) && (s[i] == '+' || s[i] == '-') {
			i++
		}
		start := i
		for i < len(s) && isDigit(s[i]) {
			i++
		}
		if i == start {
			return false
		}
	}
	return i == len(s)
}

func isDigit(c byte) bool { return c >= '0' && c <= '9' }

// AppendNumber appends v as text that ParseNumber reads as v again: NR2 where
// that is short, else NR3. NaN and infinities become their stand-ins.
func AppendNumber(dst []byte, v float64) []byte {
	switch {
	case math.IsNaN(v):
		return append(dst, "9.91E37"...)
	case math.IsInf(v, 0):
		if v < 0 {
			dst = append(dst, '-')
		}
		return append(dst, "9.9E37"...)
	}
	if a := math.Abs(v); a != 0 && (a < 1e-4 || a >= 1e15) {
		return strconv.AppendFloat(dst, v, 'E', -1, 64)
	}
	return strconv.AppendFloat(dst, v, 'f', -1, 64)
}

// ParseNumbers reads numbers separated by commas, appending them to dst.
func ParseNumbers(dst []float64, text string) ([]float64, error) {
	for item := range strings.SplitSeq(text, ",") {
		v, err := ParseNumber(item)
		if err != nil {
			return dst, err
		}
		dst = append(dst, v)
	}
	return dst, nil
}

// ParseBool reads a response of 0 or 1 (SCPI-99, volume 1, section 7.3).
func ParseBool(text string) (bool, error) {
	switch strings.Trim(text, " \t") {
	case "0":
		return false, nil
	case "1":
		return true, nil
	}
	return false, fmt.Errorf("%q is %w: expected 0 or 1", clip(text), ErrSyntax)
}

func clip(s string) string {
	const most = 60
	if len(s) <= most {
		return s
	}
	return s[:most] + "…"
}
