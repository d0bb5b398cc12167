package live

import (
	"testing"
	"time"

	"barline/model/reading"
	"barline/model/unit"
)

// While the shutter is shut, and until a whole exposure has been lit again,
// what is read of the light is a function check and leaves no residual.
func TestClosedShutterIsAFunctionCheck(t *testing.T) {
	core, state, err := New(testBench(), straight{})
	if err != nil {
		t.Fatal(err)
	}
	st := &story{t: t, core: core, state: state, wire: 5 * unit.Bar}
	st.step(RecordChanged{At: st.stamp(), Health: RecordHealth{Writing: true}})
	shutter := func(role reading.Role, v float64) {
		st.step(st.reading(role.String(), role, v, reading.Good))
	}
	emission := func() reading.Status {
		st.show(5 * unit.Bar)
		st.step(st.reading("emission", reading.Emission, 241e-9, reading.Good))
		return st.state.Latest[reading.Emission].Status
	}
	pass := func(d time.Duration) { st.mono += d }
	shutter(reading.ShutterOpen, 1)
	shutter(reading.LaserOn, 1)
	pass(time.Second)
	if got := emission(); got != reading.Good || st.state.ResidualAt != st.mono {
		t.Fatalf("open: %v, residual of %v", got, st.state.ResidualAt)
	}
	for _, role := range []reading.Role{reading.ShutterOpen, reading.LaserOn} {
		last := st.state.ResidualAt
		pass(100 * time.Millisecond)
		shutter(role, 0)
		pass(100 * time.Millisecond)
		if got := emission(); got != reading.FunctionCheck || st.state.ResidualAt != last {
			t.Errorf("%v shut: %v, residual of %v", role, got, st.state.ResidualAt)
		}
		shutter(role, 1)
		pass(900 * time.Millisecond)
		if got := emission(); got != reading.FunctionCheck {
			t.Errorf("%v just opened: %v", role, got)
		}
		pass(200 * time.Millisecond)
		if got := emission(); got != reading.Good || st.state.ResidualAt != st.mono {
			t.Errorf("%v open for a while: %v", role, got)
		}
	}
	// An input that failed says nothing.
	st.step(st.reading("shutter", reading.ShutterOpen, 0, reading.Failure))
	if got := emission(); got != reading.Good {
		t.Errorf("the input failed: %v", got)
	}
	// What the instrument itself found wrong stands.
	shutter(reading.ShutterOpen, 0)
	r := core.Judge(&st.state, reading.Reading{Role: reading.Emission, Status: reading.Failure, Reason: "stale"})
	if r.Status != reading.Failure || r.Reason != "stale" {
		t.Errorf("%+v", r)
	}
}
