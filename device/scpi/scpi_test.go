package scpi

import (
	"errors"
	"math"
	"reflect"
	"testing"
)

func TestNumbers(t *testing.T) {
	for _, c := range []struct {
		text string
		want float64
	}{ // forms of IEEE 488.2, sections 8.7.2 to 8.7.4
		{"-100", -100}, {"+7", 7}, {"12.5", 12.5}, {".5", 0.5}, {"5.", 5}, {"1.25E+01", 12.5}, {"1.25e1", 12.5}, {" 2.385 ", 2.385},
		{"-3.0E-3", -0.003}, {"0", 0},
	} {
		if got, err := ParseNumber(c.text); err != nil || got != c.want {
			t.Errorf("%q = %v, %v; want %v", c.text, got, err, c.want)
		}
	}
}

// SCPI-99, volume 1, section 7.2.1: values of the stand-ins.
func TestStandInsAreNeverNumbers(t *testing.T) {
	for _, text := range []string{"9.91E37", "9.91000E+37", "9.910000e+37", "+9.91E37", "99.1E36", "9.90999987E+37"} {
		if got, err := ParseNumber(text); err != nil || !math.IsNaN(got) {
			t.Errorf("%q = %v, %v; want NaN", text, got, err)
		}
	}
	for text, sign := range map[string]int{"9.9E37": 1, "9.90000E+37": 1, "-9.9E37": -1} {
		if got, err := ParseNumber(text); err != nil || !math.IsInf(got, sign) {
			t.Errorf("%q = %v, %v; want infinity of sign %d", text, got, err, sign)
		}
	}
}

func TestRefusedNumbers(t *testing.T) {
	for _, text := range []string{"", "-", ".", "E5", "1E", "1E+", "nan", "inf", "0x10", "1_000", "1,5", "3.1 bar", "1e999", "--1"} {
		if got, err := ParseNumber(text); err == nil || !errors.Is(err, ErrSyntax) {
			t.Errorf("%q read as %v, %v", text, got, err)
		}
	}
}

func TestMessages(t *testing.T) {
	for _, c := range []struct {
		line string
		want []Unit
	}{
		{"*IDN?", []Unit{{Header: "*IDN", Query: true}}},
		{"SOUR:PRES:LEV 3.1", []Unit{{Header: "SOUR:PRES:LEV", Args: []string{"3.1"}}}},
		{":SOUR:PRES:LEV 3.1;MODE?", []Unit{{Header: "SOUR:PRES:LEV", Args: []string{"3.1"}}, {Header: "SOUR:PRES:MODE", Query: true}}},
		{"SOUR:PRES:LEV 3.1;*OPC?;MODE HOLD", []Unit{{Header: "SOUR:PRES:LEV", Args: []string{"3.1"}}, {Header: "*OPC", Query: true}, {Header: "SOUR:PRES:MODE", Args: []string{"HOLD"}}}},
		{`DISP:TEXT "a;b", 2`, []Unit{{Header: "DISP:TEXT", Args: []string{`"a;b"`, "2"}}}},
	} {
		got, err := ParseMessage(c.line)
		if err != nil || !reflect.DeepEqual(got, c.want) {
			t.Errorf("%q = %+v, %v; want %+v", c.line, got, err, c.want)
		}
	}
	for _, line := range []string{"", ";", "?", ":", "SOUR::LEV", "3:4", "SOUR:PRES:"} {
		if got, err := ParseMessage(line); err == nil {
			t.Errorf("%q read as %+v", line, got)
		}
	}
}

// SCPI-99, volume 1, section 6.2: the short and the long form, any case,
// nothing in between.
func TestShortAndLongForm(t *testing.T) {
	for header, want := range map[string]bool{
		"SOUR:PRES:LEV": true, "source:pressure:level": true, "SOURCE:PRES:LEVEL": true,
		"SOURC:PRES:LEV": false, "SOU:PRES:LEV": false, "SOUR:PRES": false, "SOUR:PRES:LEVELS": false,
	} {
		if got := (Unit{Header: header}).Matches("SOURce:PRESsure:LEVel"); got != want {
			t.Errorf("%q matches: %v, want %v", header, got, want)
		}
	}
}

