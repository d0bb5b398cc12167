package main

import (
	"context"
	"encoding/json"
	"testing"
	"time"

	"barline/logbook"
	"barline/model/bench"
	"barline/model/live"
	"barline/model/reading"
)

// A screen that follows a record shows the bench at the time of the record's
// end, however much was written before it came and however the clock went.
func TestFollowingCatchesUp(t *testing.T) {
	begin := time.Date(2026, 12, 1, 9, 0, 0, 0, time.UTC)
	records := make(chan logbook.Record, 4096)
	add := func(at time.Duration, kind live.Kind, data any) {
		text, err := json.Marshal(data)
		if err != nil {
			t.Fatal(err)
		}
		records <- logbook.Record{Kind: string(kind), UTC: begin.Add(at), Data: text}
	}
	add(0, live.KindStart, startData{Bench: "Heron", Simulated: true, Speed: 1})
	add(0, live.KindConfiguration, configurationData{Text: string(bench.Sample())})
	read := func(at time.Duration, pressure float64) {
		add(at, live.KindReading, live.ReadingData{Channel: "cell A", Role: "cell-a-pressure", Status: "good", Value: &pressure})
	}
	var at time.Duration
	for ; at < 10*time.Minute; at += 2 * time.Second {
		read(at, 9e5)
	}
	at += 3 * time.Hour // the program was away
	for range 30 {
		at += 2 * time.Second
		read(at, 8e5)
	}
	r := &replay{player: newPlayer("x"), dir: "x", changed: make(chan struct{}, 1), control: make(chan rune, 1), speed: 1}
	ctx, cancel := context.WithTimeout(t.Context(), time.Minute)
	defer cancel()
	done := make(chan error, 1)
	go func() { done <- r.followOn(ctx, records, make(chan struct{})) }()
	for len(records) > 0 && ctx.Err() == nil {
		<-time.After(time.Millisecond)
	}
	for range 3 { // pictures of after the last record
		select {
		case <-r.changed:
		case <-ctx.Done():
		}
	}
	s := r.shown()
	cancel()
	if err := <-done; err != nil {
		t.Fatal(err)
	}
	if now := s.Latest[reading.CellAPressure]; now.Status != reading.Good || now.Value != 8e5 {
		t.Errorf("cell A reads %v, expected what was recorded last", now)
	}
	// Whoever wrote is gone without a word: nothing is believed for ever.
	for range 10 {
		r.player.advance(10 * time.Second)
	}
	if now := r.player.loop.Snapshot().Latest[reading.CellAPressure]; now.Status != reading.Failure {
		t.Errorf("a hundred seconds after the last record cell A reads %v", now)
	}
	if apart := s.Now.UTC.Sub(begin.Add(at)); apart < -mayLag || apart > 30*time.Second {
		t.Errorf("the clock stands at %v, the record ends at %v", s.Now.UTC, begin.Add(at))
	}
	if !s.ReadOnly || !s.Simulated || s.Replay != "" {
		t.Errorf("read only %v, simulated %v, replay %q, expected to follow a simulated bench", s.ReadOnly, s.Simulated, s.Replay)
	}
	if s.PressureA == nil || s.Now.Mono < 12*time.Minute || s.Now.Mono > 15*time.Minute {
		t.Errorf("bench time is %v, expected the eleven minutes that were recorded and two of the gap", s.Now.Mono)
	}
}
