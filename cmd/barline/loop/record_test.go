package loop_test

import (
	"encoding/json"
	"errors"
	"fmt"
	"strings"

	"barline/logbook"
	"barline/model/live"
	"barline/model/reading"
)

// memory is a logbook that keeps records as JSON and can lose its disk.
type memory struct {
	lost    bool
	records []string
	stamps  []reading.Stamp // of the records
	bad     error
}

func (m *memory) Append(at reading.Stamp, kind string, data any) (uint64, error) {
	b, err := json.Marshal(data)
	if err != nil { // NaN and infinity end here
		m.bad = fmt.Errorf("record of kind %s: %w", kind, err)
		return 0, err
	}
	m.records = append(m.records, kind+" "+string(b))
	m.stamps = append(m.stamps, at)
	return uint64(len(m.records)), nil
}

func (m *memory) Sync() error {
	if m.lost {
		return errors.New("no space left on device")
	}
	return nil
}

func (m *memory) Health() live.RecordHealth {
	return live.RecordHealth{Writing: !m.lost, Reason: map[bool]string{true: "no space left on device"}[m.lost]}
}

// verifies writes the trial's records into a logbook on the disk, which must be
// sound to the last record and read back the same.
func (tr *trial) verifies() {
	dir := tr.t.TempDir()
	book, err := logbook.Open(dir, logbook.Options{})
	if err != nil {
		tr.fail("%v", err)
	}
	for i, r := range tr.disk.records {
		kind, data, _ := strings.Cut(r, " ")
		if _, err := book.Append(tr.disk.stamps[i], kind, json.RawMessage(data)); err != nil {
			tr.fail("record %d, %s: %v", i, r, err)
		}
	}
	if err := book.Close(); err != nil {
		tr.fail("%v", err)
	}
	report, err := logbook.Verify(dir, true)
	if err != nil || len(report.Damage) > 0 || report.Records != uint64(len(tr.disk.records)) {
		tr.fail("%d of %d records are sound, damage %v: %v", report.Records, len(tr.disk.records), report.Damage, err)
	}
	i := 0
	for rec, err := range logbook.Records(dir, logbook.Filter{}) {
		if err != nil {
			tr.fail("%v", err)
		}
		if got := rec.Kind + " " + string(rec.Data); got != tr.disk.records[i] {
			tr.fail("record %d reads %s, written was %s", i, got, tr.disk.records[i])
		}
		i++
	}
}
