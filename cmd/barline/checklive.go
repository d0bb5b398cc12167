package main

import (
	"context"
	"fmt"
	"io"
	"sync"
	"text/tabwriter"
	"time"

	"barline/device/instrument"
	"barline/device/link"
	"barline/model/bench"
	"barline/model/clock"
	"barline/model/reading"
	"barline/model/unit"
)

// liveWithin bounds how long one instrument may keep check --live waiting.
const liveWithin = 15 * time.Second

// liveReport is what one instrument said.
type liveReport struct {
	Instrument string        `json:"instrument"`
	Line       string        `json:"line"`
	Problem    string        `json:"problem,omitempty"` // why nothing, or not everything, came
	Seconds    float64       `json:"seconds"`           // from the first question to the last answer
	Channels   []liveChannel `json:"channels"`
	Counts     *liveCounts   `json:"counts,omitempty"` // where it was asked at all
}

// liveCounts is how the questions fared.
type liveCounts struct {
	Asked     uint64  `json:"asked"`
	Answered  uint64  `json:"answered"`
	Silent    uint64  `json:"silent"`
	Refused   uint64  `json:"refused"`
	Resynced  uint64  `json:"resynced"`
	Stray     uint64  `json:"stray_bytes"`
	RoundTrip float64 `json:"round_trip_s"` // mean of those answered
	Slowest   float64 `json:"slowest_s"`
}

type liveChannel struct {
	Channel string   `json:"channel"`
	Role    string   `json:"role"`
	Value   *float64 `json:"value"` // in Unit; null where there is none
	Unit    string   `json:"unit"`
	Text    string   `json:"text"`
	Status  string   `json:"status"`
	Reason  string   `json:"reason,omitempty"`
	Seconds float64  `json:"seconds"` // since the answer before, or the opening
}

// checkLive reads every instrument of b once, all at the same time. It sends
// questions only: nothing is set.
func checkLive(ctx context.Context, b *bench.Bench) []liveReport {
	reports := make([]liveReport, len(b.Instrument))
	var wait sync.WaitGroup
	for i := range b.Instrument {
		wait.Add(1)
		go func() {
			defer wait.Done()
			ctx, cancel := context.WithTimeout(ctx, liveWithin)
			defer cancel()
			reports[i] = readOnce(ctx, b, b.Instrument[i])
		}()
	}
	wait.Wait()
	return reports
}

// readOnce opens one instrument's line, reads every channel and closes it.
func readOnce(ctx context.Context, b *bench.Bench, spec bench.Instrument) liveReport {
	r := liveReport{Instrument: spec.Name, Line: reachedBy(&spec), Channels: []liveChannel{}}
	in, err := instrument.New(spec, b.Panel.Ambient)
	if err != nil {
		r.Problem = err.Error()
		return r
	}
	if b.Emission.Wavelengths == "air" {
		in.WavelengthsInAir()
	}
	in.MadeBy(b.Pulse.Wavelength, b.Emission.Reports == "peak")
	opener, err := link.NewOpener(spec)
	if err != nil {
		r.Problem = err.Error()
		return r
	}
	line, err := opener.Open(ctx)
	if err != nil {
		r.Problem = err.Error()
		return r
	}
	defer line.Close()
	stop := context.AfterFunc(ctx, func() { line.Close() }) // also ends a read that hangs
	defer stop()

	c := clock.NewScaled(1)
	start := c.Now()
	in.Opened()
	got, err := readings(ctx, in, line, c, len(spec.Channel))
	if err == nil && len(got) == 0 {
		err = fmt.Errorf("nothing came within %v", (c.Now().Mono - start.Mono).Round(time.Millisecond))
	}
	if err != nil {
		r.Problem = err.Error()
	}
	if n := in.Counts(); n.Asked > 0 || n.Answered > 0 {
		r.Counts = &liveCounts{n.Asked, n.Answered, n.Silent, n.Refused, n.Resynced, n.Stray, n.RoundTrip.Seconds(), n.Slowest.Seconds()}
	}
	last := start.Mono
	for i := range spec.Channel {
		ch := &spec.Channel[i]
		entry := liveChannel{Channel: ch.Name, Role: ch.Role.String(), Unit: ch.Symbol, Status: reading.Failure.String(), Reason: "no answer", Text: "no value"}
		for _, g := range got {
			if g.Channel != ch.Name {
				continue
			}
			entry.Status, entry.Reason, entry.Text = g.Status.String(), g.Reason, "no value"
			if g.Status != reading.Failure {
				entry.Value, entry.Text = &g.Value, quantityText(ch, g.Value)
			}
			entry.Seconds = (g.Taken.Mono - last).Seconds()
			last = max(last, g.Taken.Mono)
		}
		r.Channels = append(r.Channels, entry)
	}
	r.Seconds = (last - start.Mono).Seconds()
	return r
}

