package live

import (
	"math"
	"testing"
	"time"

	"barline/model/reading"
	"barline/model/unit"
)

// newGas is a bench with air in its gas and open holes in its cladding.
func newGas(t *testing.T) *story {
	t.Helper()
	b := panelBench()
	b.Panel.Ambient = unit.Atmosphere
	b.Gas.Air, b.Gas.SupplyAir = 0.5, 5e-6
	b.Fibre.CladdingHoles, b.Fibre.CladdingHoleDiameter = 6, 12*unit.Micrometre
	core, state, err := New(b, straight{})
	if err != nil {
		t.Fatal(err)
	}
	st := &story{t: t, core: core, state: state}
	st.step(RecordChanged{At: st.stamp(), Health: RecordHealth{Writing: true}})
	return st
}

// The prediction is for the gas that is in the core: what pumping and filling
// left of the air, there later than in the cells.
func TestPredictionIsForTheAirInTheCore(t *testing.T) {
	st := newGas(t)
	ramp := func(from, to unit.Pascal, d time.Duration) {
		start := st.mono
		st.pass(d, func(now time.Duration) unit.Pascal {
			return from + (to-from)*unit.Pascal(min(1, (now-start).Seconds()/(0.8*d.Seconds())))
		})
	}
	ramp(1*unit.Bar, 0.05*unit.Bar, 40*time.Second)
	if cells, core := st.core.Air(&st.state); cells != 0.5 || math.Abs(float64(core)-0.5) > 1e-9 || math.Abs(float64(st.state.Prediction.Input.Air)-0.5) > 1e-9 {
		t.Fatalf("pumped: %v of air in the cells, %v in the core, predicted for %v", float64(cells), float64(core), float64(st.state.Prediction.Input.Air))
	}
	ramp(0.05*unit.Bar, 5*unit.Bar, 40*time.Second)
	cells, core := st.core.Air(&st.state)
	if want := 0.5 * 0.05 / 5; math.Abs(float64(cells)/want-1) > 0.05 {
		t.Errorf("filled: %v of air in the cells, want %v", float64(cells), want)
	}
	if got := st.state.Prediction.Input.Air; got != core || core < 2*cells {
		t.Errorf("filled: %v in the core, predicted for %v, cells have %v", float64(core), float64(got), float64(cells))
	}
	// Nothing comes in at rest, however the gauge flickers.
	before := cells
	st.pass(20*time.Second, func(now time.Duration) unit.Pascal {
		return 5*unit.Bar + unit.Pascal(100*math.Sin(float64(now)))
	})
	if cells, _ := st.core.Air(&st.state); cells != before {
		t.Errorf("at rest the air in the cells went from %v to %v", float64(before), float64(cells))
	}
}

// What comes in through an open vent below the room's pressure is air.
func TestVentBelowTheRoomLetsAirIn(t *testing.T) {
	st := newGas(t)
	st.pass(time.Second, at(0.2*unit.Bar))
	show := func(p unit.Pascal, vent float64) {
		st.mono += 50 * time.Millisecond
		for _, role := range []reading.Role{reading.CellAPressure, reading.CellBPressure} {
			st.step(st.reading(role.String(), role, float64(p), reading.Good))
		}
		st.step(st.reading("vent", reading.VentValve, vent, reading.Good))
		st.step(st.reading("inlet", reading.InletValve, 0, reading.Good))
		st.step(Tick{At: st.stamp()})
	}
	for p := 0.2 * unit.Bar; p < 1*unit.Bar; p += 0.02 * unit.Bar {
		show(p, 1)
	}
	if cells, _ := st.core.Air(&st.state); math.Abs(float64(cells)-0.9) > 0.01 {
		t.Errorf("%v of air, want 0.9", float64(cells))
	}
}

// The holes of the cladding fill after the core, and until they have the walls
// between stand under the difference.
func TestCladdingFollowsLater(t *testing.T) {
	st := newGas(t)
	st.pass(time.Second, at(1*unit.Bar))
	if d := st.state.Differential; math.Abs(float64(d)) > 1 {
		t.Errorf("at rest the core exceeds the cladding by %v", d)
	}
	st.pass(500*time.Millisecond, at(3*unit.Bar))
	if d := st.state.Differential; d < 0.05*unit.Bar {
		t.Errorf("half a second after a step the core exceeds the cladding by %v", d)
	}
	st.pass(time.Minute, at(3*unit.Bar))
	if d := st.state.Differential; math.Abs(float64(d)) > float64(unit.Millibar) {
		t.Errorf("a minute later the core exceeds the cladding by %v", d)
	}
	none, state, err := New(testBench(), straight{})
	if err != nil {
		t.Fatal(err)
	}
	bare := &story{t: t, core: none, state: state, wire: unit.Bar}
	bare.show(unit.Bar)
	if bare.state.cladding != nil || bare.state.Differential != 0 {
		t.Error("a bench without open holes has some")
	}
}
