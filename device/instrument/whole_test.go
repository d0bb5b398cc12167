package instrument

import (
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/reading"
	"barline/model/unit"
)

// told drains what in sends and returns the spectra that it told.
func told(t *testing.T, in *Instrument, inbox []byte) []*reading.Spectrum {
	t.Helper()
	var all []*reading.Spectrum
	in.Spectra(func(s *reading.Spectrum) { all = append(all, s) })
	if _, err := in.Drain(&scripted{inbox: inbox}, clockOf(time.Millisecond), nil); err != nil {
		t.Fatal(err)
	}
	return all
}

// A spectrometer that sends its own summary beside the pixels is believed in
// both: the summary makes the readings, the pixels are told whole.
func TestSpectrumBesideASummary(t *testing.T) {
	spec := bench.Instrument{Name: "spectrometer", Protocol: bench.Lines, Streams: true, Pattern: "EM {emission} nm P {counts...}",
		Calibration: []string{"300 nm", "-2 nm"}, Dark: 100, Threshold: 50, Saturation: 1000,
		Channel: []bench.Channel{{Name: "emission", Role: reading.Emission, Field: "emission", Factor: 1e-9, Symbol: "m"}}}
	text := "EM 271.2 nm P 100,100,100,100,100,100,100,100,100,100,100,100,400,900,300,100\n"
	all := told(t, build(t, spec), []byte(text+text))
	if len(all) != 1 {
		t.Fatalf("%d spectra told of one block, want the newest", len(all))
	}
	s := all[0]
	if s.Instrument != "spectrometer" || len(s.Counts) != 16 || s.Status != reading.Good || s.Taken.UTC.IsZero() {
		t.Errorf("%+v", s)
	}
	// Pixel 0 is the longest wavelength: the spectrum ascends all the same.
	if !near(float64(s.Wavelength[0]), 270e-9, 1e-15) || !near(float64(s.Wavelength[15]), 300e-9, 1e-15) || s.Counts[2] != 900 || s.Counts[3] != 400 {
		t.Errorf("wavelengths %v, counts %v", s.Wavelength, s.Counts)
	}
	for text, want := range map[string]reading.Status{
		"EM --- nm P 100,100,100,101,100,100,100,100,100,100,100,100,100,100,100,100\n":  reading.FunctionCheck,
		"EM 271 nm P 100,100,100,1000,100,100,100,100,100,100,100,100,100,100,100,100\n": reading.OutOfSpecification,
	} {
		if all := told(t, build(t, spec), []byte(text)); len(all) != 1 || all[0].Status != want {
			t.Errorf("%q: %+v, want one that is %v", text, all, want)
		}
	}
	for _, text := range []string{"EM 271 nm P 1,2,3\n", "EM 271 nm P nan,100,100,1000,100,100,100,100,100,100,100,100,100,100,100,100\n"} {
		if all := told(t, build(t, spec), []byte(text)); len(all) != 0 {
			t.Errorf("%q is told as %+v", text, all[0])
		}
	}
}

// What was told is not changed by what comes later.
func TestToldSpectraStay(t *testing.T) {
	in := build(t, wide())
	in.MadeBy(1030*unit.Nanometre, false)
	first := told(t, in, line(counted(265, 1000, plain)))
	was := first[0].Counts[65]
	told(t, in, line(counted(290, 1000, plain)))
	if got := first[0].Counts[65]; got != was {
		t.Errorf("pixel 65 became %v, was %v", got, was)
	}
}
