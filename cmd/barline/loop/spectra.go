package loop

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"math"
	"strconv"
	"strings"

	"barline/logbook"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// Events of the loop itself: the core knows no whole spectra.
type (
	// measured is a spectrum from an instrument.
	measured struct{ spectrum *reading.Spectrum }
	// kept says that a row whose spectrum went into a file is in the record.
	kept struct {
		at  reading.Stamp
		row live.StepData
	}
)

func (e measured) When() reading.Stamp { return e.spectrum.Taken }
func (e kept) When() reading.Stamp     { return e.at }

// Spectrum hands in a spectrum that an instrument sent. Like readings, spectra
// are bounded in the queue.
func (l *Loop) Spectrum(s *reading.Spectrum) { l.queue.push(measured{s}) }

// Propagated shows what a full-field run says of the bench.
func (l *Loop) Propagated(p *live.Propagated) { l.propagated.Store(p) }

// Propagation shows how the full-field runs fare.
func (l *Loop) Propagation(p live.Propagation) { l.propagation.Store(&p) }

// spectra holds the newest measured spectrum, and sums those of a dwell.
type spectra struct {
	newest *reading.Spectrum
	step   int // of the program, whose dwell is summed
	name   string
	sum    []float64
	count  int
	of     *reading.Spectrum // the first of the sum
}

// see takes a spectrum; p says what the program is doing.
func (m *spectra) see(s *reading.Spectrum, p live.Progress) {
	m.newest = s
	if !p.Dwelling || p.Paused {
		m.count = 0
		return
	}
	if m.count > 0 && (m.step != p.Index || m.name != p.Name || m.of.Instrument != s.Instrument || len(m.sum) != len(s.Counts)) {
		m.count = 0
	}
	if m.count == 0 {
		m.step, m.name, m.of = p.Index, p.Name, s
		m.sum = append(m.sum[:0], s.Counts...)
		m.count = 1
		return
	}
	for i, c := range s.Counts {
		m.sum[i] += c
	}
	m.count++
}

// take returns the mean of the dwell of a row as a file for the record, and
// what the record is to say of it; false where there was none.
func (m *spectra) take(row live.StepData) (content []byte, data live.SpectrumData, ok bool) {
	if m.count == 0 || m.step != row.Step-1 || m.name != row.Program {
		return nil, data, false
	}
	content = m.file()
	data = live.SpectrumData{Instrument: m.of.Instrument, Spectra: m.count}
	m.count = 0
	return content, data, true
}

// spectrumColumns heads the file of a spectrum.
const spectrumColumns = "wavelength_m,counts,dark_counts,saturation_counts"

// file writes the mean as CSV (RFC 4180).
func (m *spectra) file() []byte {
	text := []byte(spectrumColumns + "\r\n")
	dark := strconv.FormatFloat(m.of.Dark, 'g', -1, 64)
	full := ""
	if m.of.Saturation > 0 {
		full = strconv.FormatFloat(m.of.Saturation, 'g', -1, 64)
	}
	for i, w := range m.of.Wavelength {
		text = strconv.AppendFloat(text, float64(w), 'g', 10, 64)
		text = append(text, ',')
		// To a thousandth of a count: finer is noise, and noise fills disks.
		text = strconv.AppendFloat(text, math.Round(m.sum[i]/float64(m.count)*1000)/1000, 'f', -1, 64)
		text = append(append(append(append(text, ','), dark...), ','), full...)
		text = append(text, "\r\n"...)
	}
	return text
}

