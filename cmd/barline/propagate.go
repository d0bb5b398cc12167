package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"barline/model/emission"
	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/pulse"
	"barline/model/unit"
	"barline/tui/figure"
)

// propagateFlags are the flags of propagate beside those it shares.
type propagateFlags struct {
	inputs
	json, csv    bool
	plot, resume string
	spectrum     string
	sweep        string
	tolerance    float64
}

func newPropagate() *cobra.Command {
	var f propagateFlags
	cmd := &cobra.Command{
		Use:   "propagate",
		Short: "Propagate the pulse through the fibre and say what it emits",
		Long: `Propagate the full field of the pulse through the filled fibre and say what
it emits. One run takes about a second.

    barline propagate --gas argon --pressure "9 bar" --core-diameter "34 um" --length "30 cm" \
        --wavelength "1030 nm" --duration "35 fs" --energy "1.5 uJ" --plot light.svg
    barline propagate -b bench.toml --pressure "9 bar" --csv > spectrum.csv
    barline propagate -b bench.toml --sweep pressure=7bar:12bar:0.25bar --resume scan.jsonl

--csv prints the spectrum at the end of the fibre; in a sweep one row for each
step. A sweep uses all cores. With --resume its steps are kept in a file, and
those that the file already holds are not run again.`,
		Args: noArgs,
		RunE: func(cmd *cobra.Command, args []string) error {
			return f.run(cmd.Context(), cmd.OutOrStdout(), cmd.ErrOrStderr())
		},
	}
	f.bind(cmd)
	cmd.Flags().BoolVar(&f.json, "json", false, "print one JSON object; in a sweep one on each line")
	cmd.Flags().BoolVar(&f.csv, "csv", false, "print comma-separated values")
	cmd.Flags().StringVar(&f.plot, "plot", "", "draw spectrum and evolution to a file that ends in .svg or .png")
	cmd.Flags().StringVar(&f.spectrum, "spectrum", "", "measured spectrum of the pulse: a CSV file of wavelength in nm, energy per nm, phase in rad; --duration then only sizes the time window")
	cmd.Flags().StringVar(&f.sweep, "sweep", "", "one run per step: pressure=7bar:12bar:0.25bar; also temperature, energy, air")
	cmd.Flags().StringVar(&f.resume, "resume", "", "file that keeps the steps of a sweep")
	cmd.Flags().Float64Var(&f.tolerance, "tolerance", pulse.DefaultTolerance, "relative error of one step, 1e-9 to 1e-2")
	return cmd
}

// run carries out the command.
func (f *propagateFlags) run(ctx context.Context, stdout, stderr io.Writer) error {
	steps, err := parseSweep(f.sweep)
	if err != nil {
		return err
	}
	name := ""
	if steps != nil {
		name = steps.name
	}
	setup, input, err := f.setup("propagate", name)
	if err != nil {
		return err
	}
	switch {
	case !(f.tolerance >= 1e-9 && f.tolerance <= 1e-2):
		return usage("--tolerance %g: expected 1e-9 to 1e-2", f.tolerance)
	case f.json && f.csv:
		return usage("--json and --csv: expected one of them")
	case steps != nil && f.plot != "":
		return usage("--plot draws one run: leave out --sweep")
	case steps == nil && f.resume != "":
		return usage("--resume goes with --sweep")
	case f.plot != "" && !slices.Contains(figure.Formats, strings.TrimPrefix(filepath.Ext(f.plot), ".")):
		return usage("--plot %q: expected a file that ends in .svg or .png", f.plot)
	}
	p, err := newPropagation(setup, f.tolerance)
	if err != nil {
		return usage("%w", err)
	}
	if err := p.read(f.spectrum); err != nil {
		return usage("--spectrum: %w", err)
	}
	out := bufio.NewWriter(stdout)
	if steps != nil {
		return errors.Join(f.runSweep(ctx, out, stderr, p, input, steps), out.Flush())
	}
	bar := newBar(stderr)
	defer bar.clear()
	done, err := p.run(ctx, input, evolutionSamples, bar.share)
	bar.clear()
	if err != nil {
		return err
	}
	if f.plot != "" {
		if err := drawTo(f.plot, done.result); err != nil {
			return err
		}
	}
	switch {
	case f.json:
		err = writeObject(out, done.object())
	case f.csv:
		err = writeSpectrum(out, done.result)
	default:
		done.write(out)
	}
	return errors.Join(err, out.Flush())
}

// evolutionSamples is the number of places along the fibre that a picture shows.
const evolutionSamples = 160

func drawTo(path string, r *pulse.Result) error {
	file, err := os.Create(path)
	if err != nil {
		return fmt.Errorf("--plot: %w", err)
	}
	err = figure.Propagation(file, strings.TrimPrefix(filepath.Ext(path), "."), r)
	return errors.Join(err, file.Close())
}

// propagation is a bench made ready for full-field runs.
type propagation struct {
	setup     emission.Setup
	predictor *emission.Predictor // for the numbers beside the run
	medium    *gas.Medium
	fibre     *fibre.Fibre
	rates     *pulse.Rates
	measured  *pulse.Measured
	text      string // of the measured spectrum
	tolerance float64
}

// read takes the pulse from a file; no name means that it was not measured.
func (p *propagation) read(path string) error {
	if path == "" {
		return nil
	}
	text, err := os.ReadFile(path)
	if err != nil {
		return err
	}
	p.text = string(text)
	p.measured, err = pulse.ReadMeasured(strings.NewReader(p.text))
	return err
}

// anyTemperature will do to make the ionisation rates, which ask for none.
const anyTemperature = 293.15

func newPropagation(s emission.Setup, tolerance float64) (*propagation, error) {
	if s.Answer == emission.Anchored {
		s.Answer = emission.Estimate // a run needs no anchor
	}
	predictor, err := emission.NewPredictor(s)
	if err != nil {
		return nil, err
	}
	p := &propagation{setup: s, predictor: predictor, medium: predictor.Medium(), fibre: predictor.Fibre(), tolerance: tolerance}
	state, err := p.medium.At(unit.Bar, anyTemperature, 0)
	if err != nil {
		return nil, err
	}
	ready, err := pulse.Setup{Fibre: p.fibre, Gas: state, Pulse: s.Pulse, Plasma: s.Plasma}.Prepare()
	p.rates = ready.Rates
	return p, err
}

// clone returns a propagation for another goroutine.
func (p *propagation) clone() *propagation {
	q := *p
	q.predictor = p.predictor.Clone()
	return &q
}

// propagated is one run and what led to it.
type propagated struct {
	from       *propagation
	prediction emission.Prediction
	result     *pulse.Result
	seconds    float64
}

// run propagates one input.
func (p *propagation) run(ctx context.Context, in emission.Input, samples int, progress func(float64)) (*propagated, error) {
	state, err := p.medium.At(in.Pressure, in.Temperature, in.Air)
	if err != nil {
		return nil, err
	}
	s := pulse.Setup{Fibre: p.fibre, Gas: state, Pulse: p.setup.Pulse, Measured: p.measured, Plasma: p.setup.Plasma, Rates: p.rates}
	s.Pulse.Energy = in.Energy
	start := time.Now()
	r, err := s.Run(ctx, pulse.Options{Tolerance: p.tolerance, Samples: samples, Progress: progress})
	if err != nil {
		return nil, err
	}
	return &propagated{p, p.predictor.Predict(in, nil), r, time.Since(start).Seconds()}, nil
}
