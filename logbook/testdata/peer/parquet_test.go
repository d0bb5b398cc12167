package peer

import (
	"context"
	"encoding/csv"
	"os"
	"strconv"
	"testing"
	"time"

	"github.com/apache/arrow-go/v18/arrow"
	"github.com/apache/arrow-go/v18/arrow/array"
	"github.com/apache/arrow-go/v18/arrow/memory"
	"github.com/apache/arrow-go/v18/parquet/file"
	"github.com/apache/arrow-go/v18/parquet/pqarrow"
)

// TestParquetSaysWhatCSVSays reads the Parquet export with Apache Arrow and
// compares every field with the CSV export of the same records.
func TestParquetSaysWhatCSVSays(t *testing.T) {
	csvName, parquetName := os.Getenv("BARLINE_CSV"), os.Getenv("BARLINE_PARQUET")
	if csvName == "" || parquetName == "" {
		t.Skip("BARLINE_CSV and BARLINE_PARQUET name no exports")
	}
	want := readCSV(t, csvName)
	r, err := file.OpenParquetFile(parquetName, false)
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	reader, err := pqarrow.NewFileReader(r, pqarrow.ArrowReadProperties{}, memory.DefaultAllocator)
	if err != nil {
		t.Fatal(err)
	}
	table, err := reader.ReadTable(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	defer table.Release()
	if int(table.NumRows()) != len(want)-1 || len(want) < 2 {
		t.Fatalf("%d rows, the CSV has %d", table.NumRows(), len(want)-1)
	}
	heading := want[0]
	for i, name := range heading {
		column := name
		if name == "mono_s" {
			column = "mono_ns"
		}
		at := table.Schema().FieldIndices(column)
		if len(at) != 1 {
			t.Errorf("%d columns are named %q", len(at), column)
			continue
		}
		row := 0
		for _, chunk := range table.Column(at[0]).Data().Chunks() {
			for j := range chunk.Len() {
				row++
				if got := text(t, chunk, j); got != want[row][i] && !sameNumber(got, want[row][i]) {
					t.Fatalf("%s of row %d: Parquet has %q, CSV %q", name, row, got, want[row][i])
				}
			}
		}
		if row != len(want)-1 {
			t.Errorf("%s has %d rows", column, row)
		}
	}
	t.Logf("%d rows of %d columns are the same", len(want)-1, len(heading))
}

func readCSV(t *testing.T, name string) [][]string {
	t.Helper()
	f, err := os.Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows
}

// text writes a value as the CSV export does.
func text(t *testing.T, a arrow.Array, i int) string {
	if a.IsNull(i) {
		return ""
	}
	switch a := a.(type) {
	case *array.Uint64:
		return strconv.FormatUint(a.Value(i), 10)
	case *array.Int64: // mono_ns
		return strconv.FormatFloat(time.Duration(a.Value(i)).Seconds(), 'f', -1, 64)
	case *array.Float64:
		return strconv.FormatFloat(a.Value(i), 'g', -1, 64)
	case *array.String:
		return a.Value(i)
	case *array.Binary:
		return string(a.Value(i))
	case *array.Dictionary:
		return text(t, a.Dictionary(), a.GetValueIndex(i))
	case *array.Timestamp:
		unit := a.DataType().(*arrow.TimestampType)
		if unit.Unit != arrow.Microsecond || unit.TimeZone != "UTC" {
			t.Errorf("time is in %v of zone %q", unit.Unit, unit.TimeZone)
		}
		return a.Value(i).ToTime(arrow.Microsecond).UTC().Format("2006-01-02T15:04:05.000000Z")
	}
	t.Fatalf("a column of %v", a.DataType())
	return ""
}

func sameNumber(a, b string) bool {
	x, errX := strconv.ParseFloat(a, 64)
	y, errY := strconv.ParseFloat(b, 64)
	return errX == nil && errY == nil && x == y
}