// ParseSpectrum reads what file wrote. Instrument and time are left open.
func ParseSpectrum(content []byte) (*reading.Spectrum, error) {
	rows, err := csv.NewReader(bytes.NewReader(content)).ReadAll()
	if err != nil {
		return nil, fmt.Errorf("spectrum: %w", err)
	}
	if len(rows) < 3 || strings.Join(rows[0], ",") != spectrumColumns {
		return nil, fmt.Errorf("spectrum: %d rows, expected a heading %s and two pixels at least", len(rows), spectrumColumns)
	}
	s := &reading.Spectrum{Status: reading.Good}
	for i, row := range rows[1:] {
		var v [4]float64
		for j, text := range row {
			if text == "" && j == 3 {
				continue // the saturation is not known
			}
			if v[j], err = strconv.ParseFloat(text, 64); err != nil || math.IsNaN(v[j]) || math.IsInf(v[j], 0) {
				return nil, fmt.Errorf("spectrum: row %d has %q for %s", i+2, text, rows[0][j])
			}
		}
		if n := len(s.Wavelength); !(v[0] > 0) || n > 0 && !(unit.Metre(v[0]) > s.Wavelength[n-1]) {
			return nil, fmt.Errorf("spectrum: row %d: wavelength %g m does not ascend", i+2, v[0])
		}
		s.Wavelength, s.Counts = append(s.Wavelength, unit.Metre(v[0])), append(s.Counts, v[1])
		s.Dark, s.Saturation = v[2], v[3]
	}
	return s, nil
}

// Attach keeps content as a file beside the record, see logbook.Book.
type Attach func(content []byte, suffix string) (logbook.Attachment, error)

// keeper writes the spectra of rows to files, and then the rows. A row that
// names a file is recorded only after the file is on the disk.
type keeper struct {
	attach Attach
	loop   *Loop
	rows   chan keeping  // nil until started: rows are then kept in place
	last   chan struct{} // closed when the row handed in last is recorded; nil before the first
}

type keeping struct {
	at      reading.Stamp
	row     live.StepData
	content []byte
	done    chan struct{}
}

// start keeps rows on a goroutine of its own. The returned function ends it
// after the last.
func (k *keeper) start() (stop func()) {
	rows := make(chan keeping, 16)
	k.rows = rows
	done := make(chan struct{})
	go func() {
		defer close(done)
		defer k.loop.caught("the keeping of spectra")
		for r := range rows {
			_ = k.keep(r) // Health counts what was refused
		}
	}()
	return func() {
		close(rows)
		<-done
	}
}

// hand hands in a row and its spectrum. Where too many wait for the disk the
// row is recorded without it.
func (k *keeper) hand(at reading.Stamp, row live.StepData, content []byte) error {
	r := keeping{at: at, row: row, content: content, done: make(chan struct{})}
	if k.rows == nil {
		return k.keep(r)
	}
	select {
	case k.rows <- r:
		k.last = r.done
		return nil
	default:
		row.Spectrum = &live.SpectrumData{Missing: fmt.Sprintf("%d spectra wait for the disk already", cap(k.rows))}
		return k.loop.record(at, live.KindStep, row)
	}
}

func (k *keeper) keep(r keeping) error {
	defer close(r.done)
	a, err := k.attach(r.content, ".csv")
	if err != nil {
		r.row.Spectrum = &live.SpectrumData{Missing: err.Error()}
	} else {
		r.row.Spectrum.File, r.row.Spectrum.SHA256, r.row.Spectrum.Bytes = a.File, a.SHA256, a.Bytes
	}
	at := r.at
	if k.rows != nil {
		at = k.loop.opt.Clock.Now() // what was recorded meanwhile is not later
	}
	_, err = k.loop.opt.Book.Append(at, string(live.KindStep), r.row)
	if err == nil {
		k.loop.queue.push(kept{at, r.row})
	}
	return err
}

// row records a row, with the spectrum of its dwell where there is one.
func (l *Loop) row(at reading.Stamp, row live.StepData) error {
	l.history.row(row)
	if l.keeper.attach == nil {
		return l.record(at, live.KindStep, row)
	}
	content, data, ok := l.spectra.take(row)
	if !ok {
		return l.record(at, live.KindStep, row)
	}
	row.Spectrum = &data
	return l.keeper.hand(at, row, content)
}
