package calibration

import (
	"fmt"
	"time"

	"barline/model/emission"
	"barline/model/unit"
)

// Calibration is a set of corrections and what they stand on. It is kept in
// the logbook; keys carry their unit.
type Calibration struct {
	Name        string      `json:"name"`
	Made        time.Time   `json:"made"`
	Data        string      `json:"data"`     // which points, in words
	Replaced    string      `json:"replaced"` // name of the calibration before; empty: the bench file
	Digest      string      `json:"digest"`   // of the bench that the nodes belong to
	Corrections Corrections `json:"corrections"`
	Values      []Value     `json:"values"` // of what was fitted
	// BendM is what the answer is off by, smoothly over pressure and energy,
	// beyond all corrections: coefficients of Legendre polynomials over the
	// range of pressures, then of energy and of both, for a tenth of energy.
	BendM      [bendTerms]float64 `json:"bend_m"`
	Covariance [][]float64        `json:"covariance"` // of Values, then BendM

	From       time.Time  `json:"from"`
	To         time.Time  `json:"to"`
	PressurePa [2]float64 `json:"pressure_Pa"` // lowest and highest
	EnergyJ    [2]float64 `json:"energy_J"`
	Points     int        `json:"points"`
	Freedom    int        `json:"freedom"`
	Reduced    float64    `json:"chi2_per_freedom"`
	Before     float64    `json:"rms_before_m"`
	After      float64    `json:"rms_after_m"`
	Doubtful   []string   `json:"doubtful"`  // points that count for less than half
	SetAside   []SetAside `json:"set_aside"` // points that do not count
	Alike      []Pair     `json:"alike"`     // corrections that the points hardly tell apart
}

// Value is one fitted correction.
type Value struct {
	Parameter string  `json:"parameter"`
	Unit      string  `json:"unit"`
	Value     float64 `json:"value"`
	Sigma     float64 `json:"sigma"`
	Prior     float64 `json:"prior_sigma"` // 0: nothing was known
	Told      float64 `json:"told"`        // share of what is known that the points told
}

// SetAside is a point that could not be used, counted from 1.
type SetAside struct {
	Point int    `json:"point"`
	Why   string `json:"why"`
}

// Pair is two corrections whose errors go together.
type Pair struct {
	One         string  `json:"one"`
	Other       string  `json:"other"`
	Correlation float64 `json:"correlation"`
}

// Covers reports whether an input lies in the range that the calibration was
// made in, a tenth of the range beyond allowed on either side; elsewhere a
// prediction must be marked as extrapolated. An energy range of one value
// allows 2 %.
func (c *Calibration) Covers(in emission.Input) bool {
	within := func(v float64, r [2]float64, slack float64) bool { return v >= r[0]-slack && v <= r[1]+slack }
	return within(float64(in.Pressure), c.PressurePa, (c.PressurePa[1]-c.PressurePa[0])/10) &&
		within(float64(in.Energy), c.EnergyJ, max((c.EnergyJ[1]-c.EnergyJ[0])/10, c.EnergyJ[1]*0.02))
}

// Predict returns the emission at a measured input nearest to near, with the
// uncertainty that corrections, bend and nodes leave, by numerical derivatives.
func (c *Calibration) Predict(m *Model, in emission.Input, near unit.Metre) (w, sigma unit.Metre, err error) {
	bent := unit.Metre(c.bent(c.BendM[:], in))
	e, err := m.nearest(in, &c.Corrections, near-bent)
	if err != nil {
		return 0, 0, err
	}
	slopes := make([]float64, len(c.Values), len(c.Values)+bendTerms)
	for i, v := range c.Values {
		q, err := ParseParameter(v.Parameter)
		if err != nil {
			return 0, 0, err
		}
		h := v.Sigma / 2
		if h == 0 {
			continue
		}
		up, down := c.Corrections, c.Corrections
		up[q] += h
		down[q] -= h
		a, errUp := m.on(e.Branch, in, &up)
		b, errDown := m.on(e.Branch, in, &down)
		switch { // at the edge of the nodes one side is enough
		case errUp == nil && errDown == nil:
			slopes[i] = float64(a-b) / (2 * h)
		case errUp == nil:
			slopes[i] = float64(a-e.Wavelength) / h
		case errDown == nil:
			slopes[i] = float64(e.Wavelength-b) / h
		}
	}
	terms := c.bendAt(in)
	slopes = append(slopes, terms[:]...)
	variance := float64(m.interpolation() * m.interpolation())
	for i, row := range c.Covariance {
		for j, v := range row {
			variance += slopes[i] * slopes[j] * v
		}
	}
	return e.Wavelength + bent, unit.Metre(sqrt(variance)), nil
}

// Summary says in a line what the calibration stands on.
func (c *Calibration) Summary() string {
	return fmt.Sprintf("%d points from %v to %v, %.2f nm rms before and %.2f nm after",
		c.Points, unit.Pascal(c.PressurePa[0]), unit.Pascal(c.PressurePa[1]), 1e9*c.Before, 1e9*c.After)
}
