package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"text/tabwriter"
	"time"

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
	resume bool
	step   int

	pictures string
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
	flags.BoolVar(&f.resume, "resume", false, "go on with the program that the logbook shows as unfinished")
	flags.IntVar(&f.step, "from-step", 1, "begin with this step of the program, counted as --dry-run prints them")
	flags.StringVar(&f.pictures, "pictures", "", "at the end "+picturesHelp)
	flags.BoolVar(&f.arm, "arm", false, "arm without asking: the cautions have been read")
	cmd.MarkFlagsMutuallyExclusive("bench", "simulated")
	cmd.MarkFlagsMutuallyExclusive("resume", "from-step")
}

func newRun() *cobra.Command {
	var f runFlags
	cmd := &cobra.Command{
		Use:   "run PROCEDURE",
		Short: "A procedure file, such as purge, fill and scan, without a screen",
		Long: `Run a procedure file without a screen: evacuate, purge, fill, step, scan, hold,
leak test, vent, energy. The file is checked, and every pressure in it against the
limits, before anything moves.

A program that was cut off, by a crash or by HOLD, is offered at the next start
on the same logbook: --resume, without a file, goes on behind the last step that
was done. Nothing goes on by itself.

` + cautions + `

Exit code 3 says that an alarm or an interlock stopped it; the bench is then
held. The bench is held at the end in any case.`,
		Args: func(cmd *cobra.Command, args []string) error {
			if f.resume {
				return noArgs(cmd, args)
			}
			return oneArg("a procedure file")(cmd, args)
		},
		RunE: func(cmd *cobra.Command, args []string) error {
			if f.resume {
				return f.run(cmd, nil)
			}
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

// run checks the procedure that read makes, or the program that was left
// unfinished where it is nil, and runs it.
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
	program, err := f.program(s, read)
	if err != nil {
		return err
	}
	if f.dryRun {
		return f.print(stdout, s, program)
	}
	in, terminal := somebody(cmd.InOrStdin())
	understood, err := f.consent(s, program, in, terminal)
	if err != nil {
		return err
	}
	e := &execution{program: program, read: understood, in: in, out: stdout, bar: newBar(stderr)}
	s.anchors = f.pictures != "" // the pages are to show all that they can
	return p.run(cmd.Context(), func(ctx context.Context, l *loop.Loop) error {
		err := e.carryOut(ctx, l)
		if f.pictures != "" {
			err = errors.Join(err, drawPictures(f.pictures, l.Snapshot()))
		}
		return err
	})
}

// program returns what is to be run, checked against the limits.
func (f *runFlags) program(s *session, read func(ambient unit.Pascal) (*procedure.Procedure, error)) (*live.Program, error) {
	if read == nil {
		u, err := unfinished(s.folder)
		if err != nil {
			return nil, err
		}
		program := u.Program()
		if program == nil {
			return nil, usage("--resume: nothing is unfinished in %s", s.folder)
		}
		fmt.Fprintf(s.stderr, "barline: %v\n", u)
		s.resumes = true
		return program, program.Check(s.core.Limits())
	}
	proc, err := read(s.bench.Panel.Ambient)
	if err != nil {
		return nil, coded{exitUsage, err}
	}
	program, err := proc.Compile(procedure.Bench{
		Limits: s.core.Limits(), Ambient: s.bench.Panel.Ambient, PressureFor: pressureFor(s),
	})
	if err != nil || f.step == 1 {
		return program, err
	}
	if program, err = program.Rest(f.step - 1); err != nil {
		return nil, usage("--from-step %d: %w", f.step, err)
	}
	return program, nil
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
		fmt.Fprintf(w, "%d\t%s\t%s\t%v\t%v\t%.3f\t%v\n", program.First+i+1, ph.Label, to, ph.Dwell, each[i].Time.Round(time.Second), flow.NormLitres(each[i].Gas), each[i].Air)
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
