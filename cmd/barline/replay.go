package main

import (
	"context"
	"fmt"
	"io"
	"iter"
	"math"
	"os"
	"sync/atomic"
	"time"

	"github.com/mattn/go-isatty"
	"github.com/spf13/cobra"

	"barline/logbook"
	"barline/model/bench"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/unit"
	"barline/tui"
)

type replayFlags struct {
	speed float64
	from  string
	to    string
	check bool
	json  bool

	pictures string
}

func newReplay() *cobra.Command {
	var f replayFlags
	cmd := &cobra.Command{
		Use:   "replay DIR",
		Short: "A logbook played back through the dashboard",
		Long: `A logbook played back through the same core and screens, at any speed: space
pauses, . goes one second on, > and < seek a minute, ] and [ double and halve
the speed, q leaves.

--check plays nothing: it derives every recorded prediction and every verdict on
drift again from the values that it stood on, checks every recorded command against the limits, and
says how far they differ. Predictions agree bit for bit on the same build and
processor, within 1e-9 elsewhere. One that leaned on a calibration, or on
full-field runs that the record does not hold, is counted and not derived.`,
		Args: oneArg("a logbook folder"),
		RunE: func(cmd *cobra.Command, args []string) error {
			return f.run(cmd.Context(), args[0], cmd.OutOrStdout(), cmd.ErrOrStderr())
		},
	}
	flags := cmd.Flags()
	flags.Float64Var(&f.speed, "speed", 10, "bench time over wall time, 0.1 to 10000")
	flags.StringVar(&f.from, "from", "", "begin at this time, RFC 3339")
	flags.StringVar(&f.to, "to", "", "end at this time, RFC 3339")
	flags.BoolVar(&f.check, "check", false, "derive predictions again and check commands; plays nothing")
	flags.StringVar(&f.pictures, "pictures", "", "play nothing: as it was at --from, or at its end, "+picturesHelp)
	flags.BoolVar(&f.json, "json", false, "with --check: the result as JSON")
	return cmd
}

func (f replayFlags) run(ctx context.Context, dir string, stdout, stderr io.Writer) error {
	if !(f.speed >= 0.1 && f.speed <= 10000) {
		return usage("--speed %g: expected 0.1 to 10000", f.speed)
	}
	if f.json && !f.check {
		return usage("--json goes with --check")
	}
	var filter logbook.Filter
	var from time.Time
	for _, bound := range []struct {
		flag, text string
		into       *time.Time
	}{{"--from", f.from, &from}, {"--to", f.to, &filter.To}} {
		if bound.text == "" {
			continue
		}
		t, err := time.Parse(time.RFC3339, bound.text)
		if err != nil {
			return usage("%s %q: expected a time such as 2026-12-01T11:42:05Z", bound.flag, bound.text)
		}
		*bound.into = t
	}
	if f.check {
		return rederive(dir, filter, stdout, f.json)
	}
	r := &replay{player: newPlayer(dir), dir: dir, filter: filter, from: from, changed: make(chan struct{}, 1), control: make(chan rune, 16)}
	r.speed = f.speed
	if f.pictures != "" && from.IsZero() {
		r.from = time.Unix(1<<40, 0) // later than any record
	}
	if !r.start() {
		return fmt.Errorf("%s holds no configuration record: there is nothing to play", dir)
	}
	if f.pictures != "" {
		defer r.stop()
		return drawPictures(f.pictures, r.shown())
	}
	out, ok := stdout.(*os.File)
	if !ok || !isatty.IsTerminal(out.Fd()) || !isatty.IsTerminal(os.Stdin.Fd()) {
		r.ends = true
		return r.lines(ctx, stdout)
	}
	style, err := tui.StyleFor(r.shown().Bench.Screen, os.Getenv)
	if err != nil {
		return coded{exitUsage, err}
	}
	ctx, cancel := context.WithCancel(ctx)
	defer cancel()
	played := make(chan error, 1)
	go func() {
		defer cancel() // without a player the screen would stand still
		played <- safely(func() error { return r.play(ctx) })
	}()
	err = tui.Run(ctx, r, tui.Options{Style: style})
	cancel()
	if playErr := <-played; err == nil {
		err = playErr
	}
	return err
}

// replay plays a logbook for a screen.
type replay struct {
	player *player
	dir    string
	filter logbook.Filter
	from   time.Time
	ends   bool // leave at the end instead of standing there

	stopped bool // while following: the writing program has ended

	speed   float64
	paused  bool
	control chan rune
	snap    atomic.Pointer[live.Snapshot]
	changed chan struct{}
	next    func() (logbook.Record, error, bool)
	stop    func()
}

// Snapshot implements tui.Source.
func (r *replay) Snapshot() *live.Snapshot { return r.shown() }

// Changed implements tui.Source.
func (r *replay) Changed() <-chan struct{} { return r.changed }

