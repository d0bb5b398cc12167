package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"text/tabwriter"
	"time"

	"github.com/mattn/go-isatty"
	"github.com/spf13/cobra"

	"barline/cmd/barline/loop"
	"barline/model/emission"
	"barline/model/flow"
	"barline/model/live"
	"barline/model/procedure"
	"barline/model/unit"
)

// cautions stand where gas is about to move.
const cautions = `Gas is about to move. Ratings, relief valve and hardware interlocks come first;
this program replaces none of them. Compressed gas can burst cells and windows,
noble gases displace the air that you breathe, the laser is class 4, deep
ultraviolet harms eyes and skin and makes ozone. Follow your local codes and the
people licensed to apply them.`

// runFlags are what run and scan share.
type runFlags struct {
	watch  watchFlags
	onSim  bool
	sim    simulateFlags
	dryRun bool
	arm    bool
	from   string
	air    string
}

func (f *runFlags) add(cmd *cobra.Command) {
	flags := cmd.Flags()
	flags.StringVarP(&f.watch.bench, "bench", "b", "", "the bench file")
	flags.StringVar(&f.watch.logbook, "logbook", "", "folder of the logbook")
	flags.StringVar(&f.watch.capture, "capture", "", captureHelp)
	flags.BoolVar(&f.onSim, "simulated", false, "on the simulated bench instead of real instruments")
	flags.Uint64Var(&f.sim.seed, "seed", 1, "with --simulated: draws the hidden truth and the noise")
	flags.Float64Var(&f.sim.speed, "speed", 1, "with --simulated: bench time over wall time, 0.1 to 100")
	flags.StringVar(&f.sim.scenario, "scenario", "quiet", "with --simulated: what happens on the bench")
	flags.BoolVar(&f.dryRun, "dry-run", false, "print steps, times and gas used, and move nothing")
	flags.StringVar(&f.from, "from-pressure", "1 bar", "with --dry-run: where the gas stands at the start")
	flags.StringVar(&f.air, "from-air", "0 %", "with --dry-run: share of air in the gas at the start, such as 100 % after opening")
	flags.BoolVar(&f.arm, "arm", false, "arm without asking: the cautions have been read")
	cmd.MarkFlagsMutuallyExclusive("bench", "simulated")
}

func newRun() *cobra.Command {
	var f runFlags
	cmd := &cobra.Command{
		Use:   "run PROCEDURE",
		Short: "A procedure file, such as purge, fill and scan, without a screen",
		Long: `Run a procedure file without a screen: evacuate, purge, fill, step, scan, hold,
leak test, vent. The file is checked, and every pressure in it against the
limits, before anything moves.

` + cautions + `

Exit code 3 says that an alarm or an interlock stopped it; the bench is then
held. The bench is held at the end in any case.`,
		Args: oneArg("a procedure file"),
		RunE: func(cmd *cobra.Command, args []string) error {
			text, err := os.ReadFile(args[0])
			if err != nil {
				return usage("procedure file: %w", err)
			}
			return f.run(cmd, func(ambient unit.Pascal) (*procedure.Procedure, error) {
				return procedure.Parse(text, filepath.Base(args[0]), ambient)
			})
		},
	}
	f.add(cmd)
	return cmd
}

func newScan() *cobra.Command {
	var f runFlags
	step := procedure.Step{Do: "scan"}
	var from, to, by, dwell string
	cmd := &cobra.Command{
		Use:   "scan --from 7bar --to 11bar --by 0.25bar --dwell 20s",
		Short: "A pressure scan without a screen",
		Long: `A pressure scan without a screen: at each pressure the gas settles, emission is
averaged for the dwell, and one row goes into the logbook. It is short for a
procedure of one scan.

` + cautions,
		Args: noArgs,
		RunE: func(cmd *cobra.Command, _ []string) error {
			text := fmt.Sprintf("[procedure]\nname = \"scan\"\n[[step]]\ndo = \"scan\"\nfrom = %q\nto = %q\nby = %q\ndwell = %q\norder = %q\nseed = %d\n",
				from, to, by, dwell, step.Order, step.Seed)
			return f.run(cmd, func(ambient unit.Pascal) (*procedure.Procedure, error) {
				return procedure.Parse([]byte(text), "scan", ambient)
			})
		},
	}
	f.add(cmd)
	flags := cmd.Flags()
	flags.StringVar(&from, "from", "", "lowest pressure")
	flags.StringVar(&to, "to", "", "highest pressure")
	flags.StringVar(&by, "by", "", "step of pressure")
	flags.StringVar(&dwell, "dwell", "20 s", "time at each pressure after the gas has settled")
	flags.StringVar(&step.Order, "order", "up", "up, down, up and down, or random")
	flags.IntVar(&step.Seed, "order-seed", 1, "draws the random order")
	for _, name := range []string{"from", "to", "by"} {
		if err := cmd.MarkFlagRequired(name); err != nil {
			panic(err) // the flag stands three lines above
		}
	}
	return cmd
}

