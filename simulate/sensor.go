package simulate

import "math"

// transducer is a pressure transducer with lag, zero and span error, noise and
// steps of its converter.
type transducer struct {
	source source
	zero   float64 // Pa
	span   float64 // share of the reading
	rms    float64 // Pa, noise of one conversion
	step   float64 // Pa, of the converter

	value float64 // Pa, behind the lag
	crept float64 // Pa, by which the zero has drifted
}

// follow carries the transducer over one frame at pressure p; its zero creeps
// by rate Pa/s.
func (s *transducer) follow(p, rate float64) {
	const lag = 0.03 // s
	s.value += (p - s.value) * (1 - math.Exp(-frameSec/lag))
	s.crept += rate * frameSec
}

// read returns the conversion of a frame in Pa.
func (s *transducer) read(n noise, frame int64) float64 {
	v := s.value*(1+s.span) + s.zero + s.crept + s.rms*n.normal(s.source, frame)
	return math.Round(v/s.step) * s.step
}

// thermometer is a resistance thermometer.
type thermometer struct {
	source source
	zero   float64 // K
	value  float64 // K
}

func (s *thermometer) follow(t float64) {
	const lag = 5 // s
	s.value += (t - s.value) * frameSec / lag
}

// read returns the conversion of a frame in K.
func (s *thermometer) read(n noise, frame int64) float64 {
	const rms, step = 0.01, 0.005 // K
	v := s.value + s.zero + rms*n.normal(s.source, frame)
	return math.Round(v/step) * step
}
