package live

import (
	"math"

	"barline/model/emission"
	"barline/model/reading"
	"barline/model/unit"
)

// coreGas works out the pressure that the light sees from the cells' gauges.
func (c *Core) coreGas(s *State) {
	a, b := s.Reading(reading.CellAPressure, c.stale), s.Reading(reading.CellBPressure, c.stale)
	switch {
	case a.Status.Usable() && b.Status.Usable():
		// With steady viscous flow p² is linear along the core; the pulse
		// is shortest near the middle of it.
		s.Core = unit.Pascal(math.Sqrt((a.Value*a.Value + b.Value*b.Value) / 2))
		s.CoreKnown = true
	case a.Status.Usable():
		s.Core, s.CoreKnown = unit.Pascal(a.Value), true
	case b.Status.Usable():
		s.Core, s.CoreKnown = unit.Pascal(b.Value), true
	default:
		s.CoreKnown = false
	}
	if s.CoreKnown && !(s.Core >= 0) {
		s.Core = 0 // a gauge below zero by its offset: the cell is empty
	}
}

// predict asks the model what the gas that is in the core now should emit,
// and records the answer when it has moved.
func (c *Core) predict(s *State, fx []Effect) []Effect {
	if !s.CoreKnown || s.Now.Mono-s.predicted < predictEvery && s.predicted != 0 {
		return fx
	}
	s.predicted = s.Now.Mono
	in := emission.Input{Pressure: s.Core, Temperature: assumedTemperature, Energy: c.energy}
	if t := s.Reading(reading.FibreTemperature, c.stale); t.Status.Usable() {
		in.Temperature = unit.Kelvin(t.Value)
	}
	if e := s.Reading(reading.PulseEnergy, c.stale); e.Status.Usable() {
		in.Energy = unit.Joule(e.Value)
	}
	if in != s.Prediction.Input || !s.Prediction.Valid {
		s.Prediction = c.predictor.Predict(in, &s.Prediction)
	}
	moved := math.Abs(float64(s.Prediction.Emission-s.recorded.emission)) > float64(c.wavelength)
	if moved || s.recorded.at == 0 || s.Now.Mono-s.recorded.at >= c.heartbeat {
		s.recorded.at, s.recorded.emission = s.Now.Mono, s.Prediction.Emission
		fx = append(fx, Record{At: s.Now, Kind: KindPrediction, Data: c.predictionData(s)})
	}
	return fx
}
