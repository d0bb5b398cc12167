package export

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"errors"
	"reflect"
	"strings"
	"testing"
	"time"

	"github.com/parquet-go/parquet-go"

	"barline/logbook"
)

var at = time.Date(2026, 12, 1, 11, 42, 5, 123456000, time.UTC)

var sample = []logbook.Record{
	{Seq: 1, UTC: at, Kind: "note", Data: json.RawMessage(`{"text":"comma, \"quote\"\nline"}`)},
	{Seq: 2, UTC: at.Add(time.Second), Mono: 1500 * time.Millisecond, Kind: "reading",
		Data: json.RawMessage(`{"channel":"cell A, left","role":"cell-a-pressure","value":901325.5,"status":"good"}`)},
	{Seq: 3, UTC: at.Add(2 * time.Second), Mono: 2 * time.Second, Kind: "reading",
		Data: json.RawMessage(`{"channel":"emission","role":"emission","value":null,"status":"function check","reason":"shutter closed"}`)},
	{Seq: 4, UTC: at.Add(3 * time.Second), Mono: 3 * time.Second, Kind: "step",
		Data: json.RawMessage(`{"step":1,"set_Pa":900000,"measured_Pa":900120.5,"core_Pa":900100,"temperature_K":295.15,"energy_J":1.3e-6,` +
			`"predicted_m":2.651e-7,"measured_m":null,"residual_m":null,"samples":0,"sigma_m":0,"status":"no light, nowhere","spectrum":{"file":"spectra/ab.csv","sha256":"ab","bytes":3}}`)},
}

func sequence(records []logbook.Record, last error) Records {
	return func(yield func(logbook.Record, error) bool) {
		for _, r := range records {
			if !yield(r, nil) {
				return
			}
		}
		if last != nil {
			yield(logbook.Record{}, last)
		}
	}
}

// TestCSV pins the bytes that RFC 4180 wants: CRLF, quotes doubled, fields with
// commas, quotes and line breaks quoted.
func TestCSV(t *testing.T) {
	var out bytes.Buffer
	if n, err := CSV(&out, sequence(sample[:3], nil)); n != 3 || err != nil {
		t.Fatal(n, err)
	}
	want := "seq,time,mono_s,kind,channel,role,value,unit,status,reason,data\r\n" +
		"1,2026-12-01T11:42:05.123456Z,0,note,,,,,,,\"{\"\"text\"\":\"\"comma, \\\"\"quote\\\"\"\\nline\"\"}\"\r\n" +
		"2,2026-12-01T11:42:06.123456Z,1.5,reading,\"cell A, left\",cell-a-pressure,901325.5,Pa,good,,\r\n" +
		"3,2026-12-01T11:42:07.123456Z,2,reading,emission,emission,,m,function check,shutter closed,\r\n"
	if out.String() != want {
		t.Errorf("got\n%q\nwant\n%q", out.String(), want)
	}
}

func TestScan(t *testing.T) {
	var out bytes.Buffer
	if n, err := Scan(&out, sequence(sample, nil)); n != 1 || err != nil {
		t.Fatal(n, err)
	}
	rows, err := csv.NewReader(&out).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	want := strings.Split("4|2026-12-01T11:42:08.123456Z|1|900000|900120.5|900100|295.15|1.3e-6|2.651e-7|||0|0|no light, nowhere|spectra/ab.csv", "|")
	if !reflect.DeepEqual(rows[1], want) || len(rows[0]) != len(want) {
		t.Errorf("got  %q\nwant %q", rows[1], want)
	}
}

func TestParquet(t *testing.T) {
	var out bytes.Buffer
	if n, err := Parquet(&out, sequence(sample, nil)); n != 4 || err != nil {
		t.Fatal(n, err)
	}
	rows, err := parquet.Read[row](bytes.NewReader(out.Bytes()), int64(out.Len()))
	if err != nil || len(rows) != 4 {
		t.Fatal(len(rows), err)
	}
	if r := rows[1]; *r.Value != 901325.5 || *r.Unit != "Pa" || r.Time != at.Add(time.Second).UnixMicro() || r.Data != nil || r.Reason != nil {
		t.Errorf("%+v", r)
	}
	if r := rows[2]; r.Value != nil || *r.Reason != "shutter closed" {
		t.Errorf("%+v", r)
	}
}

func TestExportStopsAtAnError(t *testing.T) {
	broken := errors.New("broken")
	for name, export := range map[string]func(*bytes.Buffer, Records) (int, error){
		"csv":     func(b *bytes.Buffer, r Records) (int, error) { return CSV(b, r) },
		"scan":    func(b *bytes.Buffer, r Records) (int, error) { return Scan(b, r) },
		"parquet": func(b *bytes.Buffer, r Records) (int, error) { return Parquet(b, r) },
	} {
		if _, err := export(new(bytes.Buffer), sequence(sample, broken)); !errors.Is(err, broken) {
			t.Errorf("%s: %v", name, err)
		}
	}
}
