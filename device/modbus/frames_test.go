package modbus

import (
	"bytes"
	"encoding/hex"
	"math"
	"reflect"
	"strings"
	"testing"
	"time"
)

func unhex(t testing.TB, text string) []byte {
	t.Helper()
	p, err := hex.DecodeString(strings.ReplaceAll(text, " ", ""))
	if err != nil {
		t.Fatalf("%q: %v", text, err)
	}
	return p
}

func TestCRC(t *testing.T) {
	for _, c := range []struct {
		bytes  []byte
		want   uint16
		source string
	}{
		{[]byte{0x02, 0x07}, 0x1241, "MODBUS over Serial Line V1.02, appendix B example, p. 41"},
		{[]byte("123456789"), 0x4B37, "check value of CRC-16/MODBUS, catalogue of parametrised CRC algorithms"},
	} {
		if got := CRC(c.bytes); got != c.want {
			t.Errorf("CRC(% X) = %04X, want %04X (%s)", c.bytes, got, c.want, c.source)
		}
	}
}

// The messages are the examples of MODBUS Application Protocol V1.1b3,
// sections 6.3, 6.4, 6.6, 6.12 and 7; units and CRCs as in published captures.
var requests = []struct {
	frame string
	want  Request
}{
	{"11 03 00 6B 00 03 76 87", Request{Unit: 17, Function: ReadHolding, Address: 0x6B, Count: 3}},
	{"11 04 00 08 00 01 B2 98", Request{Unit: 17, Function: ReadInput, Address: 8, Count: 1}},
	{"11 06 00 01 00 03 9A 9B", Request{Unit: 17, Function: WriteSingle, Address: 1, Values: []uint16{3}}},
	{"11 10 00 01 00 02 04 00 0A 01 02 C6 F0", Request{Unit: 17, Function: WriteMultiple, Address: 1, Values: []uint16{0x0A, 0x0102}}},
	{"01 03 00 00 00 02 C4 0B", Request{Unit: 1, Function: ReadHolding, Count: 2}},
}

var replies = []struct {
	frame string
	want  Reply
}{
	{"11 03 06 02 2B 00 00 00 64 C8 BA", Reply{Unit: 17, Function: ReadHolding, Values: []uint16{555, 0, 100}}},
	{"11 03 06 AE 41 56 52 43 40 49 AD", Reply{Unit: 17, Function: ReadHolding, Values: []uint16{0xAE41, 0x5652, 0x4340}}},
	{"11 04 02 00 0A F8 F4", Reply{Unit: 17, Function: ReadInput, Values: []uint16{10}}},
	{"11 06 00 01 00 03 9A 9B", Reply{Unit: 17, Function: WriteSingle, Address: 1, Values: []uint16{3}}},
	{"11 10 00 01 00 02 12 98", Reply{Unit: 17, Function: WriteMultiple, Address: 1, Count: 2}},
	{"11 83 02 C1 34", Reply{Unit: 17, Function: ReadHolding, Exception: IllegalAddress}},
	{"11 84 02 C3 04", Reply{Unit: 17, Function: ReadInput, Exception: IllegalAddress}},
	{"11 86 03 03 A4", Reply{Unit: 17, Function: WriteSingle, Exception: IllegalValue}},
	{"11 90 03 0D C4", Reply{Unit: 17, Function: WriteMultiple, Exception: IllegalValue}},
	{"0A 81 02 B0 53", Reply{Unit: 10, Function: 1, Exception: IllegalAddress}},
	{"01 03 04 41 C8 00 00 6F F1", Reply{Unit: 1, Function: ReadHolding, Values: []uint16{0x41C8, 0}}},
}

func TestRequestsOfTheSpecification(t *testing.T) {
	for _, c := range requests {
		frame := unhex(t, c.frame)
		got, err := DecodeRequestRTU(frame)
		if err != nil || !reflect.DeepEqual(got, c.want) {
			t.Errorf("%s read as %+v, %v; want %+v", c.frame, got, err, c.want)
		}
		made, err := AppendRequestRTU(nil, c.want)
		if err != nil || !bytes.Equal(made, frame) {
			t.Errorf("%+v written as % X, %v; want %s", c.want, made, err, c.frame)
		}
		if n := RequestSizeRTU(frame[:min(7, len(frame))]); n != len(frame) {
			t.Errorf("%s announces %d bytes, has %d", c.frame, n, len(frame))
		}
	}
}