// run checks the procedure that read makes, and runs it.
func (f *runFlags) run(cmd *cobra.Command, read func(ambient unit.Pascal) (*procedure.Procedure, error)) error {
	stdout, stderr := cmd.OutOrStdout(), cmd.ErrOrStderr()
	var p *place
	var err error
	switch {
	case f.onSim:
		f.sim.logbook, f.sim.capture = f.watch.logbook, f.watch.capture
		p, err = f.sim.place(stderr)
	case f.watch.bench != "":
		p, err = f.watch.place(stderr)
	default:
		return usage("%s needs a bench file, -b bench.toml, or --simulated", cmd.Name())
	}
	if err != nil {
		return err
	}
	s := p.session
	proc, err := read(s.bench.Panel.Ambient)
	if err != nil {
		return coded{exitUsage, err}
	}
	program, err := proc.Compile(procedure.Bench{
		Limits: s.core.Limits(), Ambient: s.bench.Panel.Ambient, PressureFor: pressureFor(s),
	})
	if err != nil {
		return err
	}
	if f.dryRun {
		return f.print(stdout, s, program)
	}
	if err := f.consent(cmd.InOrStdin(), stderr); err != nil {
		return err
	}
	return p.run(cmd.Context(), func(ctx context.Context, l *loop.Loop) error {
		return carryOut(ctx, l, program, stdout)
	})
}

// consent shows the cautions and waits for somebody to type arm.
func (f *runFlags) consent(in io.Reader, stderr io.Writer) error {
	fmt.Fprintln(stderr, cautions)
	if f.arm {
		return nil
	}
	file, ok := in.(*os.File)
	if !ok || !isatty.IsTerminal(file.Fd()) {
		return usage("nobody is there to arm the bench: --arm says that the cautions have been read")
	}
	fmt.Fprint(stderr, "Type arm and press Enter to go on: ")
	var word string
	if _, err := fmt.Fscanln(in, &word); err != nil || word != "arm" {
		return usage("not armed; nothing was moved")
	}
	return nil
}

// errStoppedEarly is what a program ends in that was held or refused.
var errStoppedEarly = errors.New("the procedure was stopped")

// carryOut runs a program and prints how it goes on, until it ends.
func carryOut(ctx context.Context, l *loop.Loop, program *live.Program, out io.Writer) error {
	ctx, done := context.WithCancel(ctx)
	defer done()
	printed := make(chan error, 1)
	go func() { printed <- plain(out, plainEvery)(ctx, l) }()
	for s := l.Snapshot(); !ready(s); s = l.Snapshot() {
		select {
		case <-ctx.Done():
			return nil
		case <-time.After(50 * time.Millisecond):
		}
	}
	l.Do(live.Arm{})
	l.Do(live.Run{Program: program})
	look := time.NewTicker(20 * time.Millisecond)
	defer look.Stop()
	for began := false; ; {
		select {
		case err := <-printed:
			return err
		case <-look.C:
		}
		s := l.Snapshot()
		began = began || s.Program.Count > 0
		switch {
		case s.Outcome == live.Completed && began:
			return nil
		case s.Mode == live.Held && began:
			return coded{exitStopped, fmt.Errorf("%w: %s", errStoppedEarly, s.Why)}
		case !began && strings.HasPrefix(s.Notice, "refused"):
			return coded{exitStopped, fmt.Errorf("%w: %s", errStoppedEarly, s.Notice)}
		}
	}
}

// print writes what the program would do, how long it takes and how much gas.
func (f *runFlags) print(out io.Writer, s *session, program *live.Program) error {
	from, err := unit.ParsePressure(f.from)
	if err != nil {
		return usage("--from-pressure: %w", err)
	}
	panel, err := flow.BenchHandling(s.bench, 295.15)
	if err != nil {
		return err
	}
	air, err := unit.ParseFraction(f.air)
	if err != nil {
		return usage("--from-air: %w", err)
	}
	site := procedure.Site{Panel: panel, Settle: 5 * time.Second, Air: air}
	each, sum, err := site.Estimate(program, from)
	if err != nil {
		return err
	}
	w := tabwriter.NewWriter(out, 0, 0, 2, ' ', 0)
	fmt.Fprintf(w, "%s, from %v\n\n", program.Name, from)
	fmt.Fprintln(w, "step\twhat\tto\tdwell\ttime\tgas, L at 0 °C and 1 atm\tair left")
	for i, ph := range program.Phases {
		to := "-"
		if ph.Action == live.Reach {
			to = ph.Target.String()
		}
		fmt.Fprintf(w, "%d\t%s\t%s\t%v\t%v\t%.3f\t%v\n", i+1, ph.Label, to, ph.Dwell, each[i].Time.Round(time.Second), flow.NormLitres(each[i].Gas), each[i].Air)
	}
	fmt.Fprintf(w, "\t\t\t\t%v\t%.3f\t%v\n", sum.Time.Round(time.Second), flow.NormLitres(sum.Gas), sum.Air)
	return w.Flush()
}

// pressureFor returns the inverse of the model: the pressure at which it puts
// the emission, within the limits.
func pressureFor(s *session) func(unit.Metre) (unit.Pascal, error) {
	p := s.predictor.Clone()
	return func(wanted unit.Metre) (unit.Pascal, error) {
		in := emission.Input{Temperature: 295.15, Energy: s.bench.Pulse.Energy}
		curve := make([]emission.CurvePoint, 400)
		p.Curve(curve, 0, s.core.Limits().Lowest().Max, in)
		for i := 1; i < len(curve); i++ {
			a, b := curve[i-1], curve[i]
			if a.Emission == 0 || b.Emission == 0 || (a.Emission-wanted)*(b.Emission-wanted) > 0 {
				continue
			}
			share := float64(wanted-a.Emission) / float64(b.Emission-a.Emission)
			return a.Pressure + unit.Pascal(share)*(b.Pressure-a.Pressure), nil
		}
		return 0, fmt.Errorf("at no pressure within the limits does the model put the emission at %v", wanted)
	}
}
