package live

import (
	"math"
	"time"

	"barline/model/emission"
	"barline/model/reading"
	"barline/model/unit"
)

// coreCells is the grid of the core: its times are within 0.1 % of the finest.
const coreCells = 64

// lagEvery is how often the core's lag behind the cells is worked out.
const lagEvery = 500 * time.Millisecond

// coreGas carries the gas along the core, driven by the cells' gauges, and
// works out the pressure where the pulse is shortest. Where one cell has no
// usable gauge the other stands for both.
func (c *Core) coreGas(s *State) {
	a, b := c.gauge(s, reading.CellAPressure), c.gauge(s, reading.CellBPressure)
	if !a.Status.Usable() {
		a = b
	}
	if !b.Status.Usable() {
		b = a
	}
	known, since, before := s.CoreKnown, s.Now.Mono-s.flowAt, s.flow
	s.CoreKnown = false
	if !a.Status.Usable() {
		return
	}
	t := assumedTemperature
	if r := s.Reading(reading.FibreTemperature, c.stale); r.Status.Usable() {
		t = unit.Kelvin(r.Value)
	}
	// A gauge below zero by its offset: the cell is empty.
	pA, pB := unit.Pascal(max(a.Value, 0)), unit.Pascal(max(b.Value, 0))
	var err error
	if known {
		if err = c.core.Restore(s.flow); err == nil {
			err = c.core.Advance(s.Now.Mono-s.flowAt, pA, pB, t)
		}
	} else {
		// Nothing is known of the time before: take the core as settled.
		err = c.core.Fill(pA, pB, t)
	}
	if err != nil {
		return
	}
	s.flow, s.flowAt, s.CoreKnown = c.core.State(), s.Now.Mono, true
	s.Core = c.core.At(c.compression(s))
	if !known {
		since = 0
	}
	c.claddingGas(s, known, since, pA, pB, t)
	c.mixing.Advance(&s.residue, since, &before, &s.flow, c.openToRoom(s))
	if s.Now.Mono-s.lagAt >= lagEvery || s.lagAt == 0 {
		s.lagAt = s.Now.Mono
		s.Lag = c.core.Lag()
		s.SettleIn, _ = c.core.TimeToSettle(settledWithin)
		if s.cladding != nil {
			wait, _ := c.cladding.TimeToSettle(settledWithin)
			s.SettleIn = max(s.SettleIn, wait)
		}
	}
}

// claddingGas carries the gas along the holes of the cladding, where there are
// any. Until they have followed, the core's walls stand under the difference.
func (c *Core) claddingGas(s *State, known bool, dt time.Duration, pA, pB unit.Pascal, t unit.Kelvin) {
	if c.cladding == nil {
		return
	}
	var err error
	if known && s.cladding != nil {
		if err = c.cladding.Restore(*s.cladding); err == nil {
			err = c.cladding.Advance(dt, pA, pB, t)
		}
	} else {
		err = c.cladding.Fill(pA, pB, t)
	}
	if err != nil {
		s.cladding, s.Differential = nil, 0
		return
	}
	state := c.cladding.State() // a new one each time: states are copied
	s.cladding = &state
	s.Differential = s.Core - c.cladding.At(c.compression(s))
}

// openToRoom reports whether the cells draw air from the room: vented, and
// below its pressure.
func (c *Core) openToRoom(s *State) bool {
	vent, inlet := s.Reading(reading.VentValve, c.stale), s.Reading(reading.InletValve, c.stale)
	if !vent.Status.Usable() || vent.Value <= 0.02 || inlet.Status.Usable() && inlet.Value > 0.02 {
		return false
	}
	room := c.ambient
	if r := s.Reading(reading.Ambient, c.stale); r.Status.Usable() {
		room = unit.Pascal(r.Value)
	}
	p, ok := c.pressure(s)
	return ok && p < room+roomWithin
}

// roomWithin is how much a gauge may read above the room that it is open to.
const roomWithin = 20 * unit.Millibar

// Air returns the air left in the cells and in the core where the pulse is
// shortest, as mole fractions, by
// what was let in and out since the start.
func (c *Core) Air(s *State) (cells, core unit.Fraction) {
	return s.residue.Cells, c.mixing.At(&s.residue, c.compression(s))
}

