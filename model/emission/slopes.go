package emission

// Slopes returns by how much the emission of a prediction moves with each
// quantity, in m per unit of it, and which of them are rough: those that no
// full-field run has measured. ok is false where there is no emission.
func (p *Predictor) Slopes(pr Prediction) (slope [QuantityCount]float64, rough [QuantityCount]bool, ok bool) {
	if p.beyond != nil && pr.Answer != Anchored {
		return p.beyond.Slopes(pr)
	}
	e, ok := p.effectsOf(pr)
	if !ok {
		return slope, rough, false
	}
	for q := range Quantity(QuantityCount) {
		rough[q] = e.rough(q, p)
	}
	if e.slope[Air] == 0 { // weighed only where its uncertainty is known
		e.slope[Air] = p.overAir(pr)
	}
	return e.slope, rough, true
}

// overAir is how the emission moves with the share of air, by a difference.
func (p *Predictor) overAir(pr Prediction) float64 {
	const some = 1e-3
	in := pr.Input
	in.Air += some
	if q := p.Predict(in, nil); q.Valid && q.Emission != 0 && q.Answer == pr.Answer {
		return float64(q.Emission-pr.Emission) / some
	}
	return 0
}