func TestRepliesOfTheSpecification(t *testing.T) {
	for _, c := range replies {
		frame := unhex(t, c.frame)
		got, err := DecodeReplyRTU(frame)
		if err != nil || !reflect.DeepEqual(got, c.want) {
			t.Errorf("%s read as %+v, %v; want %+v", c.frame, got, err, c.want)
		}
		made, err := AppendReplyRTU(nil, c.want)
		if err != nil || !bytes.Equal(made, frame) {
			t.Errorf("%+v written as % X, %v; want %s", c.want, made, err, c.frame)
		}
		if n := ReplySizeRTU(frame[:3]); n != len(frame) {
			t.Errorf("%s announces %d bytes, has %d", c.frame, n, len(frame))
		}
	}
}

func TestTCPFrame(t *testing.T) {
	// Transaction, protocol 0, length, unit, message: MODBUS Messaging on
	// TCP/IP V1.0b, section 3.1.3; the message is that of V1.1b3, section 6.3.
	want := unhex(t, "15 01 00 00 00 06 FF 03 00 6B 00 03")
	req := Request{Unit: 0xFF, Function: ReadHolding, Address: 0x6B, Count: 3}
	got, err := AppendRequestTCP(nil, 0x1501, req)
	if err != nil || !bytes.Equal(got, want) {
		t.Fatalf("written as % X, %v; want % X", got, err, want)
	}
	transaction, again, err := DecodeRequestTCP(want)
	if err != nil || transaction != 0x1501 || !reflect.DeepEqual(again, req) {
		t.Errorf("read as %04X %+v, %v", transaction, again, err)
	}
	for _, c := range replies {
		frame, err := AppendReplyTCP(nil, 7, c.want)
		if err != nil {
			t.Fatal(err)
		}
		transaction, got, err := DecodeReplyTCP(frame)
		if err != nil || transaction != 7 || !reflect.DeepEqual(got, c.want) || SizeTCP(frame[:6]) != len(frame) {
			t.Errorf("% X read as %d %+v, %v", frame, transaction, got, err)
		}
	}
}

// The layouts follow from IEEE 754 single precision; the standard of Modbus
// does not define an order of words.
func TestWordOrders(t *testing.T) {
	for _, c := range []struct {
		value  float64
		layout [4][2]uint16 // ABCD, CDAB, BADC, DCBA
	}{
		{1.0, [4][2]uint16{{0x3F80, 0}, {0, 0x3F80}, {0x803F, 0}, {0, 0x803F}}},
		{123456, [4][2]uint16{{0x47F1, 0x2000}, {0x2000, 0x47F1}, {0xF147, 0x0020}, {0x0020, 0xF147}}},
		{-0.5, [4][2]uint16{{0xBF00, 0}, {0, 0xBF00}, {0x00BF, 0}, {0, 0x00BF}}},
		{float64(float32(101.325)), [4][2]uint16{{0x42CA, 0xA666}, {0xA666, 0x42CA}, {0xCA42, 0x66A6}, {0x66A6, 0xCA42}}},
		{1013.25, [4][2]uint16{{0x447D, 0x5000}, {0x5000, 0x447D}, {0x7D44, 0x0050}, {0x0050, 0x7D44}}},
	} {
		for o, words := range c.layout {
			got, err := Float32.Decode(Order(o), words[:])
			if err != nil || got != c.value {
				t.Errorf("%04X as %v = %v, %v; want %v", words, Order(o), got, err, c.value)
			}
			made, err := Float32.Encode(nil, Order(o), c.value)
			if err != nil || made[0] != words[0] || made[1] != words[1] {
				t.Errorf("%v as %v = %04X, %v; want %04X", c.value, Order(o), made, err, words)
			}
		}
	}
}

func TestIntegerFormats(t *testing.T) {
	for _, c := range []struct {
		f     Format
		o     Order
		v     float64
		words []uint16
	}{
		{Uint16, ABCD, 40000, []uint16{40000}},
		{Int16, ABCD, -2, []uint16{0xFFFE}},
		{Int16, BADC, -2, []uint16{0xFEFF}},
		{Uint32, CDAB, 70000, []uint16{0x1170, 0x0001}},
		{Int32, ABCD, -70000, []uint16{0xFFFE, 0xEE90}},
	} {
		got, err := c.f.Decode(c.o, c.words)
		if err != nil || got != c.v {
			t.Errorf("%v %v %04X = %v, %v; want %v", c.f, c.o, c.words, got, err, c.v)
		}
		made, err := c.f.Encode(nil, c.o, c.v)
		if err != nil || !reflect.DeepEqual(made, c.words) {
			t.Errorf("%v %v %v = %04X, %v; want %04X", c.f, c.o, c.v, made, err, c.words)
		}
	}
}

