package spectrum

import (
	"errors"
	"math"
	"testing"

	"barline/model/unit"
)

const pump = 1030 * unit.Nanometre

// hill is a Gaussian in angular frequency: centre in rad/fs, rms in rad/fs,
// energy in any unit.
type hill struct{ centre, rms, energy float64 }

func hills(spacing float64, list ...hill) Density {
	d := Density{First: 0.5e15, Spacing: spacing * 1e15}
	for w := 0.5; w < 10; w += spacing {
		sum := 0.0
		for _, h := range list {
			x := (w - h.centre) / h.rms
			sum += h.energy * math.Exp(-x*x/2) / (math.Sqrt(2*math.Pi) * h.rms * 1e15)
		}
		d.Energy = append(d.Energy, sum)
	}
	return d
}

func nm(omega float64) float64 { return 2 * math.Pi * lightSpeed / (omega * 1e15) * 1e9 }

// A Gaussian lobe stays one when smoothed: its width and centre are known on
// paper, and so is the factor ω² of the change to wavelength.
func TestOneLobe(t *testing.T) {
	const centre, rms = 7.0, 0.15
	d := hills(0.01, hill{1.829, 0.05, 90}, hill{centre, rms, 10})
	lobes, err := Lobes(d, pump)
	if err != nil || len(lobes) != 1 {
		t.Fatalf("%d lobes, %v; want one", len(lobes), err)
	}
	l := lobes[0]
	wide := math.Hypot(rms, 0.08)
	// Maximum of exp(−(ω−c)²/2s²) ω²: ω = c/2 + √(c²/4 + 2s²).
	peak := centre/2 + math.Sqrt(centre*centre/4+2*wide*wide)
	width := nm(peak-wide*math.Sqrt(2*math.Ln2)) - nm(peak+wide*math.Sqrt(2*math.Ln2))
	if math.Abs(l.Peak.Nanometres()-nm(peak)) > 0.02 {
		t.Errorf("peak %.3f nm, want %.3f nm", l.Peak.Nanometres(), nm(peak))
	}
	if math.Abs(l.Width.Nanometres()-width) > 0.2 {
		t.Errorf("width %.2f nm, want %.2f nm", l.Width.Nanometres(), width)
	}
	if math.Abs(l.Centroid.Nanometres()-nm(centre)) > 0.15 {
		t.Errorf("centroid %.2f nm, want %.2f nm", l.Centroid.Nanometres(), nm(centre))
	}
	if math.Abs(l.Conversion-0.1) > 1e-4 {
		t.Errorf("conversion %.5f, want 0.1", l.Conversion)
	}
}

// Emission may be so narrow that it stands above all the pump light in energy
// per wavelength: the pump is still none of it.
func TestEmissionAboveThePump(t *testing.T) {
	d := hills(0.01, hill{1.2, 0.1, 20}, hill{1.829, 0.3, 60}, hill{5, 0.05, 20})
	lobes, err := Lobes(d, pump)
	if err != nil || len(lobes) != 1 {
		t.Fatalf("%d lobes, %v; want one", len(lobes), err)
	}
	if math.Abs(lobes[0].Conversion-0.2) > 1e-3 {
		t.Errorf("conversion %.4f, want 0.2", lobes[0].Conversion)
	}
}

func TestWhatIsALobe(t *testing.T) {
	light := hill{1.829, 0.05, 100}
	for name, c := range map[string]struct {
		d    Density
		want []float64 // rad/fs, the strongest first
	}{
		"pump alone":                   {hills(0.01, light), nil},
		"two lobes, stronger first":    {hills(0.01, light, hill{6.2, 0.1, 3}, hill{7.4, 0.1, 8}), []float64{7.4, 6.2}},
		"weaker than a thousandth":     {hills(0.01, light, hill{7, 0.1, 0.05}), nil},
		"faint third harmonic":         {hills(0.01, light, hill{3 * 1.829, 0.05, 0.5}), nil},
		"strong third harmonic counts": {hills(0.01, light, hill{3 * 1.829, 0.05, 3}), []float64{3 * 1.829}},
		"below 1.6 of the pump":        {hills(0.01, light, hill{2.6, 0.05, 5}), nil},
		"shoulder is part of the lobe": {hills(0.01, light, hill{6.8, 0.1, 5}, hill{7.03, 0.08, 2}), []float64{6.86}},
	} {
		lobes, err := Lobes(c.d, pump)
		if err != nil || len(lobes) != len(c.want) {
			t.Errorf("%s: %d lobes, %v; want %d", name, len(lobes), err, len(c.want))
			continue
		}
		for i, w := range c.want {
			if math.Abs(lobes[i].Centroid.Nanometres()-nm(w)) > 2 {
				t.Errorf("%s: lobe %d at %.1f nm, want %.1f nm", name, i, lobes[i].Centroid.Nanometres(), nm(w))
			}
		}
	}
}

// The same spectrum read as energy per wavelength, as a spectrometer gives it.
func TestMeasuredMeetsComputed(t *testing.T) {
	const centre, rms = 7.0, 0.15
	computed, err := Lobes(hills(0.01, hill{1.829, 0.05, 90}, hill{centre, rms, 10}), pump)
	if err != nil {
		t.Fatal(err)
	}
	var lambda []unit.Metre
	var power []float64
	for l := 190.0; l < 1300; l += 0.4 {
		w := nm(1) / l
		x, y := (w-centre)/rms, (w-1.829)/0.05
		perOmega := 10*math.Exp(-x*x/2)/rms + 90*math.Exp(-y*y/2)/0.05
		lambda = append(lambda, unit.Metre(l)*unit.Nanometre)
		power = append(power, perOmega*w*w)
	}
	d, err := FromWavelengths(lambda, power)
	if err != nil {
		t.Fatal(err)
	}
	measured, err := Lobes(d, pump)
	if err != nil || len(measured) != 1 {
		t.Fatalf("%d lobes, %v; want one", len(measured), err)
	}
	if a, b := measured[0], computed[0]; math.Abs(float64(a.Centroid-b.Centroid)) > 0.05e-9 || math.Abs(a.Conversion-b.Conversion) > 1e-3 {
		t.Errorf("measured %+v, computed %+v", a, b)
	}
}

func TestRefusals(t *testing.T) {
	if _, err := Lobes(hills(0.01, hill{1.8, 0.05, 0}), pump); !errors.Is(err, ErrEmpty) {
		t.Errorf("dark spectrum: %v, want %v", err, ErrEmpty)
	}
	up := make([]unit.Metre, 10)
	for i := range up {
		up[i] = unit.Metre(200+i) * unit.Nanometre
	}
	bad := append([]unit.Metre(nil), up...)
	bad[5] = bad[4]
	if _, err := FromWavelengths(bad, make([]float64, 10)); err == nil {
		t.Error("wavelengths that do not ascend were accepted")
	}
	if _, err := FromWavelengths(up, make([]float64, 9)); err == nil {
		t.Error("an energy too few was accepted")
	}
	dark := make([]float64, 10)
	dark[3] = math.NaN()
	if _, err := FromWavelengths(up, dark); err == nil {
		t.Error("an energy that is not a number was accepted")
	}
}
