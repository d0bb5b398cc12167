package live

import (
	"barline/model/drift"
	"barline/model/emission"
)

// SlopesOf returns how the light of a prediction answers to what may go on.
// Strength and width follow the pulse as far as full-field runs say; rough
// says that none has said yet how the wavelength follows it.
func SlopesOf(p *emission.Predictor, pr emission.Prediction) (s drift.Slopes, rough bool) {
	slope, unsure, ok := p.Slopes(pr)
	if !ok {
		return s, true
	}
	s = drift.Slopes{
		Pressure: slope[emission.Pressure], Temperature: slope[emission.Temperature], Energy: slope[emission.PulseEnergy],
		Duration: slope[emission.PulseDuration], Core: slope[emission.CoreRadius], Air: slope[emission.Air],
	}
	if nodes := p.Nodes(); nodes != nil && pr.Answer == emission.Anchored {
		if shape, ok := nodes.Shape(float64(pr.Density), pr.Input.Energy); ok {
			s.StrengthEnergy, s.WidthEnergy = shape.StrengthEnergy, shape.WidthEnergy
			s.StrengthDuration, s.WidthDuration = shape.StrengthDuration, shape.WidthDuration
			if !shape.DurationKnown { // a longer pulse is a weaker one, as far as is known
				s.StrengthDuration, s.WidthDuration = -shape.StrengthEnergy, -shape.WidthEnergy
			}
		}
	}
	return s, unsure[emission.PulseEnergy] || unsure[emission.PulseDuration]
}
