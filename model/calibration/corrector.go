package calibration

import (
	"fmt"
	"math"

	"barline/model/anchor"
	"barline/model/emission"
	"barline/model/unit"
)

// Corrector lays a calibration over anchored predictions. It never changes
// and may be shared.
type Corrector struct {
	calibration *Calibration
	model       *Model
	// sigma is what corrections, bend and nodes leave open, m, at even pressures over
	// the data and a fifth of their range to either side: finding it anew for
	// each reading would take twenty times as long as the answer itself.
	sigma [sigmaKnots]float64
}

const sigmaKnots = 29

// knot returns the pressure of a knot.
func (k *Corrector) knot(i int) unit.Pascal {
	low, high := k.calibration.PressurePa[0], k.calibration.PressurePa[1]
	return unit.Pascal(low + (high-low)*(-0.2+1.4*float64(i)/(sigmaKnots-1)))
}

// tabulate fills in sigma at the middle of the data's energies.
func (k *Corrector) tabulate() error {
	c := k.calibration
	in := emission.Input{Temperature: 295.15, Energy: unit.Joule((c.EnergyJ[0] + c.EnergyJ[1]) / 2)}
	last, first := math.NaN(), -1
	for i := range k.sigma {
		in.Pressure = k.knot(i)
		if e, err := k.model.nearest(in, &c.Corrections, 0); err == nil {
			if _, sigma, err := c.Predict(k.model, in, e.Wavelength); err == nil {
				last = float64(sigma)
				if first < 0 {
					first = i
				}
			}
		}
		k.sigma[i] = last
	}
	if first < 0 {
		return fmt.Errorf("calibration %q: the full-field runs do not reach its data, %v to %v", c.Name, unit.Pascal(c.PressurePa[0]), unit.Pascal(c.PressurePa[1]))
	}
	for i := range first {
		k.sigma[i] = k.sigma[first]
	}
	return nil
}

// left returns sigma at a pressure.
func (k *Corrector) left(p unit.Pascal) float64 {
	low, high := float64(k.knot(0)), float64(k.knot(sigmaKnots-1))
	x := math.Min(math.Max((float64(p)-low)/(high-low), 0), 1) * (sigmaKnots - 1)
	i := min(int(x), sigmaKnots-2)
	return k.sigma[i] + (x-float64(i))*(k.sigma[i+1]-k.sigma[i])
}

// NewCorrector refuses a calibration that was made on another gas, fibre or
// pulse than the nodes.
func NewCorrector(c *Calibration, nodes *anchor.Map) (*Corrector, error) {
	if nodes == nil || !nodes.Usable() {
		return nil, fmt.Errorf("calibration %q: too few full-field runs stand yet", c.Name)
	}
	if mine := nodes.Bench().Spec().Digest(); c.Digest != "" && c.Digest != mine {
		return nil, fmt.Errorf("calibration %q was made on another gas, fibre or pulse than the bench file says now", c.Name)
	}
	if err := c.Check(); err != nil {
		return nil, err
	}
	if !(c.EnergyJ[0] > 0) {
		return nil, fmt.Errorf("calibration %q: data at %v, expected a pulse energy above zero", c.Name, unit.Joule(c.EnergyJ[0]))
	}
	m, err := NewModel(nodes)
	if err != nil {
		return nil, err
	}
	k := &Corrector{calibration: c, model: m}
	if err := k.tabulate(); err != nil {
		return nil, err
	}
	return k, nil
}

// Calibration returns what is laid over.
func (k *Corrector) Calibration() *Calibration { return k.calibration }

// Correct brings an anchored prediction to what the calibration says, with the
// uncertainty that it leaves; other answers stay as they are, and so does one
// that the corrections carry off its nodes. Outside the range of the data the
// prediction is marked, and its uncertainty grows to what it was without a
// calibration within one more range of pressure.
func (k *Corrector) Correct(p *emission.Prediction) {
	if p.Answer != emission.Anchored || !p.Valid || p.Emission == 0 {
		return
	}
	c := k.calibration
	bent := unit.Metre(c.bent(c.BendM[:], p.Input))
	e, err := k.model.nearest(p.Input, &c.Corrections, p.Emission-bent)
	w := e.Wavelength + bent
	if err != nil || !(w > 0) {
		return
	}
	shift := w - p.Emission
	left := k.left(p.Input.Pressure)
	p.Calibration, p.Beyond = c.Name, !c.Covers(p.Input)
	if p.Beyond {
		left = math.Hypot(left, c.beyond(p.Input)*float64(p.Sigma))
	}
	p.Emission, p.Sigma = w, unit.Metre(left)
	if p.Peak != 0 {
		p.Peak += shift
	}
	for i := range min(p.BranchCount, emission.MaxBranches) {
		// What holds for the strongest branch is the best that is known of
		// the others.
		p.Branches[i].Emission += shift
	}
}

