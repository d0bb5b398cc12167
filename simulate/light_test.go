package simulate

import (
	"context"
	"fmt"
	"math"
	"os"
	"strings"
	"testing"
	"time"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/pulse"
	"barline/model/unit"
	"barline/simulate/panel"
)

func newLit(t *testing.T, truth Truth) *light {
	t.Helper()
	l, err := newLight(truth)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func at(p float64) panel.State { return panel.State{P: p * bar, T: roomTemperature} }

// A bench that is as its file says emits at the nodes what the runs found.
func TestPlainTruthIsTheRuns(t *testing.T) {
	l := newLit(t, Truth{})
	runs, err := readRuns()
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range runs {
		e := l.emit(at(r.pressure/bar), r.energy)
		if r.centroid == 0 {
			if e.strength > threshold {
				t.Errorf("%g bar, %g J: emits %g where the run does not", r.pressure/bar, r.energy, e.strength)
			}
			continue
		}
		if math.Abs(e.wavelength-r.centroid) > 1e-11 || math.Abs(e.strength/r.conversion-1) > 1e-3 || math.Abs(e.width-r.width) > 1e-11 {
			t.Errorf("%g bar, %g J: %+v, the run has %+v", r.pressure/bar, r.energy, e, r)
		}
	}
}

// Each truth moves the emission by what its size leads to expect, and together
// they stay within what a bench person would still call the same source.
func TestTruthMovesTheEmission(t *testing.T) {
	plain := newLit(t, Truth{}).emit(at(9), pulseEnergy).wavelength
	for _, c := range []struct {
		name      string
		truth     Truth
		low, high float64 // nm
	}{
		{"core 1 % wider", Truth{CoreRadius: 0.01}, 1, 6},
		{"index 1 % higher", Truth{Index: 0.01}, 0.5, 6},
		{"n2 5 % higher", Truth{N2: 0.05}, -2, 3},
	} {
		d := (newLit(t, c.truth).emit(at(9), pulseEnergy).wavelength - plain) * 1e9
		if !(d > c.low && d < c.high) {
			t.Errorf("%s moves the emission by %.2f nm, expected %g to %g nm", c.name, d, c.low, c.high)
		}
	}
	sum := 0.0
	const seeds = 200
	for seed := range seeds {
		truth := drawTruth(noise(seed))
		d := newLit(t, truth).emit(at(9), pulseEnergy*(1+float64(truth.Energy))).wavelength - plain
		if math.Abs(d) > 12e-9 {
			t.Errorf("seed %d moves the emission by %.2f nm", seed, d*1e9)
		}
		sum += d * d
	}
	if rms := math.Sqrt(sum/seeds) * 1e9; rms < 0.5 || rms > 5 {
		t.Errorf("over the seeds the emission moves by %.2f nm rms", rms)
	} else {
		t.Logf("over the seeds the emission moves by %.2f nm rms", rms)
	}
	// Of this the mismatch is the part that no fit can take out.
	sum = 0
	for seed := range seeds {
		truth := Truth{Mismatch: drawTruth(noise(seed)).Mismatch}
		d := newLit(t, truth).emit(at(9), pulseEnergy).wavelength - plain
		sum += d * d
	}
	t.Logf("the mismatch alone by %.2f nm rms", math.Sqrt(sum/seeds)*1e9)
}

// Between the nodes the surfaces agree with full-field propagation.
func TestBetweenTheRuns(t *testing.T) {
	const p, energy = 9.5, 1.28e-6
	e := newLit(t, Truth{}).emit(at(p), energy)
	r, err := stated(t).run(p, energy)
	if err != nil {
		t.Fatal(err)
	}
	lobe, ok := r.Emission()
	if !ok || math.Abs(e.wavelength-float64(lobe.Centroid)) > 0.5e-9 || math.Abs(e.strength-lobe.Conversion) > 0.005 {
		t.Errorf("surfaces give %+v, the run %+v", e, lobe)
	}
}

// statedBench propagates through Heron as its file states it.
type statedBench struct {
	medium *gas.Medium
	fibre  *fibre.Fibre
}

func stated(t *testing.T) statedBench {
	t.Helper()
	m, err := gas.New(gas.Spec{Composition: "argon", Density: "reference", Index: "peck-fisher-1964", N2: "lehmeier-1985"})
	if err != nil {
		t.Fatal(err)
	}
	f, err := fibre.New(fibre.Spec{Kind: fibre.Antiresonant, CoreDiameter: 2 * fibreRadius, Wall: fibreWall, Length: fibreLength, Loss: fibre.Loss{Constant: 1}})
	if err != nil {
		t.Fatal(err)
	}
	return statedBench{m, f}
}

// run propagates at p bar with pulses of energy in J.
func (s statedBench) run(p, energy float64) (*pulse.Result, error) {
	state, err := s.medium.At(unit.Pascal(p*bar), roomTemperature, 0)
	if err != nil {
		return nil, err
	}
	light := pulse.Pulse{Wavelength: pumpWavelength, Duration: pulseDuration, Energy: unit.Joule(energy)}
	return pulse.Setup{Fibre: s.fibre, Gas: state, Pulse: light}.Run(context.Background(), pulse.Options{})
}

// TestWriteRuns computes the stored runs anew, two minutes on one core:
//
//	BARLINE_RUNS=$PWD/simulate/runs.csv go test ./simulate -run TestWriteRuns -timeout 2h
func TestWriteRuns(t *testing.T) {
	name := os.Getenv("BARLINE_RUNS")
	if name == "" {
		t.Skip("BARLINE_RUNS names no file")
	}
	s := stated(t)
	var out strings.Builder
	out.WriteString("pressure_bar,energy_uJ,density_mol_m3,compression_mm,centroid_nm,width_nm,conversion\n")
	began := time.Now()
	for p := 5; p <= 14; p++ {
		for _, energy := range []float64{0.9, 1.05, 1.2, 1.35, 1.5, 1.65} {
			r, err := s.run(float64(p), energy*1e-6)
			if err != nil {
				t.Fatal(err)
			}
			lobe, _ := r.Emission()
			fmt.Fprintf(&out, "%d,%g,%.2f,%.2f,%.3f,%.3f,%.5f\n", p, energy, float64(r.Setup.Gas.Density), float64(r.Compression)*1e3,
				lobe.Centroid.Nanometres(), lobe.Width.Nanometres(), lobe.Conversion)
		}
	}
	if err := os.WriteFile(name, []byte(out.String()), 0o644); err != nil {
		t.Fatal(err)
	}
	t.Logf("%v", time.Since(began))
}
