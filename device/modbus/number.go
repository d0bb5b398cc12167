package modbus

import (
	"errors"
	"fmt"
	"math"
)

// ErrNumber is wrapped where registers hold no usable number, or a number
// does not fit in registers.
var ErrNumber = errors.New("not a number")

// Format is how registers hold a number.
type Format uint8

const (
	Uint16 Format = iota
	Int16
	Uint32
	Int32
	Float32 // IEEE 754 single
)

var formatText = [...]string{"uint16", "int16", "uint32", "int32", "float32"}

// ParseFormat returns the format that text names.
func ParseFormat(text string) (Format, error) {
	for i, t := range formatText {
		if t == text {
			return Format(i), nil
		}
	}
	return 0, fmt.Errorf("format %q: expected one of %q", text, formatText)
}

// String returns the name of f as ParseFormat takes it.
func (f Format) String() string { return formatText[f] }

// Registers returns how many registers a number of this format fills.
func (f Format) Registers() int {
	if f <= Int16 {
		return 1
	}
	return 2
}

// Order is the order in which the bytes of a number lie on the wire, A the
// most significant. The standard fixes the order of bytes in one register
// only, so instruments differ.
type Order uint8

const (
	ABCD Order = iota // as the standard orders bytes
	CDAB              // words swapped
	BADC              // bytes swapped in each word
	DCBA              // both
)

var orderText = [...]string{"ABCD", "CDAB", "BADC", "DCBA"}

// ParseOrder returns the order that text names.
func ParseOrder(text string) (Order, error) {
	for i, t := range orderText {
		if t == text {
			return Order(i), nil
		}
	}
	return 0, fmt.Errorf("order %q: expected one of %q", text, orderText)
}

// String returns the name of o as ParseOrder takes it.
func (o Order) String() string { return orderText[o] }

func (o Order) wordsSwapped() bool { return o == CDAB || o == DCBA }

// inWord undoes or makes the order of the bytes in one register.
func (o Order) inWord(w uint16) uint16 {
	if o == BADC || o == DCBA {
		return w<<8 | w>>8
	}
	return w
}

// Decode reads one number from exactly f.Registers() registers. NaN, an
// infinity and a denormal, which is what a wrong order of words often looks
// like, are refused.
func (f Format) Decode(o Order, registers []uint16) (float64, error) {
	if len(registers) != f.Registers() {
		return 0, fmt.Errorf("%d registers for %v, expected %d: %w", len(registers), f, f.Registers(), ErrNumber)
	}
	w := o.inWord(registers[0])
	if f == Uint16 {
		return float64(w), nil
	}
	if f == Int16 {
		return float64(int16(w)), nil
	}
	hi, lo := w, o.inWord(registers[1])
	if o.wordsSwapped() {
		hi, lo = lo, hi
	}
	bits := uint32(hi)<<16 | uint32(lo)
	switch f {
	case Uint32:
		return float64(bits), nil
	case Int32:
		return float64(int32(bits)), nil
	}
	v := float64(math.Float32frombits(bits))
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return 0, fmt.Errorf("registers %04X hold %v: %w", registers, v, ErrNumber)
	}
	if v != 0 && math.Abs(v) < 0x1p-126 {
		return 0, fmt.Errorf("registers %04X hold %g, which no instrument means; is the order %v right?: %w", registers, v, o, ErrNumber)
	}
	return v, nil
}

// Encode appends the registers of v to dst. An integer format rounds v to the
// nearest and refuses what does not fit; Float32 refuses what overflows.
func (f Format) Encode(dst []uint16, o Order, v float64) ([]uint16, error) {
	var bits uint32
	switch r := math.Round(v); f {
	case Uint16:
		if !(r >= 0 && r <= math.MaxUint16) {
			return dst, fmt.Errorf("%g does not fit %v: %w", v, f, ErrNumber)
		}
		return append(dst, o.inWord(uint16(r))), nil
	case Int16:
		if !(r >= math.MinInt16 && r <= math.MaxInt16) {
			return dst, fmt.Errorf("%g does not fit %v: %w", v, f, ErrNumber)
		}
		return append(dst, o.inWord(uint16(int16(r)))), nil
	case Uint32:
		if !(r >= 0 && r <= math.MaxUint32) {
			return dst, fmt.Errorf("%g does not fit %v: %w", v, f, ErrNumber)
		}
		bits = uint32(r)
	case Int32:
		if !(r >= math.MinInt32 && r <= math.MaxInt32) {
			return dst, fmt.Errorf("%g does not fit %v: %w", v, f, ErrNumber)
		}
		bits = uint32(int32(r))
	default:
		single := float32(v)
		if math.IsNaN(v) || math.IsInf(float64(single), 0) {
			return dst, fmt.Errorf("%g does not fit %v: %w", v, f, ErrNumber)
		}
		bits = math.Float32bits(single)
	}
	hi, lo := o.inWord(uint16(bits>>16)), o.inWord(uint16(bits))
	if o.wordsSwapped() {
		hi, lo = lo, hi
	}
	return append(dst, hi, lo), nil
}