// beyond is how far an input lies outside the data, as a share of their range
// of pressure or of a tenth of their energy, at most one.
func (c *Calibration) beyond(in emission.Input) float64 {
	out := func(v float64, r [2]float64, width float64) float64 {
		if !(width > 0) {
			return 1
		}
		return math.Max(r[0]-v, v-r[1]) / width
	}
	p := out(float64(in.Pressure), c.PressurePa, c.PressurePa[1]-c.PressurePa[0])
	e := out(float64(in.Energy), c.EnergyJ, c.EnergyJ[1]*0.1)
	return math.Min(math.Max(math.Max(p, e), 0), 1)
}

// Check refuses what is no calibration, such as a file that was cut short.
func (c *Calibration) Check() error {
	size := len(c.Values) + bendTerms
	switch {
	case c.Name == "":
		return fmt.Errorf("a calibration without a name")
	case len(c.Values) == 0 || len(c.Covariance) != size:
		return fmt.Errorf("calibration %q: %d values and a covariance of %d rows, expected %d", c.Name, len(c.Values), len(c.Covariance), size)
	case !(c.PressurePa[1] > c.PressurePa[0]) || !(c.PressurePa[0] >= 0):
		return fmt.Errorf("calibration %q: data from %v to %v, expected a range", c.Name, unit.Pascal(c.PressurePa[0]), unit.Pascal(c.PressurePa[1]))
	}
	for _, row := range c.Covariance {
		if len(row) != size {
			return fmt.Errorf("calibration %q: a row of the covariance has %d entries, expected %d", c.Name, len(row), size)
		}
	}
	for _, v := range c.Values {
		if _, err := ParseParameter(v.Parameter); err != nil {
			return fmt.Errorf("calibration %q: %w", c.Name, err)
		}
		if !(v.Sigma >= 0) || math.IsNaN(v.Value) || math.IsInf(v.Value+v.Sigma, 0) {
			return fmt.Errorf("calibration %q: %s is %v ± %v", c.Name, v.Parameter, v.Value, v.Sigma)
		}
	}
	return nil
}

// Apart is by how much two calibrations differ in one correction.
type Apart struct {
	Parameter  Parameter
	One, Other float64
	OneSigma   float64 // 0: not fitted
	OtherSigma float64
	Sigmas     float64 // their difference in its own standard uncertainty; 0 where none is known
}

// Compare lists the corrections that either of two calibrations fitted; nil
// stands for the bench file. The two are taken as independent.
func Compare(one, other *Calibration) (list []Apart) {
	for p := range Parameter(ParameterCount) {
		a, sa := one.value(p)
		b, sb := other.value(p)
		if sa == 0 && sb == 0 && a == b {
			continue
		}
		d := Apart{Parameter: p, One: a, Other: b, OneSigma: sa, OtherSigma: sb}
		if s := math.Hypot(sa, sb); s > 0 {
			d.Sigmas = (b - a) / s
		}
		list = append(list, d)
	}
	return list
}

func (c *Calibration) value(p Parameter) (value, sigma float64) {
	if c == nil {
		return 0, 0
	}
	for _, v := range c.Values {
		if v.Parameter == p.String() {
			sigma = v.Sigma
		}
	}
	return c.Corrections[p], sigma
}

// Residuals returns measured minus predicted emission at the usable points,
// in m, with the calibration, or without where c is nil. Points that the nodes
// do not reach are left out.
func (c *Calibration) Residuals(m *Model, points []Point) (list []float64) {
	for _, p := range points {
		if !p.Status.Usable() || !(p.Value > 0) {
			continue
		}
		var w unit.Metre
		var err error
		if c == nil {
			var e Emission
			e, err = m.nearest(p.Input, new(Corrections), p.Value)
			w = e.Wavelength
		} else {
			w, _, err = c.Predict(m, p.Input, p.Value)
		}
		if err == nil {
			list = append(list, float64(p.Value-w))
		}
	}
	return list
}
