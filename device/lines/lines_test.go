package lines

import (
	"errors"
	"math"
	"reflect"
	"testing"
)

const heron = "EM {emission} nm W {width} nm S {strength} %"

func compile(t testing.TB, text string) *Pattern {
	t.Helper()
	p, err := Compile(text)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func same(a, b []float64) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if a[i] != b[i] && !(math.IsNaN(a[i]) && math.IsNaN(b[i])) {
			return false
		}
	}
	return true
}

var good = []struct {
	pattern, line string
	want          []float64
}{
	{heron, "EM 265.31 nm W 4.2 nm S 1.75 %", []float64{265.31, 4.2, 1.75}},
	{heron, "  EM   265.31 nm\tW 4.2 nm S 1.75 % ", []float64{265.31, 4.2, 1.75}},
	{heron, "EM --- nm W --- nm S 0.02 %", []float64{math.NaN(), math.NaN(), 0.02}},
	{heron, "EM nan nm W 9.91E37 nm S 0 %", []float64{math.NaN(), math.NaN(), 0}},
	{"{p}", "-1.5e-3", []float64{-1.5e-3}},
	{"P={p}bar", "P=2.385bar", []float64{2.385}},
	{"P={p}bar", "P= 2.385 bar", []float64{2.385}},
	{"{_};{p};{t}", "12:30:01;2.385;22.7", []float64{2.385, 22.7}},
	{"T {_} P {p}", "T 12:30:01 P 3", []float64{3}},
	{"{{{p}}}", "{7}", []float64{7}},
	{"SP {n} : {counts...}", "SP 3 : 1, 2;3", []float64{3, 1, 2, 3}},
	{"SP {n} : {counts...}", "SP 3 : 1 2 3", []float64{3, 1, 2, 3}},
	{"SP {counts...} END {n}", "SP 1 2 3 END 3", []float64{3, 1, 2, 3}},
	{"{counts...}", "", []float64{}},
}

func TestParse(t *testing.T) {
	for _, c := range good {
		got, err := compile(t, c.pattern).Parse(nil, []byte(c.line))
		if c.want == nil {
			if err == nil {
				t.Errorf("%q on %q read as %v", c.pattern, c.line, got)
			}
			continue
		}
		if err != nil || !same(got, c.want) {
			t.Errorf("%q on %q = %v, %v; want %v", c.pattern, c.line, got, err, c.want)
		}
	}
}

func TestWrittenLinesReadTheSame(t *testing.T) {
	for _, c := range good {
		if c.want == nil {
			continue
		}
		p := compile(t, c.pattern)
		line, err := p.Append(nil, c.want)
		if err != nil {
			t.Fatal(err)
		}
		got, err := p.Parse(nil, line)
		if err != nil || !same(got, c.want) {
			t.Errorf("%v written as %q read as %v, %v", c.want, line, got, err)
		}
	}
}

func TestRefusedLines(t *testing.T) {
	p := compile(t, heron)
	for _, line := range []string{
		"", "EM", "EM 265.31 nm W 4.2 nm S 1.75", "EM 265.31 nm W 4.2 nm S 1.75 % x", "em 265.31 nm W 4.2 nm S 1.75 %",
		"EM 265,31 nm W 4.2 nm S 1.75 %", "EM 2 65.31 nm W 4.2 nm S 1.75 %", "EM - nm W 4.2 nm S 1 %", "EM inf nm W 4.2 nm S 1 %",
		"EM 0x1p3 nm W 4.2 nm S 1 %", "EM 1e999 nm W 4.2 nm S 1 %", "31 nm W 4.2 nm S 1.75 %",
	} {
		got, err := p.Parse(nil, []byte(line))
		if err == nil || !errors.Is(err, ErrLine) {
			t.Errorf("%q read as %v, %v", line, got, err)
		}
	}
	list := compile(t, "SP {counts...}")
	for _, line := range []string{"SP 1,,2", "SP 1,", "SP ,1", "SP 1 x"} {
		if got, err := list.Parse(nil, []byte(line)); err == nil {
			t.Errorf("%q read as %v", line, got)
		}
	}
}

