package instrument

import (
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/reading"
	"barline/model/unit"
)

// roles is a Sink that keeps the latest reading that has the role.
type roles struct {
	Sink
	latest reading.Reading
	count  int
}

func (r *roles) Reading(x reading.Reading) {
	if x.Role == reading.ManifoldPressure {
		r.latest = x
		r.count++
	}
}

// A fine gauge to 1 bar(g) and a coarse one to 20 bar on one line: the fine
// one hands over at 95 % of its range and takes over again at 85 %.
func TestHandover(t *testing.T) {
	fine := bench.Channel{Name: "fine", Role: reading.ManifoldPressure, Gauge: true, Factor: 1e5, Low: 0, High: 1e5}
	coarse := bench.Channel{Name: "coarse", Role: reading.ManifoldPressure, Factor: 1e5, Low: 0, High: 20e5}
	const ambient = 1 * unit.Bar
	out := &roles{}
	h := NewHandover([]bench.Channel{coarse, fine}, ambient, time.Second, out)
	now := time.Duration(0)
	say := func(channel string, bar float64, status reading.Status) {
		h.Reading(reading.Reading{Channel: channel, Role: reading.ManifoldPressure, Value: bar * 1e5, Status: status, Taken: reading.Stamp{Mono: now}})
	}
	for i, step := range []struct {
		bar  float64 // absolute
		fine reading.Status
		want string
	}{
		{1.50, reading.Good, "fine"},
		{1.94, reading.Good, "fine"},
		{1.96, reading.Good, "coarse"},               // above 95 % of 1 bar(g)
		{1.90, reading.Good, "coarse"},               // between the two marks
		{1.94, reading.Good, "coarse"},               // lingers
		{1.84, reading.Good, "fine"},                 // below 85 %
		{1.90, reading.Good, "fine"},                 // between the two marks
		{9.00, reading.OutOfSpecification, "coarse"}, // a jump
		{1.50, reading.Failure, "coarse"},
		{1.50, reading.Good, "fine"},
	} {
		now += 100 * time.Millisecond
		say("coarse", step.bar+0.01, reading.Good)
		say("fine", step.bar, step.fine)
		say("coarse", step.bar+0.01, reading.Good)
		if out.latest.Channel != step.want {
			t.Errorf("step %d, %v bar: %s is in charge, want %s", i, step.bar, out.latest.Channel, step.want)
		}
	}
	now += 2 * time.Second // the fine gauge falls silent
	say("coarse", 1.5, reading.Good)
	if out.latest.Channel != "coarse" || out.latest.Taken.Mono != now {
		t.Errorf("a silent gauge is still in charge: %+v", out.latest)
	}
	now += 2 * time.Second
	say("coarse", 1.5, reading.Failure)
	if out.latest.Status != reading.Failure || out.latest.Taken.Mono != now {
		t.Errorf("both have failed, and the role says %+v", out.latest)
	}
}

func TestOnlyGaugesThatShareARoleHandOver(t *testing.T) {
	out := &roles{}
	h := NewHandover([]bench.Channel{{Name: "one", Role: reading.ManifoldPressure, High: 1e5}}, 0, time.Second, out)
	h.Reading(reading.Reading{Channel: "one", Role: reading.ManifoldPressure})
	if out.count != 1 {
		t.Error("the reading of a single gauge lost its role")
	}
}
