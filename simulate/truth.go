package simulate

import "barline/model/unit"

// Truth is how the bench really is, beside what its file says. It is drawn
// from the seed once and never told on the wire.
type Truth struct {
	CoreRadius unit.Fraction // larger than stated by this share
	Wall       unit.Fraction // thicker than stated by this share
	Index      unit.Fraction // refractivity above the published one by this share
	N2         unit.Fraction // nonlinear index, likewise
	Energy     unit.Fraction // energy in the fibre, likewise
	Duration   unit.Fraction // of the pulse, likewise
	Wavelength unit.Metre    // the spectrometer reads this much too long
	ZeroA      unit.Pascal   // cell A's transducer reads this much too high
	ZeroB      unit.Pascal
	SpanA      unit.Fraction // and this share of the reading
	SpanB      unit.Fraction
	// Mismatch bends the nonlinear phase mismatch away from any model of the
	// bench: amplitudes in 1/m of smooth functions of density and energy. Of
	// 10/m the emission moves by a third of a nanometre.
	Mismatch [4]float64
}

// DrawTruth returns what the seed hides.
func DrawTruth(seed uint64) Truth { return drawTruth(noise(seed)) }

// Standard deviations of what is drawn, of the size that a careful bench
// would find: common practice, no source.
func drawTruth(n noise) Truth {
	i := int64(0)
	draw := func(sigma float64) float64 {
		i++
		return sigma * n.bounded(ofTruth, i)
	}
	t := Truth{
		CoreRadius: unit.Fraction(draw(0.008)),
		Wall:       unit.Fraction(draw(0.01)),
		Index:      unit.Fraction(draw(0.003)),
		N2:         unit.Fraction(draw(0.05)),
		Energy:     unit.Fraction(draw(0.03)),
		Wavelength: unit.Metre(draw(0.15e-9)),
		ZeroA:      unit.Pascal(draw(600)),
		ZeroB:      unit.Pascal(draw(600)),
		SpanA:      unit.Fraction(draw(4e-4)),
		SpanB:      unit.Fraction(draw(4e-4)),
	}
	for k := range t.Mismatch {
		t.Mismatch[k] = draw(10)
	}
	t.Duration = unit.Fraction(draw(0.02))
	return t
}
