package emission

import "barline/model/unit"

// Curve fills dst with predictions at pressures evenly spaced from from to to,
// all else as in in. Each follows the one before, so that a curve stays on its
// branch. dst is overwritten; it may be empty.
func (p *Predictor) Curve(dst []CurvePoint, from, to unit.Pascal, in Input) {
	var before Prediction
	for i := range dst {
		in.Pressure = from
		if len(dst) > 1 {
			in.Pressure = from + (to-from)*unit.Pascal(i)/unit.Pascal(len(dst)-1)
		}
		before = p.Predict(in, &before)
		dst[i] = before.Point()
	}
}

// Map fills one curve for each pulse energy: dst[i] holds predictions at
// energies[i], at pressures evenly spaced from from to to. dst and energies
// have equal length.
func (p *Predictor) Map(dst [][]CurvePoint, energies []unit.Joule, from, to unit.Pascal, in Input) {
	for i, e := range energies {
		in.Energy = e
		p.Curve(dst[i], from, to, in)
	}
}
