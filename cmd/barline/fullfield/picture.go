package fullfield

import (
	"fmt"

	"barline/model/emission"
	"barline/model/live"
	"barline/model/pulse"
	"barline/model/spectrum"
	"barline/model/unit"
)

// How finely a screen sees a result: 0.5 % of the wavelength at the end of the
// fibre, 1.5 % on the way.
const (
	pictureBins = 640
	alongBins   = 200
	shortestBin = 120 * unit.Nanometre
	longestBin  = 4 * unit.Micrometre
	ultraviolet = 400 * unit.Nanometre // below it is ultraviolet, as in package pulse
)

// Picture returns what a snapshot carries of a result. Input is filled in but
// for air, which a result does not know.
func Picture(r *pulse.Result) (*live.Propagated, error) {
	shortest, longest := r.Grid.Wavelengths()
	shortest, longest = max(shortest, shortestBin), min(longest, longestBin)
	fine, err := spectrum.NewBins(shortest, longest, pictureBins)
	if err != nil {
		return nil, fmt.Errorf("picture of a full-field run: %w", err)
	}
	coarse, err := spectrum.NewBins(shortest, longest, alongBins)
	if err != nil {
		return nil, fmt.Errorf("picture of a full-field run: %w", err)
	}
	p := &live.Propagated{
		Input:      emission.Input{Pressure: r.Setup.Gas.Pressure, Temperature: r.Setup.Gas.Temperature, Energy: r.Setup.Pulse.Energy},
		Wavelength: fine.Middles(), Spectrum: fine.Of(r.Output), Bins: coarse.Middles(),
		EnergyIn: r.EnergyIn, EnergyOut: r.EnergyOut, Ultraviolet: r.Ultraviolet,
		Compression: r.Compression, CompressedPower: r.CompressedPower, Ionised: unit.Fraction(r.Ionised),
		Reliable: r.Reliable, Reasons: r.Reasons,
	}
	for i, l := range r.Lobes {
		if i == 0 {
			p.Emission, p.Peak, p.Width, p.Conversion = l.Centroid, l.Peak, l.Width, unit.Fraction(l.Conversion)
			continue
		}
		p.Others = append(p.Others, emission.Branch{Emission: l.Centroid, Conversion: unit.Fraction(l.Conversion)})
	}
	for _, s := range r.Evolution {
		d := spectrum.Density{First: r.Output.First, Spacing: r.Output.Spacing, Energy: s.Energy}
		here := live.Place{Position: s.Position, Spectrum: coarse.Of(d), Peak: s.Peak, Ionised: unit.Fraction(s.Ionised)}
		for i, e := range s.Energy {
			here.Energy += unit.Joule(e * d.Spacing)
			if d.Wavelength(i) < ultraviolet {
				here.Ultraviolet += unit.Joule(e * d.Spacing)
			}
		}
		p.Along = append(p.Along, here)
	}
	return p, nil
}
