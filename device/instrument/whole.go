package instrument

import (
	"fmt"
	"math"
	"slices"

	"barline/model/reading"
)

// Spectra says who is told of whole spectra: those of an instrument that sends
// them as a list in its lines, with a calibration in the bench file. Of several
// that come in one block only the newest is told. tell must not block.
func (in *Instrument) Spectra(tell func(*reading.Spectrum)) {
	if p, ok := in.protocol.(*linesProtocol); ok && p.pixels != nil {
		p.tell = tell
	}
}

// keep remembers the counts of the line that was parsed last.
func (p *linesProtocol) keep(counts []float64) {
	if p.tell != nil {
		p.counts, p.fresh = append(p.counts[:0], counts...), true
	}
}

// pass tells the spectrum that was kept last, if it is new.
func (p *linesProtocol) pass(at reading.Stamp) {
	if !p.fresh {
		return
	}
	p.fresh = false
	s := p.pixels.spectrum(p.counts)
	if s == nil {
		return
	}
	s.Instrument, s.Taken = p.in.Name(), at
	p.tell(s)
}

// spectrum returns counts as a spectrum of their own, or nil where they are
// none.
func (p *pixels) spectrum(counts []float64) *reading.Spectrum {
	if len(counts) < fewestPixels || len(counts) != len(p.lambda) && p.calibrate(len(counts)) != nil {
		return nil
	}
	s := &reading.Spectrum{
		Wavelength: p.lambda, Counts: slices.Clone(counts), Dark: p.dark, Saturation: p.saturation, Status: reading.Good,
	}
	if p.turned {
		slices.Reverse(s.Counts)
	}
	highest, full := math.Inf(-1), 0
	for _, c := range counts {
		if math.IsNaN(c) || math.IsInf(c, 0) {
			return nil
		}
		highest = max(highest, c-p.dark)
		if p.saturation > 0 && c >= p.saturation {
			full++
		}
	}
	switch {
	case highest < p.threshold || highest <= 0:
		s.Status, s.Reason = reading.FunctionCheck, "no light above the threshold"
	case full > 0:
		s.Status, s.Reason = reading.OutOfSpecification, fmt.Sprintf("%d pixels are saturated", full)
	}
	return s
}