// Do implements tui.Source: what is over cannot be commanded, but the player
// can be steered.
func (r *replay) Do(in live.Intent) {
	steer, ok := in.(tui.Steer)
	if !ok {
		return
	}
	select {
	case r.control <- steer.Key:
	default:
	}
}

func (r *replay) shown() *live.Snapshot { return r.snap.Load() }

// start plays in one stride up to the time to begin at, at least to the first
// reading, and reports whether there is anything to show.
func (r *replay) start() bool {
	r.rewind()
	for {
		rec, err, ok := r.next()
		if !ok {
			break
		}
		if err != nil {
			continue // damage is what log verify is for
		}
		if p := r.player; p.loop != nil {
			p.skip(min(p.gap(rec), longestGap))
		} else {
			r.player.last = rec.UTC
		}
		if r.player.take(rec) != nil {
			continue
		}
		if r.player.loop != nil && !rec.UTC.Before(r.from) && rec.Kind == string(live.KindReading) {
			break
		}
	}
	if r.player.loop == nil {
		return false
	}
	r.player.loop.Turn()
	r.publish("")
	return true
}

// rewind stands before the first record.
func (r *replay) rewind() {
	if r.stop != nil {
		r.stop()
	}
	next, stop := iter.Pull2(logbook.Records(r.dir, r.filter))
	r.next = func() (logbook.Record, error, bool) { return next() }
	r.stop = stop
	r.player = newPlayer(r.dir)
}

// publish shows the newest picture with what the player itself has to say.
func (r *replay) publish(said string) {
	s := *r.player.loop.Snapshot()
	s.ReadOnly, s.Simulated, s.Replay = true, r.player.simulated, fmt.Sprintf("%g × life", r.speed)
	if r.paused {
		s.Replay += ", paused"
	}
	if said != "" {
		s.Replay += ", " + said
	}
	r.snap.Store(&s)
	select {
	case r.changed <- struct{}{}:
	default:
	}
}

const playEvery = 40 * time.Millisecond // wall time between two strides

// play carries the record on until ctx ends; with ends set until the record
// does.
func (r *replay) play(ctx context.Context) error {
	defer func() { r.stop() }()
	tick := time.NewTicker(playEvery)
	defer tick.Stop()
	var waiting *logbook.Record // read, and not yet due
	var due time.Duration       // bench time until it is
	over := false
	for {
		var stride time.Duration
		select {
		case <-ctx.Done():
			return nil
		case k := <-r.control:
			switch k {
			case ' ':
				r.paused = !r.paused
			case '.':
				stride = time.Second
			case ']':
				r.speed = min(2*r.speed, 10000)
			case '[':
				r.speed = max(r.speed/2, 0.1)
			case '>', '<':
				minute := time.Minute
				if k == '<' {
					minute = -minute
				}
				r.from = r.player.last.Add(minute)
				if k == '<' {
					if !r.start() {
						return fmt.Errorf("%s can no longer be read", r.dir)
					}
					waiting, over = nil, false
					continue
				}
				stride = time.Minute
			}
		case <-tick.C:
			if !r.paused {
				stride = time.Duration(float64(playEvery) * r.speed)
			}
		}
		for stride > 0 && !over {
			if waiting == nil {
				rec, err, ok := r.next()
				if !ok {
					over = true
					break
				}
				if err != nil {
					continue
				}
				waiting, due = &rec, min(r.player.gap(rec), longestGap)
			}
			step := min(stride, due)
			if r.speed > fastest || step > 10*time.Second {
				r.player.skip(step)
			} else {
				r.player.advance(step)
			}
			stride, due = stride-step, due-step
			if due > 0 {
				break
			}
			if err := r.player.take(*waiting); err != nil {
				return err
			}
			waiting = nil
		}
		said := ""
		if over {
			said = "at its end"
		}
		r.publish(said)
		if over && r.ends {
			return nil
		}
	}
}

// lines plays as lines, for a pipe.
func (r *replay) lines(ctx context.Context, out io.Writer) error {
	ctx, cancel := context.WithCancel(ctx)
	defer cancel()
	played := make(chan error, 1)
	go func() { played <- safely(func() error { return r.play(ctx) }) }()
	return r.print(out, played)
}

// print writes a line every few seconds of bench time until played says that
// it is over.
func (r *replay) print(out io.Writer, played <-chan error) error {
	var last time.Duration = -plainEvery
	for {
		select {
		case err := <-played:
			return err
		case <-r.changed:
			s := r.shown()
			if s.Now.Mono-last < plainEvery {
				continue
			}
			last = s.Now.Mono
			if _, err := fmt.Fprintln(out, statusLine(s)); err != nil {
				return err
			}
		}
	}
}

// rederived is what --check found.
type rederived struct {
	Predictions int     `json:"predictions"`
	Exact       int     `json:"bit_for_bit"`
	Within      int     `json:"within_1e-9"`
	Differ      int     `json:"differ"`
	NotDerived  int     `json:"not_derived"` // leaned on a calibration, or on runs that are not in the record
	Largest     float64 `json:"largest_relative_difference"`
	Verdicts    int     `json:"drift_verdicts"`
	VerdictsOff int     `json:"drift_verdicts_that_differ"`
	Commands    int     `json:"commands"`
	Beyond      int     `json:"commands_beyond_limits"`
	Damaged     int     `json:"damaged_places"`
}

