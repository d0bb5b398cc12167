package main

import (
	"context"
	"io"
	"strings"
	"sync"
	"testing"
	"time"

	"barline/cmd/barline/loop"
	"barline/device/instrument"
	"barline/device/link"
	"barline/model/bench"
	"barline/model/emission"
	"barline/model/live"
)

// explosive breaks down as soon as it is asked for a prediction.
type explosive struct{}

func (explosive) Predict(emission.Input, *emission.Prediction) emission.Prediction {
	panic("out of order")
}

// tapped is a line that remembers what was written, and breaks down in its
// read when told to.
type tapped struct {
	link.Line
	heard func(string)
	broke func() bool
}

func (t tapped) Write(p []byte) (int, error) {
	t.heard(string(p))
	return t.Line.Write(p)
}

func (t tapped) Read(p []byte, wait time.Duration) (int, error) {
	if t.broke() {
		panic("out of order")
	}
	return t.Line.Read(p, wait)
}

// A panic anywhere ends the session with an error that names the place, after
// HOLD has reached the controller; the screen is told to end, which gives the
// terminal back.
func TestPanicAnywhereHolds(t *testing.T) {
	for where, breaks := range map[string]func(l *loop.Loop, spoil func()){
		"the loop":                          func(l *loop.Loop, _ func()) { l.Model(live.ModelChanged{Predictor: explosive{}}) },
		"instrument gauges":                 func(_ *loop.Loop, spoil func()) { spoil() },
		"the person at the simulated bench": nil,
	} {
		t.Run(where, func(t *testing.T) {
			p, err := simulateFlags{scenario: "quiet", seed: 1, speed: 10, logbook: t.TempDir()}.place(io.Discard)
			if err != nil {
				t.Fatal(err)
			}
			var mu sync.Mutex
			var written []string
			spoilt := false
			begin := p.begin
			p.begin = func(ctx context.Context, s *session) (func(), error) {
				end, err := begin(ctx, s)
				opener := s.opener
				s.opener = func(in bench.Instrument) (instrument.Open, error) {
					open, err := opener(in)
					if err != nil {
						return nil, err
					}
					return func(ctx context.Context) (link.Line, error) {
						line, err := open(ctx)
						if err != nil {
							return nil, err
						}
						return tapped{line, func(text string) {
							mu.Lock()
							defer mu.Unlock()
							written = append(written, text)
						}, func() bool {
							mu.Lock()
							defer mu.Unlock()
							return spoilt && in.Name == "gauges"
						}}, nil
					}, nil
				}
				return end, err
			}
			ctx, cancel := context.WithTimeout(t.Context(), time.Minute)
			defer cancel()
			err = p.run(ctx, func(ctx context.Context, l *loop.Loop) error {
				for !ready(l.Snapshot()) {
					if !untilBenchTime(ctx, p.session.clock, p.session.clock.Now().Mono+100*time.Millisecond) {
						return nil
					}
				}
				mu.Lock()
				written = nil
				mu.Unlock()
				if breaks != nil {
					breaks(l, func() { mu.Lock(); spoilt = true; mu.Unlock() })
				} else {
					p.session.broken.guard(where, func() { panic("out of order") })
				}
				<-ctx.Done()
				return nil
			})
			if err == nil || !strings.Contains(err.Error(), where+" broke down: out of order") {
				t.Errorf("the session ends with %v, expected the name of what broke down", err)
			}
			mu.Lock()
			defer mu.Unlock()
			if sent := strings.Join(written, ""); !strings.Contains(sent, "SOUR:PRES:MODE HOLD") {
				t.Errorf("HOLD never reached the controller, which was sent %.200q", sent)
			}
		})
	}
}

func TestPlayerThatBreaksDownSaysSo(t *testing.T) {
	err := safely(func() error { panic("out of order") })
	if err == nil || !strings.Contains(err.Error(), "the player broke down: out of order") {
		t.Errorf("error %v, expected what broke down", err)
	}
}
