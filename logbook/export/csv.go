package export

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"iter"
	"strconv"

	"barline/logbook"
)

// Records is what a logbook yields. An error in it ends an export: a caller
// that wants to go on behind damage leaves damage out of the sequence.
type Records = iter.Seq2[logbook.Record, error]

// CSV writes records to w, one a line, with a heading and CRLF line ends. Readings fill
// the columns from channel to reason; what any other record says stands as
// JSON in the last one. It returns how many records it wrote.
func CSV(w io.Writer, records Records) (int, error) {
	out := newWriter(w)
	out.Write([]string{"seq", "time", "mono_s", "kind", "channel", "role", "value", "unit", "status", "reason", "data"})
	n := 0
	for r, err := range records {
		if err != nil {
			return n, err
		}
		f, data, err := split(r)
		if err != nil {
			return n, err
		}
		value := ""
		if f.Value != nil {
			value = strconv.FormatFloat(*f.Value, 'g', -1, 64)
		}
		if err := out.Write([]string{
			strconv.FormatUint(r.Seq, 10), r.UTC.Format(timeLayout), strconv.FormatFloat(r.Mono.Seconds(), 'f', -1, 64), r.Kind,
			f.Channel, f.Role, value, unitOf(f.Role), f.Status, f.Reason, data,
		}); err != nil {
			return n, err
		}
		n++
	}
	out.Flush()
	return n, out.Error()
}

// stepColumns are the members of a step record, in the order of the scan
// table.
var stepColumns = []string{
	"step", "set_Pa", "measured_Pa", "core_Pa", "temperature_K", "energy_J",
	"predicted_m", "measured_m", "residual_m", "sigma_m", "samples", "status", spectrumColumn,
}

// spectrumColumn is the file of the measured spectrum of a step, below the
// logbook's folder: the member file of its member spectrum.
const spectrumColumn = "spectrum_file"

// Scan writes the steps among records to w as CSV, one row a step: pressures
// set, measured and in the core, temperature, energy, predicted and measured
// emission, their difference and its standard uncertainty, status, and the file
// of the measured spectrum. Records of
// other kinds are passed over. It returns how many steps it wrote.
func Scan(w io.Writer, records Records) (int, error) {
	out := newWriter(w)
	out.Write(append([]string{"seq", "time"}, stepColumns...))
	n := 0
	for r, err := range records {
		if err != nil {
			return n, err
		}
		if r.Kind != "step" {
			continue
		}
		var members map[string]json.RawMessage
		if err := r.Decode(&members); err != nil {
			return n, err
		}
		if raw, ok := members["spectrum"]; ok {
			var spectrum map[string]json.RawMessage
			if err := json.Unmarshal(raw, &spectrum); err != nil {
				return n, fmt.Errorf("record %d: spectrum: %w", r.Seq, err)
			}
			members[spectrumColumn] = spectrum["file"]
		}
		row := []string{strconv.FormatUint(r.Seq, 10), r.UTC.Format(timeLayout)}
		for _, c := range stepColumns {
			row = append(row, number(members[c]))
		}
		if err := out.Write(row); err != nil {
			return n, err
		}
		n++
	}
	out.Flush()
	return n, out.Error()
}

func newWriter(w io.Writer) *csv.Writer {
	out := csv.NewWriter(w)
	out.UseCRLF = true // RFC 4180, section 2.1
	return out
}
