package main

import (
	"errors"
	"sync/atomic"
	"time"

	"barline/cmd/barline/loop"
	"barline/logbook"
	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/clock"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// player brings the records of a logbook back through the core and the
// screens: readings are what drives it, and what another core decided is taken
// as it was. It commands nothing and writes nothing.
type player struct {
	folder string
	clk    *clock.Fake
	last   time.Time // UTC of the last record
	loop   *loop.Loop
	latest map[string]reading.Reading
	heard  map[string]time.Duration // bench Mono of a channel's last record
	silent time.Duration            // after which a channel without one is not believed
	runs   recordedRuns
	newest atomic.Pointer[guided] // for the curve

	simulated bool // as the record says of itself
	speed     float64
}

// shutBook is a logbook that takes nothing: what is played is written already.
type shutBook struct{}

func (shutBook) Append(reading.Stamp, string, any) (uint64, error) { return 0, errPlayed }
func (shutBook) Sync() error                                       { return errPlayed }
func (shutBook) Health() live.RecordHealth                         { return live.RecordHealth{Writing: true} }

var errPlayed = errors.New("a played record is not written again")

// playerTick is the bench time between two turns of the core while playing.
const playerTick = 50 * time.Millisecond

func newPlayer(folder string) *player {
	return &player{folder: folder, latest: map[string]reading.Reading{}, speed: 1}
}

// configure builds the core from the configuration that the record holds.
func (p *player) configure(text []byte, at time.Time) error {
	b, err := bench.Parse(text, "configuration in the record")
	if err != nil {
		return err
	}
	s, err := newSession(b, text)
	if err != nil {
		return err
	}
	if p.loop == nil {
		p.clk = clock.NewFake(at)
		p.clk.Advance(time.Second) // an instant of zero means never
	}
	s.state.Follow()
	p.runs = recordedRuns{base: s.predictor.Clone()}
	p.newest.Store(&guided{estimate: s.predictor.Clone()})
	p.latest, p.heard = map[string]reading.Reading{}, map[string]time.Duration{}
	p.silent = b.Logbook.Heartbeat.Duration() + heartbeatLate
	p.loop = loop.New(loop.Options{
		Bench: b, Core: s.core, State: s.state, Clock: p.clk, Book: shutBook{}, Wire: &wire{now: p.clk.Now, answer: func(uint64, error, reading.Stamp) {}},
		Curve: func(in emission.Input, _ *calibration.Calibration, dst []emission.CurvePoint) {
			p.newest.Load().curve(dst, s.core.Limits().Lowest().Max, in)
		},
		Folder: p.folder, ReadOnly: true, Resonances: resonances(s.predictor),
	})
	p.loop.Propagation(live.Propagation{Why: "the record holds none: they are computed beside the first screen"})
	return nil
}

// take folds one record in. Records of time that went back are taken at once.
func (p *player) take(r logbook.Record) error {
	if r.Kind == string(live.KindConfiguration) {
		var d configurationData
		if err := r.Decode(&d); err != nil {
			return err
		}
		p.last = r.UTC
		return p.configure([]byte(d.Text), r.UTC)
	}
	if r.Kind == string(live.KindStart) {
		var d startData
		if err := r.Decode(&d); err != nil {
			return err
		}
		p.simulated = d.Simulated
		if d.Speed > 0 {
			p.speed = d.Speed
		}
	}
	if p.loop == nil {
		return nil // nothing is known of the bench yet
	}
	at := p.clk.Now()
	at.UTC = r.UTC
	switch live.Kind(r.Kind) {
	case live.KindReading:
		var d live.ReadingData
		if err := r.Decode(&d); err != nil {
			return err
		}
		return p.reading(d, at)
	case live.KindReadback:
		var d live.LinkData
		if err := r.Decode(&d); err != nil {
			return err
		}
		if d.Instrument != "" {
			p.loop.Link(d.Instrument, d.Link == "up", d.Reason, at)
		}
	case live.KindNode:
		var d live.NodeData
		if err := r.Decode(&d); err != nil {
			return err
		}
		p.anchor(at, d)
	case live.KindCommand:
		var d live.CommandData
		if err := r.Decode(&d); err != nil {
			return err
		}
		p.tell(at, d)
	case live.KindIntent:
		var d live.IntentData
		if err := r.Decode(&d); err != nil {
			return err
		}
		p.tell(at, d)
	case live.KindMeans:
		var d live.MeansData
		if err := r.Decode(&d); err != nil {
			return err
		}
		p.tell(at, d)
		return nil
	case live.KindCalibration:
		var d live.CalibrationData
		if err := r.Decode(&d); err != nil {
			return err
		}
		p.tell(at, d)
	case live.KindDrift:
		var d live.DriftData
		if err := r.Decode(&d); err != nil {
			return err
		}
		p.tell(at, d)
	case live.KindStep:
		var d live.StepData
		if err := r.Decode(&d); err != nil {
			return err
		}
		p.loop.Row(d)
		p.spectrum(d, at)
	}
	if r.Kind != string(live.KindPrediction) {
		p.loop.Line(at, live.Kind(r.Kind), recordText(r))
	}
	return nil
}

// spectrum shows the measured spectrum of a step, where the record has one. One
// that cannot be read is none: log verify says why.
func (p *player) spectrum(d live.StepData, at reading.Stamp) {
	if d.Spectrum == nil || d.Spectrum.File == "" {
		return
	}
	content, err := logbook.ReadAttachment(p.folder, logbook.Attachment{File: d.Spectrum.File, SHA256: d.Spectrum.SHA256})
	if err != nil {
		return
	}
	if s, err := loop.ParseSpectrum(content); err == nil {
		s.Instrument, s.Taken = d.Spectrum.Instrument, at
		p.loop.Spectrum(s)
	}
}

// anchor lets the core answer from the full-field runs of the record, as the
// one did that wrote it.
func (p *player) anchor(at reading.Stamp, d live.NodeData) {
	p.runs.take(d)
	changed := live.ModelChanged{At: at, Nodes: d.Nodes, NodesPlanned: d.Planned, LeftOutMetres: unit.Metre(d.LeftOutM)}
	if a := p.runs.predictor(); a != nil {
		p.newest.Store(&guided{anchored: a.Clone(), estimate: p.runs.base.Clone()})
		changed.Predictor, changed.Answer = &guided{anchored: a.Clone(), estimate: p.runs.base.Clone()}, d.Answer
	}
	p.loop.Model(changed)
}

func (p *player) tell(at reading.Stamp, data any) {
	if e, ok := live.ToldBy(at, data); ok {
		p.loop.Tell(e)
	}
}

func (p *player) reading(d live.ReadingData, at reading.Stamp) error {
	role, err := reading.ParseRole(d.Role)
	if err != nil {
		return err
	}
	status, err := reading.ParseStatus(d.Status)
	if err != nil {
		return err
	}
	x := reading.Reading{Channel: d.Channel, Role: role, Taken: at, Status: status, Reason: d.Reason}
	if d.Value != nil {
		x.Value = *d.Value
	}
	p.latest[d.Channel], p.heard[d.Channel] = x, at.Mono
	p.loop.Reading(x)
	return nil
}

// heartbeatLate is how late the record of a channel that does not change may
// come and still be believed.
const heartbeatLate = 10 * time.Second

// alive reports whether a channel's record is recent enough to stand for now:
// whoever wrote it would have written again.
func (p *player) alive(channel string, now time.Duration) bool {
	return now-p.heard[channel] <= p.silent
}

// advance carries bench time on by d, in turns of the core. Between two
// records a channel stays within its deadband of the last one, so that is what
// the core is given again.
func (p *player) advance(d time.Duration) {
	if p.loop == nil {
		return
	}
	for ; d > 0; d -= playerTick {
		p.clk.Advance(min(d, playerTick))
		now := p.clk.Now()
		for name, r := range p.latest {
			if now.Mono-r.Taken.Mono >= time.Second && p.alive(name, now.Mono) {
				r.Taken = now
				p.latest[name] = r
				p.loop.Reading(r)
			}
		}
		p.loop.Turn()
	}
}

// skip carries bench time on by d in one stride, for seeking and for gaps.
func (p *player) skip(d time.Duration) {
	if p.loop == nil || d <= 0 {
		return
	}
	p.clk.Advance(d)
	now := p.clk.Now()
	for name, r := range p.latest {
		if !p.alive(name, now.Mono) {
			continue
		}
		r.Taken = now
		p.latest[name] = r
		p.loop.Reading(r)
	}
	p.loop.Turn()
}

// How far the clock of a screen that follows may be from the stamp of a record.
const (
	mayLag  = 500 * time.Millisecond
	mayLead = 2 * time.Second
)

// meet brings the clock to the stamp of a record that comes while following:
// what was written before this program came is caught up with, and so is what
// bench time did between two records.
func (p *player) meet(r logbook.Record) {
	if p.loop == nil {
		return
	}
	p.last = r.UTC
	apart := r.UTC.Sub(p.clk.Now().UTC)
	switch {
	case apart > longestGap: // nobody was there meanwhile
		p.clk.Step(apart - longestGap)
		p.skip(longestGap)
	case apart > mayLag:
		p.skip(apart)
	case apart < -mayLead:
		p.clk.Step(apart)
	}
}

// fastest is the speed beyond which bench time is carried on in strides.
const fastest = 50

// gap returns the bench time from the last record to r, which is none where
// the clock went back or a new session began.
func (p *player) gap(r logbook.Record) time.Duration {
	defer func() { p.last = r.UTC }()
	if p.last.IsZero() || !r.UTC.After(p.last) {
		return 0
	}
	return r.UTC.Sub(p.last)
}

// longestGap is the longest silence of a record that is played as it was.
const longestGap = 2 * time.Minute
