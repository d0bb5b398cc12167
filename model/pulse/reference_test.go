package pulse

import (
	"context"
	"errors"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/pulse/fourier"
	"barline/model/unit"
)

// referenceSetup is a bare capillary of 34 µm core and 30 cm in ideal argon at
// 293.15 K with 1.5 µJ of 35 fs at 1030 nm.
func referenceSetup(t testing.TB, bar float64, plasma Plasma) Setup {
	t.Helper()
	medium, err := gas.New(gas.Spec{Composition: "argon", Density: "ideal", Index: "borzsonyi-2008", N2: "9.110e-24 m2/W"})
	if err != nil {
		t.Fatal(err)
	}
	state, err := medium.At(unit.Pascal(bar)*unit.Bar, 293.15, 0)
	if err != nil {
		t.Fatal(err)
	}
	f, err := fibre.New(fibre.Spec{Kind: fibre.Capillary, CoreDiameter: 34 * unit.Micrometre, Length: 0.3})
	if err != nil {
		t.Fatal(err)
	}
	return Setup{Fibre: f, Gas: state, Plasma: plasma,
		Pulse: Pulse{Wavelength: benchWavelength, Duration: 35 * unit.Femtosecond, Energy: 1.5 * unit.Microjoule}}
}

// The rows were computed once by an independent program in NumPy with another
// transform, another integrator and another grid (16384 points of 0.1 fs,
// tolerance 1e-6, for the radial rows 1e-5 with depletion at ten radii).
var referenceRows = []struct {
	plasma                                            Plasma
	bar, peak, centroid, conversion, compression, out float64 // nm, nm, %, mm, share of energy
}{
	{Averaged, 7, 236.55, 236.74, 1.93, 117.8, 0.886},
	{Averaged, 9, 259.04, 257.81, 6.67, 98.7, 0.927},
	{Averaged, 11, 272.59, 275.09, 10.03, 86.1, 0.964},
	{Radial, 7, 254.12, 255.72, 4.73, 119.5, 0.716},
	{Radial, 9, 270.76, 270.59, 7.85, 93.1, 0.813},
	{Radial, 11, 285.07, 284.26, 10.60, 81.4, 0.871},
}

func TestReferenceRows(t *testing.T) {
	for _, c := range referenceRows {
		name := c.plasma.String() + " " + strconv.FormatFloat(c.bar, 'g', -1, 64) + " bar"
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			r, err := referenceSetup(t, c.bar, c.plasma).Run(context.Background(), Options{})
			if err != nil {
				t.Fatal(err)
			}
			l, ok := r.Emission()
			if !ok || !r.Reliable {
				t.Fatalf("no emission or not reliable: %v", r.Reasons)
			}
			allowed := 1.0
			if c.plasma == Radial {
				allowed = 2
			}
			for _, v := range []struct {
				what               string
				got, want, allowed float64
			}{
				{"peak in nm", l.Peak.Nanometres(), c.peak, allowed},
				{"centroid in nm", l.Centroid.Nanometres(), c.centroid, allowed},
				{"conversion in %", 100 * l.Conversion, c.conversion, 0.4},
				{"compression in mm", 1e3 * float64(r.Compression), c.compression, 5},
				{"energy out over in", float64(r.EnergyOut / r.EnergyIn), c.out, 0.02 * c.out},
			} {
				if !(math.Abs(v.got-v.want) <= v.allowed) {
					t.Errorf("%s is %.4g, want %.4g ± %.2g", v.what, v.got, v.want, v.allowed)
				}
			}
			t.Logf("peak %.2f nm, centroid %.2f nm, width %.2f nm, conversion %.2f %%, compression %.1f mm, out %.4f, balance %.1e, time edge %.1e, band edge %.1e, %d evaluations on %d points",
				l.Peak.Nanometres(), l.Centroid.Nanometres(), l.Width.Nanometres(), 100*l.Conversion, 1e3*float64(r.Compression),
				float64(r.EnergyOut/r.EnergyIn), r.Balance, r.TimeEdge, r.BandEdge, r.Evaluated, r.Grid.Points)
			if !fourier.Vectors() {
				return
			}
			// The processor's vector instructions round elsewhere, no more.
			plain, err := referenceSetup(t, c.bar, c.plasma).Run(context.Background(), Options{planned: fourier.NewPlainReal})
			if err != nil {
				t.Fatal(err)
			}
			l2, _ := plain.Emission()
			if d := math.Abs(float64(l.Centroid-l2.Centroid)) * 1e9; !(d < 1e-4) || !(math.Abs(l.Conversion-l2.Conversion) < 1e-6) || r.Evaluated != plain.Evaluated {
				t.Errorf("without vector instructions: centroid %.2g nm away, conversion %.6f and not %.6f, %d evaluations and not %d",
					d, l2.Conversion, l.Conversion, plain.Evaluated, r.Evaluated)
			}
		})
	}
}

