package pulse

import (
	"context"
	"testing"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/spectrum"
	"barline/model/unit"
)

// lit propagates light through a fibre filled with one gas at 293.15 K.
func lit(t *testing.T, spec gas.Spec, f fibre.Spec, bar unit.Pascal, p Pulse) (*Result, spectrum.Lobe) {
	t.Helper()
	medium, err := gas.New(spec)
	if err != nil {
		t.Fatal(err)
	}
	s := Setup{Pulse: p}
	if s.Gas, err = medium.At(bar*unit.Bar, 293.15, 0); err != nil {
		t.Fatal(err)
	}
	if s.Fibre, err = fibre.New(f); err != nil {
		t.Fatal(err)
	}
	r, err := s.Run(context.Background(), Options{})
	if err != nil {
		t.Fatal(err)
	}
	l, ok := r.Emission()
	if !ok {
		t.Fatalf("%g bar, %g uJ: no emission", bar, p.Energy.Microjoules())
	}
	t.Logf("%g bar, %g uJ: %.1f nm, %.1f %%, %.3g uJ in the ultraviolet; %d points from %.0f nm; %q", bar, p.Energy.Microjoules(),
		l.Centroid.Nanometres(), 100*l.Conversion, r.Ultraviolet.Microjoules(), r.Grid.Points, wavelengthOf(r).Nanometres(), r.Reasons)
	return r, l
}

func wavelengthOf(r *Result) unit.Metre {
	short, _ := r.Grid.Wavelengths()
	return short
}

// Argon in a kagome fibre of 29.6 µm core and 0.25 µm walls, 30 fs at 800 nm
// and about 1 µJ emits at 200 to 320 nm, tuned by pressure and energy, with up
// to 8 % of the energy: Phys. Rev. Lett. 106, 203901 (2011). Its fibre's length
// and the pressure of each wavelength were not at hand.
func TestPublishedKagome(t *testing.T) {
	argon := gas.Spec{Composition: "argon", Index: "peck-fisher-1964"}
	f := fibre.Spec{Kind: fibre.Kagome, CoreDiameter: 29.6 * unit.Micrometre, Wall: 0.25 * unit.Micrometre, Length: 0.2}
	p := Pulse{Wavelength: 800 * unit.Nanometre, Duration: 30 * unit.Femtosecond, Energy: 1.5 * unit.Microjoule}
	_, short := lit(t, argon, f, 3, p)
	p.Energy = unit.Microjoule
	_, middle := lit(t, argon, f, 6, p)
	p.Energy = 0.7 * unit.Microjoule
	_, long := lit(t, argon, f, 15, p)
	if !(short.Centroid < 215*unit.Nanometre && long.Centroid > 315*unit.Nanometre && middle.Centroid > short.Centroid && middle.Centroid < long.Centroid) {
		t.Errorf("%v, %v and %v do not reach from 200 to 320 nm with rising pressure", short.Centroid, middle.Centroid, long.Centroid)
	}
	if !(middle.Conversion > 0.02 && middle.Conversion < 0.16) {
		t.Errorf("conversion of %.1f %%, published up to 8 %%", 100*middle.Conversion)
	}
}

// Capillaries of 100 µm and 250 µm emit at 218 to 375 nm and at 110 to 400 nm
// with 1 to 16 µJ: Opt. Lett. 44, 2990 (2019), 6.3 fs at 800 nm, and Nature
// Photon. 13, 547 (2019), 10 fs at 800 nm (pulse and length from memory). Gases
// and pressures of single wavelengths were not at hand: helium is taken.
func TestPublishedCapillaries(t *testing.T) {
	helium := gas.Spec{Composition: "helium", Index: "ermolov-2015"}
	narrow := fibre.Spec{Kind: fibre.Capillary, CoreDiameter: 100 * unit.Micrometre, Length: 0.15}
	p := Pulse{Wavelength: 800 * unit.Nanometre, Duration: 6.3 * unit.Femtosecond, Energy: 20 * unit.Microjoule}
	_, short := lit(t, helium, narrow, 12, p)
	p.Energy = 10 * unit.Microjoule
	_, long := lit(t, helium, narrow, 24, p)
	if !(short.Centroid < 230*unit.Nanometre && long.Centroid > 310*unit.Nanometre && long.Centroid < 375*unit.Nanometre) {
		t.Errorf("100 µm: %v and %v, published 218 to 375 nm", short.Centroid, long.Centroid)
	}
	wide := fibre.Spec{Kind: fibre.Capillary, CoreDiameter: 250 * unit.Micrometre, Length: 3}
	p = Pulse{Wavelength: 800 * unit.Nanometre, Duration: 10 * unit.Femtosecond, Energy: 120 * unit.Microjoule}
	far, vacuum := lit(t, helium, wide, 0.8, p)
	_, ultraviolet := lit(t, helium, wide, 3, p)
	if !(vacuum.Centroid > 110*unit.Nanometre && vacuum.Centroid < 180*unit.Nanometre && ultraviolet.Centroid > 220*unit.Nanometre && ultraviolet.Centroid < 400*unit.Nanometre) {
		t.Errorf("250 µm: %v and %v, published 110 to 400 nm", vacuum.Centroid, ultraviolet.Centroid)
	}
	if short := wavelengthOf(far); short > 150*unit.Nanometre {
		t.Errorf("the band begins at %v, too near to the emission at %v", short, vacuum.Centroid)
	}
}

// Common practice, no source: near 10 bar of argon in a core of some 30 µm the
// conversion is of the order of ten per cent.
func TestConversionNearTenBar(t *testing.T) {
	r, err := referenceSetup(t, 10, Radial).Run(context.Background(), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if l, ok := r.Emission(); !ok || !r.Reliable || !(l.Conversion > 0.04 && l.Conversion < 0.25) {
		t.Errorf("emission %v with %.1f %% of the energy, %q; want about 10 %%", l.Centroid, 100*l.Conversion, r.Reasons)
	}
}

// Common practice, no source: argon-filled kagome fibre of about 30 µm, 30 fs
// at 800 nm, about 1 µJ and 20 cm, tunes from about 200 nm to beyond 260 nm as
// the pressure rises to about 10 bar, 350 nm being about the longest.
func TestTuningWithPressure(t *testing.T) {
	argon := gas.Spec{Composition: "argon"}
	f := fibre.Spec{Kind: fibre.Kagome, CoreDiameter: 30 * unit.Micrometre, Wall: 0.25 * unit.Micrometre, Length: 0.2}
	p := Pulse{Wavelength: 800 * unit.Nanometre, Duration: 30 * unit.Femtosecond, Energy: 1.2 * unit.Microjoule}
	last := unit.Metre(0)
	for _, bar := range []unit.Pascal{3.5, 6, 10} {
		_, l := lit(t, argon, f, bar, p)
		if !(l.Centroid > last) {
			t.Errorf("%v at %g bar after %v", l.Centroid, bar, last)
		}
		if bar == 3.5 && !(l.Centroid > 180*unit.Nanometre && l.Centroid < 225*unit.Nanometre) {
			t.Errorf("%v at 3.5 bar, want about 200 nm", l.Centroid)
		}
		last = l.Centroid
	}
	if !(last > 260*unit.Nanometre && last < 350*unit.Nanometre) {
		t.Errorf("%v at 10 bar, want beyond 260 nm", last)
	}
}