func TestNumbersThatAreRefused(t *testing.T) {
	for name, words := range map[string][]uint16{
		"NaN": {0x7FC0, 0}, "infinity": {0xFF80, 0}, "denormal": {0, 0x3F80}, "one word": {1},
	} {
		if v, err := Float32.Decode(ABCD, words); err == nil {
			t.Errorf("%s: %04X read as %v", name, words, v)
		}
	}
	for _, c := range []struct {
		f Format
		v float64
	}{{Uint16, -1}, {Uint16, 65536}, {Int16, 40000}, {Uint32, -1}, {Int32, 3e9}, {Float32, 1e39}, {Float32, math.NaN()}, {Int16, math.NaN()}} {
		if words, err := c.f.Encode(nil, ABCD, c.v); err == nil {
			t.Errorf("%v encoded %v as %04X", c.f, c.v, words)
		}
	}
}

func TestAnswers(t *testing.T) {
	req := Request{Unit: 1, Function: ReadInput, Address: 4, Count: 2}
	for _, c := range []struct {
		name  string
		reply Reply
		want  string
	}{
		{"right", Reply{Unit: 1, Function: ReadInput, Values: []uint16{1, 2}}, ""},
		{"other unit", Reply{Unit: 2, Function: ReadInput, Values: []uint16{1, 2}}, "unit 2"},
		{"other function", Reply{Unit: 1, Function: ReadHolding, Values: []uint16{1, 2}}, "function 3"},
		{"other length", Reply{Unit: 1, Function: ReadInput, Values: []uint16{1}}, "1 registers"},
		{"exception", Reply{Unit: 1, Function: ReadInput, Exception: DeviceBusy}, "busy"},
	} {
		err := c.reply.Answers(req)
		if c.want == "" && err != nil || c.want != "" && (err == nil || !strings.Contains(err.Error(), c.want)) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
	}
	write := Request{Unit: 1, Function: WriteSingle, Address: 4, Values: []uint16{9}}
	if err := (Reply{Unit: 1, Function: WriteSingle, Address: 5, Values: []uint16{9}}).Answers(write); err == nil {
		t.Error("echo of another register accepted")
	}
}

func TestSilence(t *testing.T) {
	for _, c := range []struct {
		baud int
		want time.Duration
	}{ // 11 bits a character; V1.02, section 2.5.1.1
		{1200, 32083 * time.Microsecond}, {9600, 4010 * time.Microsecond}, {19200, 2005 * time.Microsecond},
		{38400, 1750 * time.Microsecond}, {115200, 1750 * time.Microsecond},
	} {
		if got := Silence(c.baud, 11); (got - c.want).Abs() > time.Microsecond {
			t.Errorf("%d baud: %v, want %v", c.baud, got, c.want)
		}
	}
}

// Every error of one or two bits in a frame is refused.
func TestBitErrorsAreRefused(t *testing.T) {
	for _, c := range replies {
		everyBitError(unhex(t, c.frame), func(bad []byte) {
			if r, err := DecodeReplyRTU(bad); err == nil {
				t.Fatalf("% X, damaged from %s, read as %+v", bad, c.frame, r)
			}
		})
	}
	for _, c := range requests {
		everyBitError(unhex(t, c.frame), func(bad []byte) {
			if r, err := DecodeRequestRTU(bad); err == nil {
				t.Fatalf("% X, damaged from %s, read as %+v", bad, c.frame, r)
			}
		})
	}
}

func everyBitError(frame []byte, try func([]byte)) {
	bits := 8 * len(frame)
	bad := make([]byte, len(frame))
	for i := range bits {
		for j := i; j < bits; j++ {
			copy(bad, frame)
			bad[i/8] ^= 1 << (i % 8)
			if j != i {
				bad[j/8] ^= 1 << (j % 8)
			}
			try(bad)
		}
	}
}