// The default grid and tolerance give the centroid within 0.3 nm of a run with
// four times the points, steps of 0.1 fs and a hundredth of the tolerance. It
// takes minutes: BARLINE_LONG=1 go test -run Converged ./model/pulse
func TestCentroidHasConverged(t *testing.T) {
	if os.Getenv("BARLINE_LONG") == "" {
		t.Skip("set BARLINE_LONG=1 to run it")
	}
	for _, c := range referenceRows {
		s := referenceSetup(t, c.bar, c.plasma)
		fast, err := s.Run(context.Background(), Options{})
		if err != nil {
			t.Fatal(err)
		}
		g, err := NewGrid(16384, 0.1*unit.Femtosecond, 120*unit.Nanometre, 4*unit.Micrometre)
		if err != nil {
			t.Fatal(err)
		}
		fine, err := s.Run(context.Background(), Options{Grid: g, Tolerance: 1e-6})
		if err != nil {
			t.Fatal(err)
		}
		a, _ := fast.Emission()
		b, _ := fine.Emission()
		t.Logf("%v %g bar: centroid %.3f nm, converged %.3f nm, conversion %.3f %% and %.3f %%", c.plasma, c.bar,
			a.Centroid.Nanometres(), b.Centroid.Nanometres(), 100*a.Conversion, 100*b.Conversion)
		if d := math.Abs(float64(a.Centroid - b.Centroid)); d > 0.3e-9 {
			t.Errorf("%v %g bar: centroid is %.2f nm from the converged one", c.plasma, c.bar, d*1e9)
		}
	}
}

func TestCancelledRunReturns(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	steps := 0
	_, err := referenceSetup(t, 9, Radial).Run(ctx, Options{Progress: func(float64) {
		if steps++; steps == 3 {
			cancel()
		}
	}})
	if !errors.Is(err, context.Canceled) || steps != 3 {
		t.Errorf("after %d steps: %v, want %v after 3", steps, err, context.Canceled)
	}
}

func TestBadSetups(t *testing.T) {
	good := referenceSetup(t, 9, Radial)
	for name, c := range map[string]struct {
		change func(*Setup)
		want   string // in the refusal, or in a reason
	}{
		"no energy":         {func(s *Setup) { s.Pulse.Energy = 0 }, "want all above 0"},
		"no duration":       {func(s *Setup) { s.Pulse.Duration = 0 }, "want both above 0"},
		"not a number":      {func(s *Setup) { s.Pulse.Energy = unit.Joule(math.NaN()) }, "want all above 0"},
		"beyond the band":   {func(s *Setup) { s.Pulse.Wavelength = 60 * unit.Micrometre }, "60"},
		"hopeless chirp":    {func(s *Setup) { s.Pulse.GDD = 1e6 * unit.FemtosecondSquared }, "time window"},
		"normal dispersion": {func(s *Setup) { s.Pulse.Wavelength, s.Pulse.Energy = 515*unit.Nanometre, 0.1*unit.Microjoule }, "normal dispersion"},
		"ionises everything": {func(s *Setup) {
			s.Pulse.Energy = 60 * unit.Microjoule
			s.Fibre = mustFibre(t, 0.01)
		}, "ionised"},
		"ionises everything at once": {func(s *Setup) { s.Pulse.Energy = 0.1 }, "ionises everything"},
	} {
		s := good
		c.change(&s)
		r, err := s.Run(context.Background(), Options{Tolerance: 1e-3})
		said := ""
		if err != nil {
			said = err.Error()
		} else {
			said = strings.Join(r.Reasons, "\n")
			if r.Reliable {
				t.Errorf("%s: the result says that it is reliable", name)
			}
		}
		if !strings.Contains(said, c.want) {
			t.Errorf("%s: said %q, want %q in it", name, said, c.want)
		}
	}
	narrow, err := NewGrid(2048, 0.24*unit.Femtosecond, 290*unit.Nanometre, 4*unit.Micrometre)
	if err != nil {
		t.Fatal(err)
	}
	r, err := good.Run(context.Background(), Options{Grid: narrow, Tolerance: 1e-3})
	if err != nil {
		t.Fatal(err)
	}
	if said := strings.Join(r.Reasons, "\n"); r.Reliable || !strings.Contains(said, "the band begins at") {
		t.Errorf("emission at 270 nm in a band from 290 nm: reliable %v, said %q", r.Reliable, said)
	}
	g, err := NewGrid(512, 0.15*unit.Femtosecond, 180*unit.Nanometre, 4*unit.Micrometre)
	if err != nil {
		t.Fatal(err)
	}
	if r, err := good.Run(context.Background(), Options{Grid: g, Tolerance: 1e-3}); !errors.Is(err, ErrWindow) {
		t.Errorf("a window of 77 fs for a pulse of 35 fs: %v, %v, want %v", r, err, ErrWindow)
	}
}

func mustFibre(t *testing.T, length unit.Metre) *fibre.Fibre {
	t.Helper()
	f, err := fibre.New(fibre.Spec{Kind: fibre.Capillary, CoreDiameter: 34 * unit.Micrometre, Length: length})
	if err != nil {
		t.Fatal(err)
	}
	return f
}
