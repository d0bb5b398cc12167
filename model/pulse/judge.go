package pulse

import (
	"fmt"
	"math"

	"barline/model/fibre"
)

// Bounds beyond which a result says that it is not to be trusted.
const (
	mostTimeEdge = 1e-2 // of the energy at the ends of time
	mostBandEdge = 1e-4 // of the energy at the edges of the band
	mostMissing  = 1e-2 // of the energy unaccounted for
	mostIonised  = 0.2  // of the atoms
	mostOrder    = 15   // soliton order
)

// judge collects the reasons not to trust the result.
func (r *Result) judge() {
	doubt := func(format string, args ...any) { r.Reasons = append(r.Reasons, fmt.Sprintf(format, args...)) }
	p := r.Setup.Pulse
	guide := fibre.Guide{Fibre: r.Setup.Fibre, Gas: r.Setup.Gas}
	omega0 := fibre.Frequency(p.Wavelength)
	pump := guide.At(omega0)
	if pump.Beta2 >= 0 {
		doubt("the pump at %v is in normal dispersion (%.0f fs2/m): the pulse spreads instead of compressing", p.Wavelength, pump.Beta2*1e30)
	} else if n := solitonOrder(guide.Gamma(omega0)*r.Setup.kerrScale(), float64(r.PulsePower), float64(p.Duration), p.Shape, pump.Beta2); n > mostOrder {
		doubt("soliton order %.1f is above %d: the light breaks up from noise, which one pulse does not show", n, mostOrder)
	}
	if pump.Region != fibre.Guided {
		doubt("the pump at %v is %v", p.Wavelength, pump.Region)
	}
	if l, ok := r.Emission(); ok {
		if region := guide.At(fibre.Frequency(l.Centroid)).Region; region != fibre.Guided {
			doubt("the emission at %v is %v", l.Centroid, region)
		}
	}
	short, long := r.Grid.Wavelengths()
	if matched := phaseMatched(&guide, p.Wavelength, r.Setup.Gas.Usable().From); matched > 0 && fibre.Wavelength(matched) < short {
		doubt("light may be emitted near %v, where it is phase-matched, but the band begins at %v", fibre.Wavelength(matched), short)
	}
	if r.TimeEdge > mostTimeEdge {
		doubt("%.2g %% of the energy reached the ends of the time window of %.0f fs: too short", 100*r.TimeEdge, r.Grid.Window().Femtoseconds())
	}
	if r.BandEdge > mostBandEdge {
		doubt("%.2g %% of the energy reached the edges of the band from %v to %v: too narrow", 100*r.BandEdge, short, long)
	}
	if math.Abs(r.Balance) > mostMissing {
		doubt("%.2g %% of the energy is unaccounted for", 100*math.Abs(r.Balance))
	}
	if r.Ionised > mostIonised {
		doubt("%.0f %% of the atoms are ionised: second electrons and the motion of the plasma are not in the equation", 100*r.Ionised)
	}
	if r.tableField > 0 && r.peakField > r.tableField {
		doubt("the field of %.3g V/m is beyond the ionisation table, which ends at %.3g V/m", r.peakField, r.tableField)
	}
	switch r.region {
	case fibre.Resonant:
		r.Notes = append(r.Notes, "within the margins of the wall's resonances the propagation constant is that of a plain capillary")
	case fibre.OffRange:
		r.Notes = append(r.Notes, "in part of the band the fibre's formula is beyond its range and the propagation constant that of a plain capillary")
	}
	if f := r.Setup.Fibre.Spec(); f.Kind == fibre.Capillary && !r.Setup.lossy() {
		r.Notes = append(r.Notes, fmt.Sprintf("propagated without loss; a bare bore of this size loses %.3g dB/m at the pump", guide.Bore(omega0)*10/math.Ln10))
	}
	r.Reliable = len(r.Reasons) == 0
}

func (s Setup) kerrScale() float64 {
	if s.KerrScale == 0 {
		return 1
	}
	return s.KerrScale
}

// solitonOrder returns N of the pulse as it enters: N² = γP₀T₀²/|β₂|.
func solitonOrder(gamma, power, fwhm float64, shape Shape, beta2 float64) float64 {
	t0 := fwhm / (2 * math.Acosh(math.Sqrt2))
	if shape == Gauss {
		t0 = fwhm / (2 * math.Sqrt(math.Ln2))
	}
	return math.Sqrt(gamma * power * t0 * t0 / math.Abs(beta2))
}
