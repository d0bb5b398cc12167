package logbook

import (
	"encoding/json"
	"errors"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"barline/model/reading"
)

var testStart = time.Date(2026, 12, 1, 11, 42, 5, 123456000, time.UTC)

func stampAt(d time.Duration) reading.Stamp {
	return reading.Stamp{UTC: testStart.Add(d), Mono: d}
}

func collect(t *testing.T, dir string, f Filter) (records []Record, damage []*Damage) {
	t.Helper()
	for r, err := range Records(dir, f) {
		if err == nil {
			records = append(records, r)
			continue
		}
		d := AsDamage(err)
		if d == nil {
			t.Fatal(err)
		}
		damage = append(damage, d)
	}
	return records, damage
}

func sound(t *testing.T, dir string) Report {
	t.Helper()
	r, err := Verify(dir, true)
	if err != nil {
		t.Fatal(err)
	}
	for _, d := range r.Damage {
		t.Errorf("damage: %v", d)
	}
	return r
}

func TestAppendAndReadBack(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "book")
	for run := range 3 {
		b, err := Open(dir, Options{})
		if err != nil {
			t.Fatal(err)
		}
		for i := range 5 {
			seq, err := b.Append(stampAt(time.Duration(i)*time.Second), "reading",
				reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Value: 901325.5 + float64(i), Status: reading.Good})
			if want := uint64(run*6 + i + 1); err != nil || seq != want {
				t.Fatalf("record %d, %v, expected %d", seq, err, want)
			}
		}
		if _, err := b.Append(stampAt(5*time.Second), "note", map[string]string{"text": "a \"quoted\"\nline µ"}); err != nil {
			t.Fatal(err)
		}
		if err := b.Sync(); err != nil {
			t.Fatal(err)
		}
		if h := b.Health(); !h.Writing || h.Written != 6 || h.Waiting != 0 || h.Lost != 0 {
			t.Errorf("health %+v", h)
		}
		if err := b.Close(); err != nil {
			t.Fatal(err)
		}
	}
	if r := sound(t, dir); r.Records != 18 || len(r.Segments) != 3 {
		t.Errorf("%d records in %d segments, expected 18 in 3", r.Records, len(r.Segments))
	}
	records, _ := collect(t, dir, Filter{Kinds: []string{"note"}})
	var note struct{ Text string }
	if len(records) != 3 || records[2].Decode(&note) != nil || note.Text != "a \"quoted\"\nline µ" {
		t.Errorf("notes %+v", records)
	}
	records, _ = collect(t, dir, Filter{From: testStart.Add(2 * time.Second), To: testStart.Add(4 * time.Second), After: 6})
	if len(records) != 4 || records[0].Seq != 9 || records[0].Mono != 2*time.Second || !records[0].UTC.Equal(testStart.Add(2*time.Second)) {
		t.Errorf("by time: %+v", records)
	}
}

func TestNotFiniteBecomesNull(t *testing.T) {
	dir := t.TempDir()
	b, err := Open(dir, Options{})
	if err != nil {
		t.Fatal(err)
	}
	type prediction struct {
		Pressure float64    `json:"pressure_Pa"`
		Emission float64    `json:"emission_m"`
		Zero     [2]float64 `json:"zero_dispersion_m"`
	}
	b.Append(stampAt(0), "reading", &reading.Reading{Channel: "x", Value: math.NaN(), Status: reading.Failure})
	b.Append(stampAt(0), "prediction", prediction{9e5, math.Inf(1), [2]float64{5e-7, math.NaN()}})
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
	sound(t, dir)
	records, _ := collect(t, dir, Filter{})
	for i, want := range []string{
		`{"channel":"x","role":"none","value":null,"status":"failure","reason":"not a finite number"}`,
		`{"emission_m":null,"not_finite":["emission_m","zero_dispersion_m[1]"],"pressure_Pa":900000,"zero_dispersion_m":[5e-7,null]}`,
	} {
		if got := string(records[i].Data); got != want {
			t.Errorf("got  %s\nwant %s", got, want)
		}
	}
}