// rederive derives every recorded prediction again and checks every command.
func rederive(dir string, filter logbook.Filter, out io.Writer, asJSON bool) error {
	var found rederived
	var p *emission.Predictor
	var runs recordedRuns
	var b *bench.Bench
	for rec, err := range logbook.Records(dir, filter) {
		if err != nil {
			if logbook.AsDamage(err) == nil {
				return err
			}
			found.Damaged++
			continue
		}
		switch live.Kind(rec.Kind) {
		case live.KindConfiguration:
			var d configurationData
			if err := rec.Decode(&d); err != nil {
				return err
			}
			if b, err = bench.Parse([]byte(d.Text), "configuration in the record"); err != nil {
				return err
			}
			setup, err := emission.SetupFromBench(b)
			if err != nil {
				return err
			}
			if p, err = emission.NewPredictor(setup); err != nil {
				return err
			}
			runs = recordedRuns{base: p.Clone()}
		case live.KindNode:
			var d live.NodeData
			if err := rec.Decode(&d); err != nil {
				return err
			}
			runs.take(d)
		case live.KindPrediction:
			var d live.PredictionData
			if err := rec.Decode(&d); err != nil {
				return err
			}
			by := p
			if d.Answer == emission.Anchored.String() {
				by = runs.predictor()
			}
			found.prediction(by, d)
		case live.KindDrift:
			var d live.DriftData
			if err := rec.Decode(&d); err != nil {
				return err
			}
			found.verdict(d)
		case live.KindCommand:
			var d live.CommandData
			if err := rec.Decode(&d); err != nil {
				return err
			}
			found.Commands++
			if b == nil || b.Limits.Enforced().Admissible(unit.Pascal(d.SetpointPa)) != nil {
				found.Beyond++
			}
		}
	}
	if asJSON {
		if err := writeObject(out, found); err != nil {
			return err
		}
	} else {
		fmt.Fprintf(out, "%d predictions: %d bit for bit the same, %d within 1e-9, %d differ, %d not derived (they leaned on a calibration, or on full-field runs that are not in the record)\n",
			found.Predictions, found.Exact, found.Within, found.Differ, found.NotDerived)
		if found.Verdicts > 0 {
			fmt.Fprintf(out, "%d verdicts on drift with causes, %d of them differ from what their numbers say\n", found.Verdicts, found.VerdictsOff)
		}
		fmt.Fprintf(out, "largest relative difference %.3g\n%d commands, %d beyond the limits of their bench file\n", found.Largest, found.Commands, found.Beyond)
		if found.Damaged > 0 {
			fmt.Fprintf(out, "%d damaged places were passed over; barline log verify names them\n", found.Damaged)
		}
	}
	if found.Differ > 0 || found.Beyond > 0 || found.VerdictsOff > 0 {
		return fmt.Errorf("%s: %d predictions and %d verdicts on drift differ, and %d commands lie beyond the limits", dir, found.Differ, found.VerdictsOff, found.Beyond)
	}
	return nil
}

// verdict finds the causes of a drift again from the numbers that the record
// says they stood on.
func (f *rederived) verdict(d live.DriftData) {
	if len(d.Findings) == 0 {
		return
	}
	f.Verdicts++
	again, err := d.Again()
	same := err == nil && len(again) == len(d.Findings)
	for i := 0; same && i < len(again); i++ {
		was, is := d.Findings[i], again[i]
		same = is.Cause.Name == was.Cause && math.Abs(is.Probability-was.Probability) <= 1e-9 &&
			math.Abs(is.Amount-was.Amount) <= 1e-9*math.Max(math.Abs(was.Amount), was.AmountSigma)
	}
	if !same {
		f.VerdictsOff++
	}
}

func (f *rederived) prediction(p *emission.Predictor, d live.PredictionData) {
	f.Predictions++
	if p == nil || d.Answer != p.Setup().Answer.String() || d.Calibration != "" {
		f.NotDerived++
		return
	}
	got := p.Predict(emission.Input{
		Pressure: unit.Pascal(d.PressurePa), Temperature: unit.Kelvin(d.TemperatureK),
		Energy: unit.Joule(d.EnergyJ), Air: unit.Fraction(d.Air),
	}, nil)
	was := 0.0
	if d.EmissionM != nil {
		was = *d.EmissionM
	}
	switch now := float64(got.Emission); {
	case now == was:
		f.Exact++
	case was != 0 && math.Abs(now/was-1) <= 1e-9:
		f.Within++
		f.Largest = max(f.Largest, math.Abs(now/was-1))
	default:
		f.Differ++
		if was != 0 {
			f.Largest = max(f.Largest, math.Abs(now/was-1))
		}
	}
}
