package live

import (
	"encoding/json"
	"math"
	"reflect"
	"testing"
	"time"

	"barline/model/reading"
	"barline/model/unit"
)

func testProgram() *Program {
	return &Program{Name: "scan", Phases: []Phase{
		{Label: "energy", Action: SetEnergy, Energy: 1.1 * unit.Microjoule},
		{Label: "one", Target: 7 * unit.Bar, Rate: 1e3, Within: 500, Floor: 2, Patience: time.Minute, Dwell: 1500 * time.Millisecond, Row: true},
		{Label: "two", Target: 7.5 * unit.Bar, Dwell: 2 * time.Second, Row: true},
		{Label: "shut", Action: Isolate, Dwell: time.Minute, MaxRise: 3},
		{Label: "wait", Action: Stay, Dwell: time.Hour},
	}}
}

// What a record keeps of a program is the program.
func TestAPlanIsTheWholeProgram(t *testing.T) {
	text, err := json.Marshal(testProgram().plan())
	if err != nil {
		t.Fatal(err)
	}
	var back Plan
	if err := json.Unmarshal(text, &back); err != nil {
		t.Fatal(err)
	}
	got, err := back.program()
	if err != nil || !reflect.DeepEqual(got, testProgram()) {
		t.Errorf("%v\nread back %+v\nwant %+v", err, got, testProgram())
	}
	back.Phases[0].Action = "leap"
	if _, err := back.program(); err == nil {
		t.Error("an unknown action was taken")
	}
}

// A record that ends in the middle of a program offers the rest of it, and
// only that.
func TestUnfinishedOffersTheRest(t *testing.T) {
	run := IntentData{Intent: "run", Program: "scan", Plan: testProgram().plan()}
	begin := func(n int) IntentData { return IntentData{Intent: "begin", Program: "scan", Phase: n} }
	row := func(n int) StepData { return StepData{Program: "scan", Step: n} }
	hold := CommandData{Hold: true, Why: "asked for"}
	for _, c := range []struct {
		name     string
		records  []any
		done, of int
		first    string // phase
		phases   int
	}{
		{"nothing", []any{IntentData{Intent: "arm"}, row(3)}, 0, 0, "", 0},
		{"begun", []any{run}, 0, 5, "energy", 5},
		{"a row written", []any{run, begin(2), row(2)}, 2, 5, "energy", 4},
		{"the next begun", []any{run, begin(2), row(2), begin(3)}, 2, 5, "energy", 4},
		{"isolating is no HOLD", []any{run, begin(4), CommandData{Hold: true, Why: isolating}, begin(5)}, 4, 5, "energy", 2},
		{"held", []any{run, begin(2), hold, begin(4)}, 1, 5, "energy", 5},
		{"complete", []any{run, begin(5), IntentData{Intent: "complete", Program: "scan"}}, 0, 0, "", 0},
		{"stopped", []any{run, begin(3), IntentData{Intent: "stop"}}, 0, 0, "", 0},
		{"refused", []any{IntentData{Intent: "run", Program: "scan", Plan: testProgram().plan(), Refused: "not armed"}}, 0, 0, "", 0},
		{"another begun", []any{run, begin(3), run}, 0, 5, "energy", 5},
		{"all rows and no word of completion", []any{run, row(5)}, 0, 0, "", 0},
		{"a step of another program", []any{run, StepData{Program: "tune", Step: 4}}, 0, 5, "energy", 5},
	} {
		var u Unfinished
		for _, r := range c.records {
			u.See(newStory(t).stamp(), r)
		}
		done, of := u.Steps()
		p := u.Program()
		if done != c.done || of != c.of || (p == nil) != (c.of == 0) {
			t.Errorf("%s: %d of %d, %v; want %d of %d", c.name, done, of, p, c.done, c.of)
		}
		if p != nil && (p.Phases[0].Label != c.first || len(p.Phases) != c.phases || p.First+len(p.Phases) != 5) {
			t.Errorf("%s: %d phases from %q, first %d; want %d from %q", c.name, len(p.Phases), p.Phases[0].Label, p.First, c.phases, c.first)
		}
	}
}

// A resumed program that is cut off again is offered from where it came to,
// counted as in the whole.
func TestTheRestOfARestCountsOn(t *testing.T) {
	whole := &Program{Name: "scan"}
	for range 10 {
		whole.Phases = append(whole.Phases, Phase{Label: "step", Target: 7 * unit.Bar, Row: true})
	}
	rest, err := whole.Rest(4)
	if err != nil || rest.First != 4 || len(rest.Phases) != 6 {
		t.Fatal(rest, err)
	}
	var u Unfinished
	u.See(newStory(t).stamp(), IntentData{Intent: "run", Plan: rest.plan()})
	u.See(newStory(t).stamp(), IntentData{Intent: "begin", Program: "scan", Phase: 7})
	if done, of := u.Steps(); done != 6 || of != 10 {
		t.Errorf("%d of %d, want 6 of 10", done, of)
	}
	for _, n := range []int{-1, 10} {
		if p, err := whole.Rest(n); err == nil {
			t.Errorf("behind step %d: %v", n, p)
		}
	}
}

// An evacuation to a rate ends where the pump is at its end.
func TestAFloorEndsAnEvacuation(t *testing.T) {
	st := newStory(t)
	st.obey = false
	st.step(Asked{At: st.stamp(), Intent: Arm{}})
	st.step(Asked{At: st.stamp(), Intent: Understood{Venting}})
	st.step(Asked{At: st.stamp(), Intent: Run{Program: &Program{Name: "evacuate", Phases: []Phase{
		{Label: "evacuating", Target: 0, Floor: 5, Dwell: time.Second},
	}}}})
	p, low := 8e5, time.Duration(0)
	for st.state.Outcome() == NoOutcome && st.mono < 20*time.Minute {
		st.mono += 50 * time.Millisecond
		for _, id := range st.answer {
			st.step(Answered{At: st.stamp(), Command: id})
		}
		st.answer = nil
		// The gas follows its setpoint down to 30 mbar; from there the pump
		// takes it towards 10 mbar with a time constant of a minute.
		switch {
		case p > 3e3:
			p = max(float64(st.wire), p-1e3, 3e3)
			low = st.mono
		default:
			p = 1e3 + 2e3*math.Exp(-float64(st.mono-low)/float64(time.Minute))
		}
		st.step(st.reading("cell A", reading.CellAPressure, p, reading.Good))
		st.step(st.reading("cell B", reading.CellBPressure, p, reading.Good))
		st.tick()
	}
	// 2 kPa of distance fall by less than 5 Pa/s after ln(2000/60/5) minutes,
	// 114 s; two stretches of 10 s must show it.
	if took := st.mono - low; st.state.Outcome() != Completed || took < 100*time.Second || took > 150*time.Second {
		t.Errorf("the evacuation ended in %v (%s, %s) at %.0f Pa after %v at the pump's end", st.state.Mode, st.state.Why, st.state.Notice, p, took)
	}
}