// TestDays begins a segment with each later day, and only then: stamps overlap
// at midnight, and a clock may be set back.
func TestDays(t *testing.T) {
	dir := t.TempDir()
	b, err := Open(dir, Options{})
	if err != nil {
		t.Fatal(err)
	}
	midnight := time.Date(2026, 12, 2, 0, 0, 0, 0, time.UTC).Sub(testStart)
	for i, d := range []time.Duration{-2 * time.Second, time.Millisecond, -time.Millisecond, 2 * time.Millisecond, -24 * time.Hour, time.Second, 24 * time.Hour} {
		at := stampAt(midnight + d)
		at.Mono = time.Duration(i)
		if _, err := b.Append(at, "note", struct{}{}); err != nil {
			t.Fatal(err)
		}
	}
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
	r := sound(t, dir)
	var counts []uint64
	for _, s := range r.Segments {
		counts = append(counts, s.Records)
	}
	if !slices.Equal(counts, []uint64{1, 5, 1}) || len(r.Notices) != 1 {
		t.Errorf("records of each segment %v, expected [1 5 1]; notices %q", counts, r.Notices)
	}
}

type brokenAppender string

func (b brokenAppender) AppendJSON(dst []byte) []byte { return append(dst, b...) }

func TestAppendRefuses(t *testing.T) {
	b, err := Open(t.TempDir(), Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer b.Close()
	for _, c := range []struct {
		kind, want string
		data       any
	}{
		{"", "kind", struct{}{}},
		{"Reading", "kind", struct{}{}},
		{"seal", "itself", struct{}{}},
		{"note", "not written as a JSON object", 3},
		{"note", "not written as a JSON object", nil},
		{"note", "one JSON object", brokenAppender("{\n}")},
		{"reading", "no reading", (*reading.Reading)(nil)},
		{"note", "at most", map[string]string{"text": strings.Repeat("x", maxLine)}},
	} {
		seq, err := b.Append(stampAt(0), c.kind, c.data)
		if seq != 0 || err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q %T: %d, %v, expected an error with %q", c.kind, c.data, seq, err, c.want)
		}
	}
	if _, err := b.Append(reading.Stamp{UTC: time.Date(10000, 1, 1, 0, 0, 0, 0, time.UTC)}, "note", struct{}{}); err == nil {
		t.Error("a year of five digits was taken")
	}
	if seq, err := b.Append(stampAt(0), "note", struct{}{}); seq != 1 || err != nil {
		t.Errorf("after refusals: %d, %v", seq, err)
	}
}

func TestOpenRefuses(t *testing.T) {
	dir := t.TempDir()
	b, err := Open(dir, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := Open(dir, Options{}); !errors.Is(err, errLocked) || !strings.Contains(err.Error(), dir) {
		t.Errorf("a second writer: %v", err)
	}
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
	if _, err := b.Append(stampAt(0), "note", struct{}{}); !errors.Is(err, ErrClosed) {
		t.Errorf("append after close: %v", err)
	}
	file := filepath.Join(dir, "plain")
	if err := os.WriteFile(file, nil, 0o644); err != nil {
		t.Fatal(err)
	}
	if _, err := Open(file, Options{}); err == nil || !strings.Contains(err.Error(), file) {
		t.Errorf("a file in place of a folder: %v", err)
	}
}

func TestLinesAreJSON(t *testing.T) {
	var long []byte
	for r := rune(0); r < 0x250; r++ {
		long = append(long, string(r)...)
	}
	long = append(long, 0xff, 0xc3, '(', 0xe2, 0x80, 0xa8)
	got := AppendString(nil, string(long))
	var back string
	if err := json.Unmarshal(got, &back); err != nil {
		t.Fatal(err)
	}
	if want := strings.ToValidUTF8(strings.ReplaceAll(string(long), "\xff\xc3", "\uFFFD\uFFFD"), "?"); back != want {
		t.Errorf("read back %q, expected %q", back, want)
	}
}
