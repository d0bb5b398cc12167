package loop

import (
	"errors"
	"strings"
	"testing"
	"testing/synctest"
	"time"

	"barline/logbook"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

func counted(at time.Duration, counts ...float64) *reading.Spectrum {
	s := &reading.Spectrum{Instrument: "spectrometer", Taken: reading.Stamp{Mono: at}, Counts: counts, Dark: 100, Saturation: 4095, Status: reading.Good}
	for i := range counts {
		s.Wavelength = append(s.Wavelength, unit.Metre(260e-9+1e-9*float64(i)))
	}
	return s
}

func dwelling(step int) live.Progress {
	return live.Progress{Name: "scan", Index: step, Count: 3, Dwelling: true}
}

// The file of a row is the mean of the spectra of its dwell and of no other.
func TestSpectraOfADwellAreAveraged(t *testing.T) {
	var m spectra
	row := live.StepData{Program: "scan", Step: 1}
	if _, _, ok := m.take(row); ok {
		t.Error("a row without spectra has a file")
	}
	m.see(counted(1, 900, 900), live.Progress{Name: "scan", Count: 3}) // on its way
	m.see(counted(2, 100, 200), dwelling(0))
	m.see(counted(3, 101, 203), dwelling(0))
	m.see(counted(4, 101.5, 203), dwelling(0))
	if _, _, ok := m.take(live.StepData{Program: "scan", Step: 2}); ok {
		t.Error("a row took the spectra of another's dwell")
	}
	content, data, ok := m.take(row)
	want := "wavelength_m,counts,dark_counts,saturation_counts\r\n2.6e-07,100.833,100,4095\r\n2.61e-07,202,100,4095\r\n"
	if !ok || string(content) != want || data.Spectra != 3 || data.Instrument != "spectrometer" {
		t.Errorf("%v %+v %q, want %q", ok, data, content, want)
	}
	if _, _, ok := m.take(row); ok {
		t.Error("one dwell filled two rows")
	}
	back, err := ParseSpectrum(content)
	if err != nil || len(back.Counts) != 2 || back.Counts[0] != 100.833 || back.Wavelength[1] != 261*unit.Nanometre || back.Dark != 100 || back.Saturation != 4095 {
		t.Errorf("read back %+v, %v", back, err)
	}
	for _, bad := range []string{"", "wavelength_m,counts\r\n1,2\r\n", want + "2.6e-07,1,100,4095\r\n", want + "2.7e-07,nan,100,\r\n", want + "2.7e-07\r\n"} {
		if s, err := ParseSpectrum([]byte(bad)); err == nil {
			t.Errorf("%q was read as %+v", bad, s)
		}
	}
	m.see(counted(5, 1, 2), dwelling(1))
	m.see(counted(6, 1, 2, 3), dwelling(1)) // the instrument was set anew
	if _, data, ok := m.take(live.StepData{Program: "scan", Step: 2}); !ok || data.Spectra != 1 {
		t.Errorf("%v %+v, want the newest kind alone", ok, data)
	}
}

// A row that names a file is recorded after the file is on the disk, and gas
// moves on after the row is.
func TestRowWaitsForItsSpectrum(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		tr := &trace{}
		l := newTestLoop(t, &fakeBook{trace: tr}, tr)
		release := make(chan struct{})
		l.keeper.attach = func(content []byte, suffix string) (logbook.Attachment, error) {
			<-release
			tr.add("file")
			return logbook.Attachment{File: "spectra/x" + suffix, SHA256: "x", Bytes: len(content)}, nil
		}
		stopKeeper, stopGate := l.keeper.start(), l.gate.start()
		l.spectra.see(counted(1, 100, 200), dwelling(0))
		if err := l.row(l.opt.Clock.Now(), live.StepData{Program: "scan", Step: 1}); err != nil {
			t.Fatal(err)
		}
		sp, err := l.opt.Core.Limits().Step(1*unit.Bar, 2*unit.Bar, time.Second)
		if err != nil {
			t.Fatal(err)
		}
		l.gate.setpoint(1, sp)
		synctest.Wait()
		if tr.index("append step") >= 0 || tr.index("wire setpoint 1.2 bar") >= 0 {
			t.Fatalf("before the file is on the disk: %v", tr.lines)
		}
		l.gate.hold(2, l.opt.Core.Limits().Freeze(unit.Bar))
		if tr.index("wire hold") < 0 {
			t.Fatal("HOLD waited for a spectrum")
		}
		close(release)
		stopGate()
		stopKeeper()
		if file, row := tr.index("file"), tr.index("append step"); file < 0 || row < file {
			t.Errorf("the row does not follow its file: %v", tr.lines)
		}
		if tr.index("wire setpoint 1.2 bar") >= 0 {
			t.Error("a setpoint older than HOLD passed after it")
		}
	})
}