// compression returns the distance along the fibre at which the pulse is
// shortest by the last prediction, or the middle of the fibre: solitons of
// order N compress near L_fission (0.58 + 1.55/N).
func (c *Core) compression(s *State) unit.Metre {
	p := &s.Prediction
	if !p.Valid || !(p.SolitonOrder > 1) || !(p.FissionLength > 0) {
		return c.core.Length() / 2
	}
	return min(p.FissionLength*unit.Metre(0.58+1.55/p.SolitonOrder), c.core.Length())
}

// Profile fills dst with the pressure along the core in state s, from cell A
// to cell B, at equal distances. It is for screens and changes nothing.
func (c *Core) Profile(s *State, dst []unit.Pascal) []unit.Pascal {
	if !s.CoreKnown || c.core.Restore(s.flow) != nil {
		return dst[:0]
	}
	for i := range dst {
		dst[i] = c.core.At(c.core.Length() * unit.Metre(i) / unit.Metre(max(len(dst)-1, 1)))
	}
	return dst
}

// predict asks the model what the gas that is in the core now should emit,
// and records the answer when it has moved.
func (c *Core) predict(s *State, fx []Effect) []Effect {
	if !s.CoreKnown || s.Now.Mono-s.predicted < predictEvery && s.predicted != 0 {
		return fx
	}
	s.predicted = s.Now.Mono
	in := emission.Input{Pressure: s.Core, Temperature: assumedTemperature, Energy: c.pulseEnergy(s), Air: c.mixing.At(&s.residue, c.compression(s))}
	if t := s.Reading(reading.FibreTemperature, c.stale); t.Status.Usable() {
		in.Temperature = unit.Kelvin(t.Value)
	}
	if in != s.Prediction.Input || !s.Prediction.Valid {
		s.Prediction = c.ask(s).Predict(in, &s.Prediction)
	}
	moved := math.Abs(float64(s.Prediction.Emission-s.recorded.emission)) > float64(c.wavelength)
	if moved || s.recorded.at == 0 || s.Now.Mono-s.recorded.at >= c.heartbeat {
		// What goes into the record is found without the one before it, so
		// that a replay, which has not seen that, finds it again to the bit.
		s.Prediction = c.ask(s).Predict(in, nil)
		s.recorded.at, s.recorded.emission = s.Now.Mono, s.Prediction.Emission
		fx = append(fx, Record{At: s.Now, Kind: KindPrediction, Data: c.predictionData(s)})
	}
	return fx
}

// ask returns the predictor to ask in state s.
func (c *Core) ask(s *State) Predictor {
	if s.calibrating.laid != nil {
		return s.calibrating.laid
	}
	if s.model != nil {
		return s.model
	}
	return c.predictor
}

// modelChanged takes over a predictor and asks it at once.
func (c *Core) modelChanged(s *State, e ModelChanged, fx []Effect) []Effect {
	s.nodes, s.nodesPlanned = e.Nodes, e.NodesPlanned
	if e.Predictor == nil {
		return fx
	}
	s.model = e.Predictor
	c.lay(s)
	c.rebase(s, s.Prediction)
	s.Prediction, s.predicted = emission.Prediction{}, 0
	s.recorded.at = 0 // the next prediction goes into the record
	runs, before := e.Runs, e.Nodes-len(e.Runs)
	for len(runs) > mostRuns { // a record has a bound
		fx = append(fx, Record{At: e.At, Kind: KindNode, Data: NodeData{
			Answer: e.Answer, Nodes: before + mostRuns, Planned: e.NodesPlanned, Runs: runs[:mostRuns:mostRuns],
		}})
		runs, before = runs[mostRuns:], before+mostRuns
	}
	return append(fx, Record{At: e.At, Kind: KindNode, Data: NodeData{
		Answer: e.Answer, Nodes: e.Nodes, Planned: e.NodesPlanned, LeftOutM: float64(e.LeftOutMetres), Runs: runs,
	}})
}

// mostRuns bounds the runs of one node record: some 400 bytes each.
const mostRuns = 500