func TestErrorQueue(t *testing.T) {
	for line, want := range map[string]Error{
		`0,"No error"`:                     NoError,
		`-113,"Undefined header"`:          UndefinedHeader,
		`-222, "Data out of range;LEV 99"`: {-222, "Data out of range;LEV 99"},
		`101,"says ""no"""`:                {101, `says "no"`},
		"+0,\"No error\"\r\n":              NoError,
	} {
		got, err := ParseError(line)
		if err != nil || got != want {
			t.Errorf("%q = %+v, %v; want %+v", line, got, err, want)
		}
		if again, err := ParseError(got.Line()); err != nil || again != got {
			t.Errorf("%q came back as %+v, %v", got.Line(), again, err)
		}
	}
	for _, line := range []string{"", "0", "0,No error", `x,"y"`, `1,"a"b"`, `70000,"x"`, `0,"`} {
		if got, err := ParseError(line); err == nil {
			t.Errorf("%q read as %+v", line, got)
		}
	}
}

// SCPI-99, volume 2, section 21.8: when the queue is full the last entry is
// replaced.
func TestQueueOverflow(t *testing.T) {
	var q Queue
	for i := range queueLength + 3 {
		q.Push(Error{i + 1, "x"})
	}
	for i := range queueLength - 1 {
		if e := q.Pop(); e.Code != i+1 {
			t.Fatalf("entry %d is %+v", i, e)
		}
	}
	if e := q.Pop(); e != QueueOverflow {
		t.Errorf("last entry is %+v", e)
	}
	if e := q.Pop(); e != NoError {
		t.Errorf("empty queue gives %+v", e)
	}
}

func TestIdentity(t *testing.T) {
	const line = "Heron,PC-2,0042,1.3"
	id, err := ParseIdentity(line)
	if err != nil || id.Model != "PC-2" || id.String() != line {
		t.Errorf("%+v, %v", id, err)
	}
	if _, err := ParseIdentity("3.14"); err == nil {
		t.Error("a number was read as an identity")
	}
}

func FuzzParseNumber(f *testing.F) {
	for _, s := range []string{"-100", "12.5", "1.25E+01", "9.91E37", "-9.9E37", "1e-400"} {
		if _, err := ParseNumber(s); err != nil {
			f.Fatalf("seed %q: %v", s, err)
		}
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, text string) {
		v, err := ParseNumber(text)
		if err != nil {
			return
		}
		again, err := ParseNumber(string(AppendNumber(nil, v)))
		if err != nil || again != v && !(math.IsNaN(again) && math.IsNaN(v)) {
			t.Fatalf("%q read as %v, then as %v (%v)", text, v, again, err)
		}
	})
}

func FuzzParseMessage(f *testing.F) {
	for _, s := range []string{"*IDN?", ":SOUR:PRES:LEV 3.1;MODE?", `DISP:TEXT "a;b", 2`} {
		if _, err := ParseMessage(s); err != nil {
			f.Fatalf("seed %q: %v", s, err)
		}
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, line string) {
		units, err := ParseMessage(line)
		if err != nil {
			return
		}
		for _, u := range units {
			again, err := ParseMessage(u.String())
			if err != nil || len(again) != 1 || !reflect.DeepEqual(again[0], u) {
				t.Fatalf("%q has %+v, which came back as %+v (%v)", line, u, again, err)
			}
		}
	})
}

func FuzzParseError(f *testing.F) {
	for _, s := range []string{`0,"No error"`, `-113,"Undefined header"`, `101,"says ""no"""`} {
		if _, err := ParseError(s); err != nil {
			f.Fatalf("seed %q: %v", s, err)
		}
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, line string) {
		e, err := ParseError(line)
		if err != nil {
			return
		}
		if again, err := ParseError(e.Line()); err != nil || again != e {
			t.Fatalf("%q read as %+v, then as %+v (%v)", line, e, again, err)
		}
	})
}