// readings polls an instrument once, or listens to one that talks by itself
// until every channel has spoken.
func readings(ctx context.Context, in *instrument.Instrument, line link.Line, c clock.Clock, channels int) ([]reading.Reading, error) {
	if !in.Streams() {
		return in.Poll(line, c.Now, nil)
	}
	newest := map[string]reading.Reading{}
	var block []reading.Reading
	var err error
	for start := c.Now().Mono; len(newest) < channels && err == nil && ctx.Err() == nil && c.Now().Mono-start < liveWithin/3; {
		block, err = in.Drain(line, c.Now, block[:0])
		for _, r := range block {
			newest[r.Channel] = r
		}
	}
	var got []reading.Reading
	for _, r := range newest {
		got = append(got, r)
	}
	return got, err
}

// quantityText writes a value of a channel with its unit.
func quantityText(ch *bench.Channel, si float64) string {
	switch {
	case ch.Role.IsPressure():
		return unit.Pascal(si).String()
	case ch.Role.IsTemperature():
		return unit.Kelvin(si).String()
	}
	switch ch.Role {
	case reading.PulseEnergy:
		return unit.Joule(si).String()
	case reading.Emission, reading.EmissionWidth:
		return unit.Metre(si).String()
	}
	if ch.Symbol == "1" {
		return unit.Fraction(si).String()
	}
	return fmt.Sprintf("%.6g %s", si, ch.Symbol)
}

// sound reports whether every channel of every instrument may be used.
func sound(reports []liveReport) bool {
	for _, r := range reports {
		if r.Problem != "" {
			return false
		}
		for _, c := range r.Channels {
			if s, err := reading.ParseStatus(c.Status); err != nil || s == reading.Failure {
				return false
			}
		}
	}
	return true
}

// writeLive prints what the instruments said.
func writeLive(w io.Writer, reports []liveReport) {
	for _, r := range reports {
		fmt.Fprintf(w, "%s on %s", r.Instrument, r.Line)
		if r.Problem != "" {
			fmt.Fprintf(w, ": %s", r.Problem)
		}
		fmt.Fprintln(w)
		table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
		for _, c := range r.Channels {
			status := c.Status
			if c.Reason != "" {
				status += ", " + c.Reason
			}
			took := "–"
			if c.Value != nil {
				took = fmt.Sprintf("%.1f ms", 1e3*c.Seconds)
			}
			fmt.Fprintf(table, "  %s\t%s\t%s\t%s\n", c.Channel, c.Text, took, status)
		}
		table.Flush()
		if n := r.Counts; n != nil {
			fmt.Fprintf(w, "  %s\n", n)
		}
	}
}

// String says it in a line, leaving out what did not happen.
func (n *liveCounts) String() string {
	text := fmt.Sprintf("%d lines taken", n.Answered)
	if n.Asked > 0 {
		text = fmt.Sprintf("asked %d times, %d answers", n.Asked, n.Answered)
	}
	for _, c := range []struct {
		count uint64
		what  string
	}{{n.Silent, "without an answer"}, {n.Refused, "refused"}, {n.Resynced, "asked again to be sure"}, {n.Stray, "stray bytes"}} {
		if c.count > 0 {
			text += fmt.Sprintf(", %d %s", c.count, c.what)
		}
	}
	if n.RoundTrip > 0 {
		text += fmt.Sprintf("; round trip %.1f ms, slowest %.1f ms", 1e3*n.RoundTrip, 1e3*n.Slowest)
	}
	return text
}
