package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"barline/logbook"
	"barline/model/live"
	"barline/model/reading"
)

// logbookForTest writes a small logbook and returns its folder.
func logbookForTest(t *testing.T) string {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "book")
	b, err := logbook.Open(dir, logbook.Options{})
	if err != nil {
		t.Fatal(err)
	}
	start := time.Date(2026, 12, 1, 11, 42, 5, 0, time.UTC)
	value := 901325.5
	predicted := 2.651e-7
	for i, r := range []struct {
		kind live.Kind
		data any
	}{
		{live.KindStart, map[string]string{"version": "test"}},
		{live.KindReading, live.ReadingData{Channel: "cell A", Role: "cell-a-pressure", Value: &value, Status: "good"}},
		{live.KindReading, reading.Reading{Channel: "emission", Role: reading.Emission, Status: reading.FunctionCheck, Reason: "shutter closed"}},
		{live.KindStep, live.StepData{Program: "scan", Step: 1, SetPa: 9e5, MeasuredPa: value, PredictedM: &predicted, Status: "good"}},
		{live.KindAlarm, live.AlarmData{Name: "cell A stale", State: "unacknowledged", Cause: "no reading for 2 s"}},
	} {
		at := reading.Stamp{UTC: start.Add(time.Duration(i) * time.Second), Mono: time.Duration(i) * time.Second}
		if _, err := b.Append(at, string(r.kind), r.data); err != nil {
			t.Fatal(err)
		}
	}
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
	return dir
}

// runLine carries out one command line.
func runLine(args ...string) (code int, stdout, stderr string) {
	var out, errs bytes.Buffer
	code = run(context.Background(), args, strings.NewReader(""), &out, &errs)
	return code, out.String(), errs.String()
}

func TestLogShow(t *testing.T) {
	dir := logbookForTest(t)
	for _, c := range []struct {
		args []string
		want []string // in this order
		not  string
	}{
		{nil, []string{"cell A  9.01325 bar", "emission  function check: shutter closed", "set 9 bar", "cell A stale: unacknowledged (no reading for 2 s)"}, "NaN"},
		{[]string{"--kind", "reading", "--channel", "cell A"}, []string{"cell A  9.01325 bar"}, "emission"},
		{[]string{"--from", "2026-12-01T11:42:08Z"}, []string{"set 9 bar", "cell A stale"}, "function check"},
		{[]string{"--to", "2026-12-01T11:42:06Z"}, []string{"version test"}, "cell A"},
		{[]string{"--json", "--kind", "alarm"}, []string{`{"seq":5,"t":"2026-12-01T11:42:09.000000Z","mono_ns":4000000000,"kind":"alarm","data":{`}, "cell A  "},
	} {
		code, out, errs := runLine(append([]string{"log", "show", dir}, c.args...)...)
		if code != 0 || errs != "" {
			t.Errorf("%q: code %d, %s", c.args, code, errs)
		}
		rest := out
		for _, w := range c.want {
			_, after, found := strings.Cut(rest, w)
			if !found {
				t.Errorf("%q: no %q in\n%s", c.args, w, out)
			}
			rest = after
		}
		if strings.Contains(out, c.not) {
			t.Errorf("%q: %q in\n%s", c.args, c.not, out)
		}
	}
}

func TestLogNote(t *testing.T) {
	dir := logbookForTest(t)
	code, out, errs := runLine("log", "note", dir, "--at", "2026-12-01T11:42:06Z", "--corrects", "2", "gauge", "was", "in mbar")
	if code != 0 || out != "record 6\n" {
		t.Fatalf("code %d, %q, %s", code, out, errs)
	}
	_, out, _ = runLine("log", "show", dir, "--kind", "note")
	if !strings.Contains(out, "gauge was in mbar (about 2026-12-01T11:42:06Z) (corrects record 2)") {
		t.Error(out)
	}
	for _, c := range []struct {
		args []string
		code int
		want string
	}{
		{[]string{dir}, 2, "text"},
		{[]string{dir, " "}, 2, "empty"},
		{[]string{dir, "x", "--corrects", "77"}, 1, "no record 77"},
		{[]string{t.TempDir(), "x"}, 1, "no logbook"},
		{[]string{dir, "x", "--at", "noon"}, 2, `"noon"`},
	} {
		code, _, errs := runLine(append([]string{"log", "note"}, c.args...)...)
		if code != c.code || !strings.Contains(errs, c.want) {
			t.Errorf("%q: code %d, %q; expected %d with %q", c.args, code, errs, c.code, c.want)
		}
	}
	if code, out, _ := runLine("log", "verify", "--deep", dir); code != 0 || !strings.Contains(out, "6 records in 2 segments") {
		t.Error(code, out)
	}
}

