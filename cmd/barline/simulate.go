package main

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"barline/cmd/barline/loop"
	"barline/model/bench"
	"barline/model/clock"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/simulate"
)

type simulateFlags struct {
	scenario string
	faults   []string
	seed     uint64
	speed    float64
	headless bool
	json     bool
	lasts    time.Duration
	logbook  string
	capture  string
	pictures string
}

func newSimulate() *cobra.Command {
	var f simulateFlags
	var stories strings.Builder
	for _, s := range simulate.Scenarios() {
		fmt.Fprintf(&stories, "  %-10s %s\n", s.Name, s.About)
	}
	var wrongs strings.Builder
	for _, k := range simulate.Kinds() {
		fmt.Fprintf(&wrongs, "  %-10s %s\n  %-10s   at %s\n", k, k.About(), "", strings.Join(k.Places(), ", "))
	}
	cmd := &cobra.Command{
		Use:   "simulate",
		Short: "A simulated bench and its dashboard, without hardware",
		Long: `A simulated bench and its dashboard, without hardware: Heron, an invented
bench of 34 um single-ring fibre, argon and 1030 nm pulses. Its instruments
talk over pseudo-terminals in the protocols of real ones. What the seed hides
from you, fibre, gauges and pulse energy as they truly are, makes prediction
and measurement part as they do on a real bench.

Scenarios:
` + stories.String() + `
Faults, each with the bench time at which it comes, perhaps a place and a size,
or "over" where it ends: --fault "60s leak cell A 0.2" --fault "2m leak cell A over".
` + wrongs.String(),
		Args: noArgs,
		RunE: func(cmd *cobra.Command, _ []string) error {
			return f.run(cmd.Context(), cmd.OutOrStdout(), cmd.ErrOrStderr())
		},
	}
	flags := cmd.Flags()
	flags.StringVar(&f.scenario, "scenario", "fill", "what happens on the bench")
	flags.StringArrayVar(&f.faults, "fault", nil, "what goes wrong besides, such as \"60s leak\"; may be given again")
	flags.Uint64Var(&f.seed, "seed", 1, "draws the hidden truth, the noise and the faults")
	flags.Float64Var(&f.speed, "speed", 1, "bench time over wall time, 0.1 to 100")
	flags.BoolVar(&f.headless, "headless", false, "no screen: run for --for, print a summary and leave")
	flags.BoolVar(&f.json, "json", false, "with --headless: the summary as JSON")
	flags.DurationVar(&f.lasts, "for", 0, "bench time after which to leave, such as 60s; 0 is never")
	flags.StringVar(&f.pictures, "pictures", "", "with --headless: at the end "+picturesHelp)
	flags.StringVar(&f.capture, "capture", "", captureHelp)
	flags.StringVar(&f.logbook, "logbook", "", "folder of the logbook; without it one in your data folder")
	return cmd
}

// place is a session that is ready to run, and what it takes to run it.
type place struct {
	session *session
	begin   func(ctx context.Context, s *session) (end func(), err error)
	moves   []simulate.Move
}

// run begins the place's bench time and runs the session through f.
func (p *place) run(ctx context.Context, f front) error {
	ctx, cancel := context.WithCancel(ctx)
	defer cancel()
	end, err := p.begin(ctx, p.session)
	if err != nil {
		return err
	}
	defer func() { cancel(); end() }()
	fmt.Fprintf(p.session.stderr, "barline: logbook in %s\n", p.session.folder)
	return p.session.run(ctx, f)
}

