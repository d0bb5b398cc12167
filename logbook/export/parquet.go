package export

import (
	"io"

	"github.com/parquet-go/parquet-go"
)

// row is a record as Parquet has it.
type row struct {
	Seq     uint64   `parquet:"seq,delta"`
	Time    int64    `parquet:"time,timestamp(microsecond),delta"`
	Mono    int64    `parquet:"mono_ns,delta"`
	Kind    string   `parquet:"kind,dict"`
	Channel *string  `parquet:"channel,optional,dict"`
	Role    *string  `parquet:"role,optional,dict"`
	Value   *float64 `parquet:"value,optional"`
	Unit    *string  `parquet:"unit,optional,dict"`
	Status  *string  `parquet:"status,optional,dict"`
	Reason  *string  `parquet:"reason,optional,dict"`
	Data    *string  `parquet:"data,optional"`
}

// A row group is held in memory while it is written.
const rowsInGroup = 100_000

// Parquet writes records to w as one Parquet file with the columns of CSV;
// time is a timestamp in microseconds UTC and mono_ns an integer. It returns
// how many records it wrote.
func Parquet(w io.Writer, records Records) (int, error) {
	out := parquet.NewGenericWriter[row](w, parquet.Compression(&parquet.Zstd), parquet.MaxRowsPerRowGroup(rowsInGroup))
	batch := make([]row, 0, 1000)
	n := 0
	flush := func() error {
		_, err := out.Write(batch)
		n += len(batch)
		batch = batch[:0]
		return err
	}
	for r, err := range records {
		if err != nil {
			return n, err
		}
		f, data, err := split(r)
		if err != nil {
			return n, err
		}
		batch = append(batch, row{
			Seq: r.Seq, Time: r.UTC.UnixMicro(), Mono: int64(r.Mono), Kind: r.Kind,
			Channel: some(f.Channel), Role: some(f.Role), Value: f.Value, Unit: some(unitOf(f.Role)),
			Status: some(f.Status), Reason: some(f.Reason), Data: some(data),
		})
		if len(batch) == cap(batch) {
			if err := flush(); err != nil {
				return n, err
			}
		}
	}
	if err := flush(); err != nil {
		return n, err
	}
	return n, out.Close()
}

func some(s string) *string {
	if s == "" {
		return nil
	}
	return &s
}
