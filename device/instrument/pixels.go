package instrument

import (
	"fmt"
	"math"
	"slices"

	"barline/model/air"
	"barline/model/bench"
	"barline/model/reading"
	"barline/model/spectrum"
	"barline/model/unit"
)

// fewestPixels is the shortest list of numbers that is taken for a spectrum.
const fewestPixels = 16

// pixels finds the emission in a whole spectrum, one number a pixel.
//
// The wavelength of pixel i, counted from 0, is c0 + c1·i + c2·i² + …, which
// is how spectrometers are calibrated. What the emission is, and where, is
// said in package spectrum.
type pixels struct {
	coefficients []float64 // m
	dark         float64   // counts of a pixel without light
	threshold    float64   // counts above dark that the highest pixel must reach
	saturation   float64   // counts at which a pixel is full; 0 where not known
	pump         unit.Metre
	peak         bool // the emission is its peak, else its centroid
	air          bool // the calibration is for wavelengths in air

	lambda  []unit.Metre // of the pixels, vacuum, ascending
	width   []float64    // m, of each pixel
	turned  bool         // pixel 0 is the longest wavelength
	density []float64    // counts per metre, in the order of lambda
}

func newPixels(spec bench.Instrument) (*pixels, error) {
	p := &pixels{dark: spec.Dark, threshold: spec.Threshold, saturation: spec.Saturation}
	if len(spec.Calibration) < 2 {
		return nil, fmt.Errorf("calibration has %d terms: a spectrum needs the wavelength of pixel 0 and the step to the next at least, such as [\"190 nm\", \"0.4 nm\"]", len(spec.Calibration))
	}
	for _, text := range spec.Calibration {
		c, err := unit.ParseLength(text)
		if err != nil {
			return nil, fmt.Errorf("calibration: %w", err)
		}
		p.coefficients = append(p.coefficients, float64(c))
	}
	return p, nil
}

// calibrate lays out n pixels.
func (p *pixels) calibrate(n int) error {
	lambda, width := make([]unit.Metre, n), make([]float64, n)
	for i := range n {
		x, v, slope := float64(i), 0.0, 0.0
		for k := len(p.coefficients) - 1; k >= 0; k-- { // Horner, value and derivative
			slope = slope*x + v
			v = v*x + p.coefficients[k]
		}
		lambda[i], width[i] = unit.Metre(v), math.Abs(slope)
		if !(v > 0) || width[i] == 0 {
			return fmt.Errorf("calibration gives %s nm to pixel %d of %d", short(v*1e9), i, n)
		}
		if p.air {
			lambda[i] = air.Vacuum(lambda[i])
		}
	}
	turned := lambda[0] > lambda[n-1]
	if turned {
		slices.Reverse(lambda)
		slices.Reverse(width)
	}
	for i := 1; i < n; i++ {
		if !(lambda[i] > lambda[i-1]) {
			return fmt.Errorf("calibration turns round at pixel %d of %d", i, n)
		}
	}
	p.lambda, p.width, p.turned, p.density = lambda, width, turned, make([]float64, n)
	return nil
}

// found is what one spectrum says.
type found struct {
	lobe   spectrum.Lobe
	status reading.Status
	reason string
}

// find looks for the emission in the counts of all pixels.
func (p *pixels) find(counts []float64) found {
	fail := func(s reading.Status, format string, args ...any) found {
		return found{status: s, reason: fmt.Sprintf(format, args...)}
	}
	if !(p.pump > 0) {
		return fail(reading.Failure, "the pump wavelength is not known")
	}
	if len(counts) < fewestPixels {
		return fail(reading.Failure, "a spectrum of %d pixels: expected %d at least", len(counts), fewestPixels)
	}
	if len(counts) != len(p.lambda) {
		if err := p.calibrate(len(counts)); err != nil {
			return fail(reading.Failure, "%v", err)
		}
	}
	highest := math.Inf(-1)
	for i, c := range counts {
		if math.IsNaN(c) || math.IsInf(c, 0) {
			return fail(reading.Failure, "pixel %d of the spectrum has no value", i)
		}
		at := i
		if p.turned {
			at = len(counts) - 1 - i
		}
		p.density[at] = (c - p.dark) / p.width[at]
		highest = max(highest, c-p.dark)
	}
	if highest < p.threshold || highest <= 0 {
		return fail(reading.FunctionCheck, "no light: the highest pixel is %s counts above dark, threshold is %s", short(highest), short(p.threshold))
	}
	d, err := spectrum.FromWavelengths(p.lambda, p.density)
	if err != nil {
		return fail(reading.Failure, "%v", err)
	}
	lobes, err := spectrum.Lobes(d, p.pump)
	switch {
	case err != nil:
		return fail(reading.FunctionCheck, "%v", err)
	case len(lobes) == 0:
		return fail(reading.FunctionCheck, "no emission in the spectrum")
	}
	f := found{lobe: lobes[0], status: reading.Good}
	if full := p.full(counts, f.lobe); full > 0 {
		f.status, f.reason = reading.OutOfSpecification, fmt.Sprintf("%d pixels of the emission are saturated at %s counts", full, short(p.saturation))
	}
	return f
}

// full counts the saturated pixels within the width of a lobe.
func (p *pixels) full(counts []float64, l spectrum.Lobe) (n int) {
	if p.saturation <= 0 {
		return 0
	}
	for i, c := range counts {
		at := i
		if p.turned {
			at = len(counts) - 1 - i
		}
		if c >= p.saturation && math.Abs(float64(p.lambda[at]-l.Centroid)) <= float64(l.Width) {
			n++
		}
	}
	return n
}

// read makes the reading of one channel.
func (p *pixels) read(c *channel, f found, at reading.Stamp) reading.Reading {
	if f.status != reading.Good && f.status != reading.OutOfSpecification {
		r := c.fail(at, f.reason)
		r.Status = f.status
		return r
	}
	v := float64(f.lobe.Centroid)
	switch {
	case c.spec.Role == reading.EmissionWidth:
		v = float64(f.lobe.Width)
	case c.spec.Role == reading.EmissionStrength:
		v = f.lobe.Conversion
	case p.peak:
		v = float64(f.lobe.Peak)
	}
	r := c.read(c.spec.Number(v), at)
	if r.Status == reading.Good && f.status != reading.Good {
		r.Status, r.Reason = f.status, f.reason
	}
	return r
}