// place makes the simulated bench.
func (f simulateFlags) place(stderr io.Writer) (*place, error) {
	if !(f.speed >= 0.1 && f.speed <= 100) {
		return nil, usage("--speed %g: expected 0.1 to 100", f.speed)
	}
	var faults []simulate.Timed
	for _, text := range f.faults {
		timed, err := simulate.ParseTimed(text)
		if err != nil {
			return nil, usage("--fault: %w", err)
		}
		faults = append(faults, timed)
	}
	sim, err := simulate.New(simulate.Options{Seed: f.seed, Scenario: f.scenario, Faults: faults})
	if err != nil {
		return nil, usage("--scenario: %w", err)
	}
	text, story := bench.Sample(), sim.Scenario()
	if air := story.Air(); air > 0 {
		text = bytes.Replace(text, []byte(`air = "0 ppm"`), fmt.Appendf(nil, `air = "%g %%"`, float64(air)*100), 1)
	}
	b, err := bench.Parse(text, "heron.toml")
	if err != nil {
		return nil, err
	}
	// What the machine takes on the wall counts speed times on the bench.
	hiccup := unit.Second(f.speed) // a second of the wall, as at life speed
	b.Limits.Stale, b.Limits.Confirm = max(b.Limits.Stale, hiccup), max(b.Limits.Confirm, hiccup)
	s, err := newSession(b, text)
	if err != nil {
		return nil, err
	}
	if s.folder, err = logbookFolder(f.logbook, "", b.Bench.Name, true); err != nil {
		return nil, err
	}
	s.greet = unused(s.folder, f.logbook, "")
	if s.capture, err = parseCapture(f.capture); err != nil {
		return nil, err
	}
	s.simulated, s.speed, s.stderr = true, f.speed, stderr
	return &place{session: s, moves: sim.Scenario().Moves, begin: func(ctx context.Context, s *session) (func(), error) {
		s.clock = clock.NewScaled(f.speed)
		var wait func()
		s.opener, wait, err = serveSimulated(ctx, sim, s.clock)
		return wait, err
	}}, nil
}

func (f simulateFlags) run(ctx context.Context, stdout, stderr io.Writer) error {
	switch {
	case f.lasts < 0:
		return usage("--for %v: expected a bench time above zero", f.lasts)
	case f.headless && f.lasts == 0:
		return usage("--headless needs --for, such as --for 60s")
	case f.json && !f.headless:
		return usage("--json goes with --headless")
	case f.pictures != "" && !f.headless:
		return usage("--pictures goes with --headless")
	}
	p, err := f.place(stderr)
	if err != nil {
		return err
	}
	s := p.session
	show := s.face(f.headless, stdout)
	s.anchors = s.anchors || f.pictures != "" // the pages are to show all that they can
	return p.run(ctx, func(ctx context.Context, l *loop.Loop) error {
		ctx, cancel := context.WithCancel(ctx)
		defer cancel()
		if f.lasts > 0 {
			go func() {
				defer cancel()
				untilBenchTime(ctx, s.clock, f.lasts)
			}()
		}
		moved := make(chan struct{})
		go func() {
			defer close(moved)
			s.broken.guard("the person at the simulated bench", func() { play(ctx, s.clock, l, p.moves) })
		}()
		err := show(ctx, l)
		cancel()
		<-moved
		if f.pictures != "" && err == nil {
			err = drawPictures(f.pictures, l.Snapshot())
		}
		if f.headless && err == nil {
			err = summarise(l.Snapshot()).write(stdout, f.json)
		}
		return err
	})
}

// play is the person at the simulated bench: it asks for the pressures of the
// scenario, each at its time, as long as nobody has held the bench.
func play(ctx context.Context, clk clock.Clock, l *loop.Loop, moves []simulate.Move) {
	for i, m := range moves {
		if !untilBenchTime(ctx, clk, m.At) {
			return
		}
		for !ready(l.Snapshot()) {
			if !untilBenchTime(ctx, clk, clk.Now().Mono+100*time.Millisecond) {
				return
			}
		}
		if i > 0 && l.Snapshot().Mode == live.Held {
			return
		}
		l.Do(live.Arm{})
		for _, c := range []live.Caution{live.Filling, live.Venting} {
			l.Do(live.Understood{Caution: c})
		}
		l.Do(live.GoTo{Target: m.To})
	}
}

// ready reports whether the bench has come up far enough to be asked.
func ready(s *live.Snapshot) bool {
	return s.Record.Writing && s.Latest[reading.CellAPressure].Status.Usable()
}

// untilBenchTime waits for a bench time and reports whether it came before ctx
// ended.
func untilBenchTime(ctx context.Context, clk clock.Clock, at time.Duration) bool {
	for {
		left := at - clk.Now().Mono
		if left <= 0 {
			return ctx.Err() == nil
		}
		timer := time.NewTimer(max(clk.Wall(left), time.Millisecond))
		select {
		case <-ctx.Done():
			timer.Stop()
			return false
		case <-timer.C:
		}
	}
}
