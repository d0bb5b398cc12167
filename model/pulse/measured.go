package pulse

import (
	"cmp"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"

	"barline/model/unit"
)

// Measured is the spectrum of a pulse as an instrument found it, with its
// phase: E(ω) = |E| exp(iφ), so that positive group-delay dispersion is a phase
// that bends upwards.
type Measured struct {
	omega     []float64 // rad/s, ascending
	amplitude []float64 // √(energy per angular frequency), relative
	phase     []float64 // rad, less the slope that only delays the pulse
}

const (
	counts       = 0.01 // of the highest intensity: what is weaker needs no care
	widestGap    = 4.0  // over the median distance of points
	leastNoise   = -0.02
	leastSamples = 8
)

// ReadMeasured reads comma-separated lines of vacuum wavelength in nm, energy
// per wavelength in any unit and, where it is known, phase in rad; lines that
// begin with # and one line of names are passed over. It refuses gaps, values
// that are no numbers, and phases that turn by more than π between neighbours
// where there is light.
func ReadMeasured(r io.Reader) (*Measured, error) {
	in := csv.NewReader(r)
	in.Comment, in.TrimLeadingSpace, in.ReuseRecord = '#', true, true
	type point struct{ lambda, energy, phase float64 }
	var points []point
	for first := true; ; first = false {
		fields, err := in.Read()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return nil, fmt.Errorf("spectrum: %w", err)
		}
		line, _ := in.FieldPos(0)
		if len(fields) != 2 && len(fields) != 3 {
			return nil, fmt.Errorf("spectrum: line %d has %d columns, expected wavelength in nm, energy and perhaps phase in rad", line, len(fields))
		}
		var v [3]float64
		bad := false
		for i, f := range fields {
			if v[i], err = strconv.ParseFloat(f, 64); err != nil || math.IsNaN(v[i]) || math.IsInf(v[i], 0) {
				bad = true
				if !first {
					return nil, fmt.Errorf("spectrum: line %d: %q is no number", line, f)
				}
			}
		}
		if bad {
			continue // names of the columns
		}
		if !(v[0] > 50 && v[0] < 20000) {
			return nil, fmt.Errorf("spectrum: line %d: wavelength %g nm, expected 50 nm to 20000 nm", line, v[0])
		}
		points = append(points, point{v[0] * 1e-9, v[1], v[2]})
	}
	if len(points) < leastSamples {
		return nil, fmt.Errorf("spectrum of %d points, expected at least %d", len(points), leastSamples)
	}
	slices.SortFunc(points, func(a, b point) int { return cmp.Compare(b.lambda, a.lambda) })
	m := &Measured{}
	top := 0.0
	for _, p := range points {
		top = max(top, p.energy)
	}
	if !(top > 0) {
		return nil, errors.New("spectrum holds no energy")
	}
	for _, p := range points {
		if p.energy < leastNoise*top {
			return nil, fmt.Errorf("spectrum: energy %g at %.4g nm, expected none below zero", p.energy, p.lambda*1e9)
		}
		m.omega = append(m.omega, 2*math.Pi*lightSpeed/p.lambda)
		m.amplitude = append(m.amplitude, p.lambda*math.Sqrt(max(p.energy, 0)))
		m.phase = append(m.phase, p.phase)
	}
	if err := m.check(); err != nil {
		return nil, err
	}
	m.centre()
	return m, nil
}

func (m *Measured) check() error {
	var steps []float64
	top := slices.Max(m.amplitude)
	lit := func(i int) bool { return m.amplitude[i]*m.amplitude[i] > counts*top*top }
	for i := 1; i < len(m.omega); i++ {
		if !(m.omega[i] > m.omega[i-1]) {
			return fmt.Errorf("spectrum: %.6g nm stands twice", 2*math.Pi*lightSpeed/m.omega[i]*1e9)
		}
		steps = append(steps, m.omega[i]-m.omega[i-1])
	}
	sorted := slices.Clone(steps)
	slices.Sort(sorted)
	median := sorted[len(sorted)/2]
	for i, step := range steps {
		if !lit(i) && !lit(i+1) {
			continue
		}
		from, to := 2*math.Pi*lightSpeed/m.omega[i+1]*1e9, 2*math.Pi*lightSpeed/m.omega[i]*1e9
		if step > widestGap*median {
			return fmt.Errorf("spectrum has a gap from %.5g to %.5g nm where there is light", from, to)
		}
		if turn := math.Abs(m.phase[i+1] - m.phase[i]); turn > math.Pi {
			return fmt.Errorf("spectrum: the phase turns by %.3g rad from %.5g to %.5g nm, expected at most π: unwrap it or take finer steps", turn, from, to)
		}
	}
	return nil
}

// centre takes the slope out of the phase that only delays the pulse: the
// energy-weighted mean of the group delay.
func (m *Measured) centre() {
	var delay, weight float64
	for i := 1; i < len(m.omega); i++ {
		d := m.omega[i] - m.omega[i-1]
		e := (m.amplitude[i]*m.amplitude[i] + m.amplitude[i-1]*m.amplitude[i-1]) / 2
		delay += e * (m.phase[i] - m.phase[i-1])
		weight += e * d
	}
	slope := delay / weight
	for i := range m.phase {
		m.phase[i] -= slope * (m.omega[i] - m.omega[0])
	}
}

// launch returns the spectrum in the kept bins of g, in straight lines between
// the points, scaled so that it carries the energy in medium m.
func (p *Measured) launch(g Grid, m *Medium, energy unit.Joule) ([]complex128, error) {
	if !(energy > 0) {
		return nil, fmt.Errorf("pulse of %g uJ: want above 0", energy.Microjoules())
	}
	spectrum := make([]complex128, g.Bins())
	start := float64(g.Origin()) * float64(g.Step)
	kept := 0.0
	for i := range spectrum {
		omega := g.Omega(g.Lo + i)
		j, _ := slices.BinarySearch(p.omega, omega)
		if j == 0 || j == len(p.omega) {
			continue
		}
		f := (omega - p.omega[j-1]) / (p.omega[j] - p.omega[j-1])
		a := p.amplitude[j-1] + f*(p.amplitude[j]-p.amplitude[j-1])
		phase := p.phase[j-1] + f*(p.phase[j]-p.phase[j-1])
		sin, cos := math.Sincos(-phase - omega*start) // conjugate, as spectra here are
		spectrum[i] = complex(a*cos, a*sin)
		kept += a * a * g.Spacing()
	}
	total := 0.0
	for j := 1; j < len(p.omega); j++ {
		a, b := p.amplitude[j-1], p.amplitude[j]
		total += (a*a + a*b + b*b) / 3 * (p.omega[j] - p.omega[j-1])
	}
	if kept < 0.99*total {
		return nil, fmt.Errorf("spectrum: %.2g %% of its energy lies outside the grid's band, or its points are finer than the grid", 100*(1-kept/total))
	}
	m.scaleTo(g, spectrum, float64(energy))
	return spectrum, nil
}
