package live

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"reflect"
	"testing"
	"time"

	"barline/model/reading"
	"barline/model/unit"
)

// Whatever the gauges say, and in whatever order, nothing that a screen or the
// record shows is a number that is none: cells below zero by an offset, ends
// that differ by orders of magnitude, readings from the past, values that no
// instrument should send.
func TestNoReadingMakesANumberThatIsNone(t *testing.T) {
	for seed := range uint64(2) {
		st := newGas(t)
		rng := rand.New(rand.NewPCG(seed, 5))
		values := []float64{0, -600, -1e5, 1e-300, 1e-3, 12, 4e4, 9e5, 1.6e6, 1e12, math.MaxFloat64, math.NaN(), math.Inf(1), math.Inf(-1), -math.MaxFloat64}
		st.ask(Arm{})
		for range 150 {
			st.mono += time.Duration(rng.IntN(400)) * time.Millisecond
			for _, role := range []reading.Role{reading.CellAPressure, reading.CellBPressure, reading.FibreTemperature, reading.Emission, reading.PulseEnergy, reading.Setpoint, reading.VentValve, reading.InletValve, reading.Attenuator, reading.ShutterOpen, reading.Ambient} {
				if rng.IntN(3) == 0 {
					continue
				}
				r := st.reading(role.String(), role, values[rng.IntN(len(values))], reading.Status(rng.IntN(5))).(Read)
				switch rng.IntN(3) {
				case 0:
					r.Reading.Value = map[reading.Role]float64{reading.FibreTemperature: 295, reading.Emission: 260e-9, reading.PulseEnergy: 1.3e-6}[role]
					if role.IsPressure() {
						r.Reading.Value = 9e5 * rng.Float64()
					}
				case 1:
					r.Reading.Taken.Mono -= time.Duration(rng.IntN(5000)) * time.Millisecond
				}
				st.encodes(seed, r)
			}
			switch rng.IntN(8) {
			case 0:
				st.encodes(seed, Asked{At: st.stamp(), Intent: GoTo{Target: unit.Pascal(1e6 * rng.Float64())}})
			case 1:
				st.encodes(seed, Asked{At: st.stamp(), Intent: Arm{}})
			case 2:
				st.encodes(seed, Asked{At: st.stamp(), Intent: ZeroGauge{reading.CellAPressure, unit.Pascal(values[rng.IntN(len(values))])}})
			case 3:
				st.encodes(seed, Asked{At: st.stamp(), Intent: Attenuate{unit.Joule(values[rng.IntN(len(values))])}})
			}
			st.encodes(seed, Tick{At: st.stamp()})
		}
	}
}

// encodes folds an event and fails where a record cannot be written, or the
// state that the screen draws holds a number that is none.
func (st *story) encodes(seed uint64, e Event) {
	st.t.Helper()
	for _, f := range st.core.Step(&st.state, e, nil) {
		if r, ok := f.(Record); ok {
			if _, err := json.Marshal(r.Data); err != nil {
				st.t.Fatalf("seed %d at %v: %v in %+v", seed, st.mono, err, r.Data)
			}
		}
	}
	s := &st.state
	cells, core := st.core.Air(s)
	shown := map[string]float64{
		"core": float64(s.Core), "lag": float64(s.Lag), "setpoint": float64(s.Setpoint), "target": float64(s.Target),
		"differential": float64(s.Differential), "residual": float64(s.Residual), "air in the cells": float64(cells), "air in the core": float64(core),
	}
	for i, p := range st.core.Profile(s, make([]unit.Pascal, 8)) {
		shown["profile "+string(rune('0'+i))] = float64(p)
	}
	for name, v := range shown {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			st.t.Fatalf("seed %d at %v: %s is %v", seed, st.mono, name, v)
		}
	}
	in := reflect.ValueOf(s.Prediction.Input)
	for i := range in.NumField() {
		if v := in.Field(i); v.Kind() == reflect.Float64 && (math.IsNaN(v.Float()) || math.IsInf(v.Float(), 0)) {
			st.t.Fatalf("seed %d at %v: predicted for %+v", seed, st.mono, s.Prediction.Input)
		}
	}
}