func TestRefusedPatterns(t *testing.T) {
	for _, text := range []string{"", "P", "{", "P {p", "p}", "{p}{q}", "{p} {p}", "{a b}", "{}", "{_}", "{_...}", "{p}\n", "{a...} {b...}", "{a...} {b}"} {
		if p, err := Compile(text); err == nil {
			t.Errorf("%q compiled to %+v", text, p)
		}
	}
}

func TestNames(t *testing.T) {
	p := compile(t, heron)
	if want := []string{"emission", "width", "strength"}; !reflect.DeepEqual(p.Names(), want) {
		t.Errorf("names %q, want %q", p.Names(), want)
	}
	if i, ok := p.Field("width"); !ok || i != 1 {
		t.Errorf("width stands at %d, %v", i, ok)
	}
}

func TestChecksums(t *testing.T) {
	for _, c := range []struct {
		sum    Checksum
		line   string
		sealed string
		source string
	}{
		{XOR8, "P 200000", "P 200000*72", "0x50 ^ 0x20 ^ 0x32 ^ 0x30 (five zeros cancel to one), by hand"},
		{CRC16, "123456789", "123456789*4B37", "check value of CRC-16/MODBUS, catalogue of parametrised CRC algorithms"},
		{NoChecksum, "P 200000", "P 200000", ""},
	} {
		if got := c.sum.Seal([]byte(c.line), 0); string(got) != c.sealed {
			t.Errorf("%v of %q = %q, want %q (%s)", c.sum, c.line, got, c.sealed, c.source)
		}
		got, err := c.sum.Open([]byte(c.sealed))
		if err != nil || string(got) != c.line {
			t.Errorf("%v opens %q as %q, %v", c.sum, c.sealed, got, err)
		}
	}
	for _, line := range []string{"P 200000", "P 200000*", "P 200000*4", "P 200000*43", "P 200000*042", "P 200000*4g"} {
		if got, err := XOR8.Open([]byte(line)); err == nil {
			t.Errorf("%q opened as %q", line, got)
		}
	}
}

// CRC16 refuses one and two wrong bits anywhere in the line, XOR8 one. A bit
// that makes a line end of a character cuts the line before it comes here.
func TestBitErrorsAreRefused(t *testing.T) {
	for _, sum := range []Checksum{XOR8, CRC16} {
		line := sum.Seal([]byte("EM 265.31 nm W 4.2 nm S 1.75 %"), 0)
		bad := make([]byte, len(line))
		for i := range 8 * len(line) {
			for j := i; j < 8*len(line); j++ {
				if j != i && sum == XOR8 {
					break
				}
				copy(bad, line)
				bad[i/8] ^= 1 << (i % 8)
				if j != i {
					bad[j/8] ^= 1 << (j % 8)
				}
				if got, err := sum.Open(bad); err == nil {
					t.Fatalf("%v: %q opened as %q", sum, bad, got)
				}
			}
		}
	}
}

func TestParseAllocatesNothing(t *testing.T) {
	p, line, dst := compile(t, heron), []byte("EM 265.31 nm W 4.2 nm S 1.75 %"), make([]float64, 0, 4)
	if n := testing.AllocsPerRun(100, func() {
		if _, err := p.Parse(dst, line); err != nil {
			t.Fatal(err)
		}
	}); n != 0 {
		t.Errorf("%v allocations a line", n)
	}
}

func FuzzParse(f *testing.F) {
	for _, c := range good {
		f.Add(c.pattern, []byte(c.line))
	}
	f.Fuzz(func(t *testing.T, pattern string, line []byte) {
		p, err := Compile(pattern)
		if err != nil {
			return
		}
		got, err := p.Parse(nil, line)
		if err != nil {
			return
		}
		again, err := p.Append(nil, got)
		if err != nil {
			t.Fatalf("%q on %q = %v, which cannot be written: %v", pattern, line, got, err)
		}
		back, err := p.Parse(nil, again)
		if err != nil || !same(back, got) {
			t.Fatalf("%q on %q = %v, written as %q, read as %v (%v)", pattern, line, got, again, back, err)
		}
	})
}

func BenchmarkParse(b *testing.B) {
	p, line, dst := compile(b, heron), []byte("EM 265.31 nm W 4.2 nm S 1.75 %"), make([]float64, 0, 4)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := p.Parse(dst, line); err != nil {
			b.Fatal(err)
		}
	}
}
