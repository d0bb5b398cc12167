package main

import (
	"math"
	"math/rand/v2"
	"os"
	"runtime"
	"strconv"
	"testing"
	"time"

	"barline/cmd/barline/loop"
	"barline/logbook"
	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/clock"
	"barline/model/emission"
	"barline/model/limit"
	"barline/model/reading"
	"barline/tui"
	"barline/tui/frame"
)

// idleWire takes what the loop sends nowhere.
type idleWire struct{}

func (idleWire) Setpoint(uint64, limit.Setpoint) {}
func (idleWire) Hold(uint64, limit.Setpoint)     {}
func (idleWire) Order(uint64, limit.Order)       {}

// Eight channels of 1 kHz through loop, logbook and every page, on a fake
// clock: nothing is dropped, and the heap after the whole time is the heap
// after a sixth of it, within 2 MB. BARLINE_HOUR is how many minutes of bench
// time it takes; 60 are the hour that counts:
//
//	BARLINE_HOUR=60 go test -run HourAtFullRate -v -timeout 2h ./cmd/barline
//
// BARLINE_RATE=50 takes 50 Hz instead, which is over in half a minute.
func TestHourAtFullRate(t *testing.T) {
	lasts := 18 * time.Second
	if text := os.Getenv("BARLINE_HOUR"); text != "" {
		minutes, err := strconv.ParseFloat(text, 64)
		if err != nil {
			t.Fatal(err)
		}
		lasts = time.Duration(minutes * float64(time.Minute))
	}
	rate := 1000
	if text := os.Getenv("BARLINE_RATE"); text != "" {
		var err error
		if rate, err = strconv.Atoi(text); err != nil || rate < 20 || rate > 1000 {
			t.Fatalf("BARLINE_RATE=%q: expected 20 to 1000", text)
		}
	}
	text := bench.Sample()
	b, err := bench.Parse(text, "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	s, err := newSession(b, text)
	if err != nil {
		t.Fatal(err)
	}
	clk := clock.NewFake(time.Date(2026, 12, 1, 9, 0, 0, 0, time.UTC))
	book, err := logbook.Open(t.TempDir(), logbook.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer book.Close()
	curve := s.predictor.Clone()
	l := loop.New(loop.Options{
		Bench: b, Core: s.core, State: s.state, Clock: clk, Book: lent{book}, Wire: idleWire{}, Simulated: true,
		Curve: func(in emission.Input, _ *calibration.Calibration, dst []emission.CurvePoint) {
			curve.Curve(dst, 0, s.core.Limits().Lowest().Max, in)
		},
	})
	channels := []struct {
		role         reading.Role
		value, noise float64
	}{
		{reading.CellAPressure, 9e5, 40}, {reading.CellBPressure, 9e5, 40}, {reading.ManifoldPressure, 9e5, 40},
		{reading.SupplyPressure, 18e5, 40}, {reading.ControllerSensor, 9e5, 40}, {reading.FibreTemperature, 295.5, 0.02},
		{reading.CellTemperature, 295.5, 0.02}, {reading.Emission, 262e-9, 0.01e-9},
	}
	const turnsASecond = 20 // as the loop ticks
	const turn = time.Second / turnsASecond
	rng := rand.New(rand.NewPCG(1, 1))
	heap := func() float64 {
		runtime.GC()
		var m runtime.MemStats
		runtime.ReadMemStats(&m)
		return float64(m.HeapAlloc) / 1e6
	}
	early, readings := 0.0, 0
	style := frame.Style{Colours: frame.Palette}
	for i := range int(lasts / turn) {
		for range rate / turnsASecond {
			clk.Advance(turn / time.Duration(rate/turnsASecond))
			now := clk.Now()
			slow := math.Sin(now.Mono.Seconds() / 300)
			for _, c := range channels {
				l.Reading(reading.Reading{
					Channel: c.role.String(), Role: c.role, Taken: now, Status: reading.Good,
					Value: c.value + c.noise*(rng.NormFloat64()+20*slow),
				})
				readings++
			}
		}
		l.Turn()
		if time.Duration(i+1)*turn == lasts/6 {
			early = heap()
			t.Logf("after %v of bench time: %.2f MB on the heap", lasts/6, early)
		}
		if i%10 > 0 {
			continue
		}
		if screen := tui.Render(l.Snapshot(), tui.Page(i/10%int(tui.Log+1)), 120, 40, style); screen == "" {
			t.Fatal("an empty screen")
		}
	}
	late := heap()
	t.Logf("after %v: %.2f MB; %d readings, %d records, %d dropped", lasts, late, readings, book.Health().Written, l.Snapshot().Dropped)
	if l.Snapshot().Dropped != 0 {
		t.Errorf("%d readings were dropped", l.Snapshot().Dropped)
	}
	if h := book.Health(); h.Lost != 0 || !h.Writing {
		t.Errorf("the logbook fares %+v", h)
	}
	if os.Getenv("BARLINE_HOUR") != "" && math.Abs(late-early) > 2 {
		t.Errorf("the heap went from %.2f to %.2f MB, expected within 2 MB", early, late)
	}
}