// A setpoint does not wait for ever for a disk that has died.
func TestSetpointGivesARowUp(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		tr := &trace{}
		l := newTestLoop(t, &fakeBook{trace: tr}, tr)
		var answered error
		l.gate.answer = func(_ uint64, err error, _ reading.Stamp) { answered = err }
		sp, err := l.opt.Core.Limits().Step(1*unit.Bar, 2*unit.Bar, time.Second)
		if err != nil {
			t.Fatal(err)
		}
		l.keeper.last = make(chan struct{})
		l.gate.setpoint(1, sp)
		if answered == nil || !strings.Contains(answered.Error(), "row before it") || tr.index("wire setpoint 1.2 bar") >= 0 {
			t.Errorf("answered %v: %v", answered, tr.lines)
		}
	})
}

// A row is recorded without its spectrum where that cannot be kept, and says
// why.
func TestRowWithoutItsFile(t *testing.T) {
	tr := &trace{}
	l := newTestLoop(t, &fakeBook{trace: tr}, tr)
	var row live.StepData
	l.opt.Book = rowBook{l.opt.Book, &row}
	l.keeper.attach = func([]byte, string) (logbook.Attachment, error) {
		return logbook.Attachment{}, errors.New("no space left")
	}
	l.spectra.see(counted(1, 100, 200), dwelling(0))
	if err := l.row(l.opt.Clock.Now(), live.StepData{Program: "scan", Step: 1}); err != nil {
		t.Fatal(err)
	}
	if row.Step != 1 || row.Spectrum == nil || row.Spectrum.File != "" || row.Spectrum.Missing != "no space left" {
		t.Errorf("%+v with %+v", row, row.Spectrum)
	}
	if got := l.history.rows; len(got) != 1 || got[0].Step != 1 {
		t.Errorf("on screen: %+v", got)
	}
}

// rowBook remembers the row that was appended last.
type rowBook struct {
	Book
	row *live.StepData
}

func (b rowBook) Append(at reading.Stamp, kind string, data any) (uint64, error) {
	if d, ok := data.(live.StepData); ok {
		*b.row = d
	}
	return b.Book.Append(at, kind, data)
}

// Spectra are bounded in the queue as readings are.
func TestQueueBoundsSpectra(t *testing.T) {
	q := newQueue()
	for range maxReadings + 7 {
		q.push(measured{counted(1, 1, 2)})
	}
	if events, dropped := q.take(nil); len(events) != maxReadings || dropped != 7 {
		t.Errorf("%d spectra, %d dropped; want %d and 7", len(events), dropped, maxReadings)
	}
}

// What is measured and computed reaches the screen.
func TestSnapshotCarriesSpectra(t *testing.T) {
	tr := &trace{}
	l := newTestLoop(t, &fakeBook{trace: tr}, tr)
	l.Spectrum(counted(1, 100, 200))
	l.Propagation(live.Propagation{On: true, Busy: true})
	l.Propagated(&live.Propagated{Emission: 262 * unit.Nanometre})
	l.Turn()
	if s := l.Snapshot(); s.Spectrum == nil || s.Spectrum.Counts[1] != 200 || s.Propagated.Emission != 262*unit.Nanometre || !s.Propagation.Busy {
		t.Errorf("%+v %+v %+v", s.Spectrum, s.Propagated, s.Propagation)
	}
}