func TestLogVerifyNamesDamage(t *testing.T) {
	dir := logbookForTest(t)
	name := filepath.Join(dir, "000001.jsonl")
	content, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	edited := bytes.Replace(content, []byte("901325.5"), []byte("801325.5"), 1)
	if err := os.WriteFile(name, edited, 0o644); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(dir, "thesis.odt"), []byte("x"), 0o644); err != nil {
		t.Fatal(err)
	}
	code, out, errs := runLine("log", "verify", dir)
	for _, want := range []string{"000001.jsonl, byte ", "after record 1: edited", "broken seal", "thesis.odt does not belong"} {
		if !strings.Contains(out, want) {
			t.Errorf("no %q in\n%s", want, out)
		}
	}
	if code != 1 || !strings.Contains(errs, "is damaged") {
		t.Errorf("code %d, %s", code, errs)
	}
	var report struct {
		Sound  bool
		Damage []struct{ Kind string }
	}
	code, out, _ = runLine("log", "verify", "--json", dir)
	if err := json.Unmarshal([]byte(out), &report); err != nil || code != 1 || report.Sound || len(report.Damage) != 2 {
		t.Error(code, err, out)
	}
	if code, out, errs := runLine("log", "show", dir); code != 1 || strings.Contains(out, "8.01") || !strings.Contains(errs, "left out") {
		t.Error(code, out, errs)
	}

	torn := content[:len(content)-300] // a crash
	if err := os.WriteFile(name, torn, 0o644); err != nil {
		t.Fatal(err)
	}
	if code, out, errs := runLine("log", "verify", dir); code != 0 || !strings.Contains(out, "torn tail") {
		t.Error(code, out, errs)
	}
}

func TestLogExport(t *testing.T) {
	dir := logbookForTest(t)
	code, out, errs := runLine("log", "export", dir, "--format", "scan")
	rows, err := csv.NewReader(strings.NewReader(out)).ReadAll()
	if code != 0 || err != nil || len(rows) != 2 || rows[1][3] != "900000" {
		t.Error(code, rows, err, errs)
	}
	file := filepath.Join(t.TempDir(), "out.parquet")
	if code, _, errs := runLine("log", "export", dir, "--format", "parquet", "-o", file); code != 0 || !strings.Contains(errs, "5 rows") {
		t.Error(code, errs)
	}
	if b, err := os.ReadFile(file); err != nil || !bytes.HasPrefix(b, []byte("PAR1")) || !bytes.HasSuffix(b, []byte("PAR1")) {
		t.Error("no Parquet file", err)
	}
	for _, c := range []struct {
		args []string
		code int
		want string
	}{
		{[]string{"--format", "parquet", "-o", file}, 1, "exists already"},
		{[]string{"--format", "parquet"}, 2, "--output"},
		{[]string{"--format", "xls"}, 2, `"xls"`},
	} {
		code, _, errs := runLine(append([]string{"log", "export", dir}, c.args...)...)
		if code != c.code || !strings.Contains(errs, c.want) {
			t.Errorf("%q: code %d, %q", c.args, code, errs)
		}
	}
}

func TestLogList(t *testing.T) {
	dir := logbookForTest(t)
	for _, at := range []string{dir, filepath.Dir(dir)} {
		if code, out, errs := runLine("log", "list", at); code != 0 || !strings.Contains(out, "5 records") || !strings.Contains(out, "sealed") {
			t.Error(code, out, errs)
		}
	}
	if code, _, errs := runLine("log", "list", t.TempDir()); code != 1 || !strings.Contains(errs, "no logbook") {
		t.Error(code, errs)
	}
	if code, _, errs := runLine("log", "list"); code != 2 || errs == "" {
		t.Error(code, errs)
	}
}

func TestLogReport(t *testing.T) {
	dir := logbookForTest(t)
	code, out, errs := runLine("log", "report", dir, "--zone", "Europe/Zurich")
	if code != 0 || !strings.Contains(out, "2026-12-01 12:42:05") || !strings.HasSuffix(out, "</html>\n") {
		t.Error(code, errs)
	}
	if code, _, errs := runLine("log", "report", dir, "--zone", "Atlantis"); code != 2 || !strings.Contains(errs, "Atlantis") {
		t.Error(code, errs)
	}
}
