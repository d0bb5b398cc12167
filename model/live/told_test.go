package live

import (
	"testing"
	"time"

	"barline/model/emission"
	"barline/model/reading"
	"barline/model/unit"
)

// red is a model that knows better: 3 nm longer than straight.
type red struct{ straight }

func (r red) Predict(in emission.Input, before *emission.Prediction) emission.Prediction {
	p := r.straight.Predict(in, before)
	p.Emission += 3 * unit.Nanometre
	p.Answer = emission.Anchored
	return p
}

func newStory(t *testing.T) *story {
	t.Helper()
	core, state, err := New(testBench(), straight{})
	if err != nil {
		t.Fatal(err)
	}
	st := &story{t: t, core: core, state: state, obey: true}
	st.step(RecordChanged{At: st.stamp(), Health: RecordHealth{Writing: true}})
	for _, in := range []string{"gauges", "controller"} {
		st.step(LinkChanged{At: st.stamp(), Instrument: in, Up: true})
	}
	st.wire = 8 * unit.Bar
	st.run(time.Second)
	return st
}

func TestAModelThatKnowsMoreIsAskedFromThenOn(t *testing.T) {
	st := newStory(t)
	if got := st.state.Prediction.Emission; got != 264*unit.Nanometre {
		t.Fatalf("predicted %v, want 264 nm", got)
	}
	// Progress alone changes nothing but the count.
	st.step(ModelChanged{At: st.stamp(), Nodes: 1, NodesPlanned: 9})
	if have, planned := st.state.Nodes(); have != 1 || planned != 9 || st.state.Prediction.Answer != emission.Estimate {
		t.Fatalf("%d of %d nodes, answer %v", have, planned, st.state.Prediction.Answer)
	}
	fx := st.step(ModelChanged{At: st.stamp(), Predictor: red{}, Answer: "anchored", Nodes: 4, NodesPlanned: 9})
	if len(fx) != 1 || fx[0] != "record node" {
		t.Errorf("effects %v, want the record of it", fx)
	}
	st.run(1200 * time.Millisecond)
	if p := st.state.Prediction; p.Answer != emission.Anchored || p.Emission.String() != "267 nm" {
		t.Errorf("predicted %v by %v, want 267 nm anchored", p.Emission, p.Answer)
	}
	st.step(st.reading("emission", reading.Emission, 268e-9, reading.Good))
	if d := float64(st.state.Residual) - 1e-9; d > 1e-15 || d < -1e-15 {
		t.Errorf("residual %v, want 1 nm", st.state.Residual)
	}
}

// Who follows a record takes it as it was and commands nothing, whatever the
// gauges do.
func TestWhoFollowsDecidesNothing(t *testing.T) {
	st := newStory(t)
	st.obey = false
	command, ok := ToldBy(st.stamp(), CommandData{Command: 7, SetpointPa: 9e5})
	if !ok {
		t.Fatal("a command tells nothing")
	}
	st.step(command)
	if st.state.Mode != Ramping || st.state.Setpoint != 9*unit.Bar {
		t.Fatalf("%v at %v, want ramping at 9 bar", st.state.Mode, st.state.Setpoint)
	}
	st.run(30 * time.Second) // the gauges go stale, which would hold a core that commands
	if st.state.Mode != Ramping || len(st.heard) != 0 {
		t.Errorf("%v with %d setpoints sent, want ramping and none", st.state.Mode, len(st.heard))
	}
	hold, _ := ToldBy(st.stamp(), CommandData{Hold: true, Why: "asked for", SetpointPa: 8e5})
	st.step(hold)
	if st.state.Mode != Held || st.state.Why != "asked for" {
		t.Errorf("%v because %q", st.state.Mode, st.state.Why)
	}
	if _, ok := ToldBy(st.stamp(), IntentData{Intent: "arm", Refused: "no"}); ok {
		t.Error("a refused intent tells something")
	}
}
