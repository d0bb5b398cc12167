package live

import (
	"time"

	"barline/model/flow"
	"barline/model/reading"
	"barline/model/unit"
)

// risePoints bounds the readings of one leak test; a longer one keeps every
// second, fourth … reading.
const risePoints = 240

// riseLog is the pressure of a volume whose valves are shut.
type riseLog struct {
	points [risePoints]flow.RisePoint
	n      int
	every  time.Duration
}

func (l *riseLog) add(p flow.RisePoint) {
	if l.n > 0 && p.At-l.points[l.n-1].At < l.every {
		return
	}
	if l.n == risePoints {
		for i := range risePoints / 2 {
			l.points[i] = l.points[2*i]
		}
		l.n /= 2
		l.every = max(2*l.every, p.At-l.points[l.n-1].At)
	}
	l.points[l.n] = p
	l.n++
}

// vacuum is the pressure below which walls give off more than they hold back.
const vacuum = 100 * unit.Millibar

// watchRise adds a reading of cell A to the leak test under way.
func (c *Core) watchRise(s *State, r reading.Reading) {
	t := reading.CellTemperature
	if x := s.Reading(t, c.stale); !x.Status.Usable() {
		t = reading.FibreTemperature
	}
	temperature := assumedTemperature
	if x := s.Reading(t, c.stale); x.Status.Usable() {
		temperature = unit.Kelvin(x.Value)
	}
	if r.Value > 0 {
		s.run.rise.add(flow.RisePoint{At: r.Taken.Mono, Pressure: unit.Pascal(r.Value), Temperature: temperature})
	}
}

// judgeRise says what the leak test showed, or why it showed nothing.
func (c *Core) judgeRise(s *State) *RiseData {
	l := &s.run.rise
	spec := flow.RiseSpec{Volume: c.handling.Cell.Volume, Gas: c.handling.Cell.Gas, WallTime: c.handling.Cell.WallTime}
	if l.n > 0 && l.points[0].Pressure < vacuum {
		spec.Age = max(l.points[0].At-s.rampedAt, time.Second)
	}
	got, err := flow.FitRise(spec, l.points[:l.n])
	if err != nil {
		return &RiseData{Verdict: err.Error()}
	}
	return &RiseData{
		Verdict: got.Verdict.String(), Text: got.String(), Readings: got.Points,
		TotalPaM3S: got.Total.Value, TotalSigma: got.Total.Sigma,
		LeakPaM3S: got.Leak.Value, LeakSigma: got.Leak.Sigma,
		OutgassingPaM3S: got.Outgassing.Value, OutgassingSigma: got.Outgassing.Sigma,
	}
}
