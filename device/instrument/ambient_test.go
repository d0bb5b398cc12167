package instrument

import (
	"testing"
	"time"

	"barline/model/reading"
	"barline/model/unit"
)

func TestGaugePressureFollowsTheBarometer(t *testing.T) {
	in := build(t, controller())
	air := NewAmbient(1.013 * unit.Bar)
	in.CountFrom(air)
	b := Barometer{Sink: newNotes(), Air: air}
	d := &device{level: 2, measured: 2}
	for _, c := range []struct {
		barometer float64
		status    reading.Status
		want      float64
	}{
		{0, reading.Failure, 3.013e5},
		{0.95e5, reading.Good, 2.95e5},
		{0.97e5, reading.Failure, 2.95e5},
		{9e5, reading.Good, 2.95e5}, // a barometer on the wrong tap
	} {
		b.Reading(reading.Reading{Role: reading.Ambient, Value: c.barometer, Status: c.status})
		got, err := in.Poll(&scripted{answer: d.answer}, clockOf(time.Millisecond), nil)
		if m := byChannel(t, got); err != nil || !near(m["inside"].Value, c.want, 1e-6) {
			t.Errorf("barometer %v Pa, %v: %+v, %v; want %v Pa", c.barometer, c.status, m["inside"], err, c.want)
		}
	}
}
