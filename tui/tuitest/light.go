package tuitest

import (
	"math"
	"time"

	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

func bump(x, middle, width float64) float64 {
	x = (x - middle) / (width / 2.3548)
	return math.Exp(-x * x / 2)
}

// measured is a spectrum of one lobe in nm, as old as age.
func measured(middle, width float64, age time.Duration) *reading.Spectrum {
	s := &reading.Spectrum{Instrument: "spectrometer", Taken: at(Elapsed - age), Dark: 100, Saturation: 4095, Status: reading.Good}
	for i := range 256 {
		nm := 190 + 0.82*float64(i)
		s.Wavelength = append(s.Wavelength, unit.Metre(nm*1e-9))
		s.Counts = append(s.Counts, 100+1200*bump(nm, middle, width)+4*wobble(i))
	}
	return s
}

// propagated stands in for a full-field run at a pressure in bar: a pump that
// broadens to a point of compression and a lobe that comes up behind it.
func propagated(bar float64) *live.Propagated {
	middle := predicted(bar)
	p := &live.Propagated{
		Input: emission.Input{Pressure: unit.Pascal(bar * 1e5), Temperature: 295.55, Energy: 1.3 * unit.Microjoule},
		Asked: at(Elapsed - 4200*time.Millisecond), Took: 700 * time.Millisecond,
		Emission: unit.Metre(middle * 1e-9), Peak: unit.Metre((middle - 2) * 1e-9), Width: 13.8 * unit.Nanometre,
		Sigma: 0.8 * unit.Nanometre, Conversion: 0.051,
		EnergyIn: 1.3 * unit.Microjoule, EnergyOut: 1.21 * unit.Microjoule, Ultraviolet: 0.066 * unit.Microjoule,
		Compression: 10.8 * unit.Centimetre, CompressedPower: 212e6, Ionised: 2.1e-4, Reliable: true,
	}
	grid := func(n int) (w []unit.Metre) {
		for i := range n {
			w = append(w, unit.Metre(150e-9*math.Pow(16, (float64(i)+0.5)/float64(n))))
		}
		return w
	}
	// light is the energy per wavelength after a share of the fibre.
	light := func(nm, z float64) float64 {
		sharp := math.Exp(-math.Pow((z-0.36)/0.12, 2))
		broad := 60 + 500*max(sharp, 0.35*min(z/0.36, 1))
		lobe := 0.06 / (1 + math.Exp(-(z-0.4)/0.03))
		return bump(nm, 1000, broad) + 1e-3*sharp*bump(nm, 420, 240) + lobe*bump(nm, middle, 14) + 1e-7
	}
	p.Wavelength, p.Bins = grid(640), grid(200)
	for _, w := range p.Wavelength {
		p.Spectrum = append(p.Spectrum, light(w.Nanometres(), 1))
	}
	for i := range 96 {
		z := float64(i) / 95
		sharp := math.Exp(-math.Pow((z-0.36)/0.05, 2))
		here := live.Place{
			Position: unit.Metre(0.3 * z), Energy: unit.Joule(1.3e-6 - 0.09e-6*z), Peak: unit.Watt(33e6 + 179e6*sharp),
			Ionised: unit.Fraction(2.1e-4 * math.Pow(sharp, 3)), Ultraviolet: unit.Joule(0.066e-6 / (1 + math.Exp(-(z-0.4)/0.03))),
		}
		for _, w := range p.Bins {
			here.Spectrum = append(here.Spectrum, light(w.Nanometres(), z))
		}
		p.Along = append(p.Along, here)
	}
	return p
}
