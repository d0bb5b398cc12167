package instrument

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"time"

	"barline/model/air"
	"barline/model/bench"
	"barline/model/reading"
	"barline/model/unit"
)

// wide describes a spectrometer of 1024 pixels from 200 nm on.
func wide() bench.Instrument {
	ch := func(name string, role reading.Role, factor float64, symbol string) bench.Channel {
		return bench.Channel{Name: name, Role: role, Field: "counts", Factor: factor, Symbol: symbol}
	}
	return bench.Instrument{Name: "spectrometer", Protocol: bench.Lines, Streams: true, Pattern: "SP {temperature} C : {counts...}",
		Calibration: []string{"200 nm", "1 nm", "-0.0001 nm"}, Dark: 100, Threshold: 50, Saturation: 65535,
		Channel: []bench.Channel{ch("emission", reading.Emission, 1e-9, "m"), ch("width", reading.EmissionWidth, 1e-9, "m"), ch("strength", reading.EmissionStrength, 1, "1"),
			{Name: "head", Field: "temperature", Factor: 1, Symbol: "C"}}}
}

// counted is a spectrum of a Gaussian at nm, of rms width 3 nm, over the pump
// at 1030 nm, which is thirty times as strong.
func counted(nm, height float64, wavelength func(i int) float64) []float64 {
	counts := make([]float64, 1024)
	for i := range counts {
		l := wavelength(i)
		counts[i] = 100 + math.Round(height*math.Exp(-(l-nm)*(l-nm)/18)+30*height*math.Exp(-(l-1030)*(l-1030)/200))
	}
	return counts
}

func plain(i int) float64 { return 200 + float64(i) - 0.0001*float64(i*i) }

// perPixel is the slope of plain at a wavelength, in nm a pixel.
func perPixel(nm float64) float64 { return math.Sqrt(1 - 4e-4*(nm-200)) }

func line(counts []float64) []byte {
	var b strings.Builder
	fmt.Fprintf(&b, "SP 21.5 C : ")
	for i, c := range counts {
		if i > 0 {
			b.WriteByte(',')
		}
		fmt.Fprint(&b, c)
	}
	b.WriteByte('\n')
	return []byte(b.String())
}

func measure(t *testing.T, in *Instrument, counts []float64) map[string]reading.Reading {
	t.Helper()
	got, err := in.Drain(&scripted{inbox: line(counts)}, clockOf(time.Millisecond), nil)
	if err != nil || len(got) != 4 {
		t.Fatalf("%+v, %v", got, err)
	}
	return byChannel(t, got)
}

// The centroid of a Gaussian is its middle, its full width at half maximum
// 2.3548 times its rms width; what is known on paper comes back.
func TestWholeSpectrum(t *testing.T) {
	for _, nm := range []float64{247.3, 265.31, 301.7} {
		in := build(t, wide())
		in.MadeBy(1030*unit.Nanometre, false)
		m := measure(t, in, counted(nm, 1000, plain))
		if r := m["emission"]; r.Status != reading.Good || !near(r.Value, nm*1e-9, 0.1e-9) {
			t.Errorf("%v nm: %+v", nm, r)
		}
		// The definition smooths by 0.08 rad/fs rms, which adds to the width.
		added := 0.08e15 * nm * 1e-9 * nm * 1e-9 / (2 * math.Pi * 299792458)
		if r, want := m["width"], 2.3548*math.Hypot(3e-9, added); r.Status != reading.Good || !near(r.Value, want, 0.03*want) {
			t.Errorf("%v nm: width %+v, want %v", nm, r, want)
		}
		// A pixel counts the light that falls into it: areas of 3 nm and of
		// 30 times 10 nm, each over the width of the pixels there.
		ours, pump := 3/perPixel(nm), 300/perPixel(1030)
		if r, want := m["strength"], ours/(ours+pump); !near(r.Value, want, 0.05*want) {
			t.Errorf("%v nm: strength %+v, want %v", nm, r, want)
		}
		if r := m["head"]; r.Value != 21.5 {
			t.Errorf("number beside the list: %+v", r)
		}
	}
}

func TestWholeSpectrumInAirAndTurned(t *testing.T) {
	spec := wide()
	spec.Calibration = []string{"1109.28 nm", "-0.9 nm"}
	in := build(t, spec)
	in.MadeBy(1030*unit.Nanometre, true)
	in.WavelengthsInAir()
	m := measure(t, in, counted(265.31, 1000, func(i int) float64 { return 1109.28 - 0.9*float64(i) }))
	if want := float64(air.Vacuum(265.31 * unit.Nanometre)); !near(m["emission"].Value, want, 0.15e-9) {
		t.Errorf("%v nm, want %v nm", m["emission"].Value*1e9, want*1e9)
	}
}

func TestSpectraWithoutAnEmission(t *testing.T) {
	dark := make([]float64, 1024)
	for i := range dark {
		dark[i] = 100 + float64(i%7)
	}
	full := counted(265.31, 70000, plain)
	for i := range full {
		full[i] = min(full[i], 65535)
	}
	for _, c := range []struct {
		name   string
		counts []float64
		want   reading.Status
		reason string
	}{
		{"shutter closed", dark, reading.FunctionCheck, "no light: the highest pixel is 6 counts above dark, threshold is 50"},
		{"pump alone", counted(265.31, 1000, func(i int) float64 { return plain(i) + 1000*boolean(plain(i) < 600) }), reading.FunctionCheck, "no emission"},
		{"saturated", full, reading.OutOfSpecification, "saturated at 65535 counts"},
		{"cut short", dark[:7], reading.Failure, "a spectrum of 7 pixels"},
	} {
		in := build(t, wide())
		in.MadeBy(1030*unit.Nanometre, false)
		if r := measure(t, in, c.counts)["emission"]; r.Status != c.want || !strings.Contains(r.Reason, c.reason) {
			t.Errorf("%s: %+v, want %v, %q", c.name, r, c.want, c.reason)
		}
	}
	if r := measure(t, build(t, wide()), counted(265.31, 1000, plain))["emission"]; r.Status != reading.Failure || !strings.Contains(r.Reason, "pump wavelength is not known") {
		t.Errorf("without a pump: %+v", r)
	}
}

func boolean(b bool) float64 {
	if b {
		return 1
	}
	return 0
}

func TestCalibrationsThatAreRefused(t *testing.T) {
	for _, calibration := range [][]string{nil, {"200 nm"}, {"200 nm", "x"}} {
		spec := wide()
		spec.Calibration = calibration
		if _, err := New(spec, 0); err == nil || !strings.Contains(err.Error(), "calibration") {
			t.Errorf("%q: %v", calibration, err)
		}
	}
	spec := wide()
	spec.Calibration = []string{"200 nm", "0.9 nm", "-0.0007 nm"} // turns round at pixel 643
	in := build(t, spec)
	in.MadeBy(1030*unit.Nanometre, false)
	if r := measure(t, in, counted(265.31, 1000, plain))["emission"]; r.Status != reading.Failure || !strings.Contains(r.Reason, "turns round at pixel") {
		t.Errorf("%+v", r)
	}
}
