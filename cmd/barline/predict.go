package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"

	"github.com/spf13/cobra"

	"barline/model/emission"
)

func newPredict() *cobra.Command {
	var in inputs
	var sweepText string
	var use useCalibration
	var asJSON, asCSV, explain bool
	cmd := &cobra.Command{
		Use:   "predict",
		Short: "Say where the source should emit, without instruments",
		Long: `Say where the source should emit, without instruments.

    barline predict --gas argon --pressure "9 bar" --core-diameter "34 um" --length "30 cm" \
        --wavelength "1030 nm" --duration "35 fs" --energy "1.5 uJ"
    barline predict -b bench.toml --pressure "9 bar" --explain
    barline predict -b bench.toml --sweep pressure=7bar:12bar:0.25bar

A sweep prints a table; with --csv comma-separated values, with --json one
object on each line.`,
		Args: noArgs,
		RunE: func(cmd *cobra.Command, args []string) error {
			run, err := parseSweep(sweepText)
			if err != nil {
				return err
			}
			name := ""
			if run != nil {
				name = run.name
			}
			if use.name != "" {
				if err := use.check(&in); err != nil {
					return err
				}
			}
			setup, input, err := in.setup("predict", name)
			if err != nil {
				return err
			}
			if use.name != "" {
				setup.Answer = emission.Anchored
			}
			inputs := []emission.Input{input}
			if run != nil {
				inputs = run.inputs(input)
			}
			p, err := predictor(cmd.Context(), cmd.ErrOrStderr(), setup, inputs)
			if err != nil {
				return err
			}
			if err := use.over(p, &in); err != nil {
				return err
			}
			out := bufio.NewWriter(cmd.OutOrStdout())
			switch {
			case run != nil:
				err = predictSweep(out, p, &use, input, run, asJSON, asCSV, explain)
			case asCSV:
				return usage("--csv goes with --sweep")
			default:
				pr := use.predict(p, input, nil)
				if !pr.Valid {
					return fmt.Errorf("no prediction at %v and %v: %s", input.Pressure, input.Temperature, pr.Why)
				}
				if asJSON {
					err = writeObject(out, predicted(p, pr, explain))
				} else {
					writePrediction(out, p, pr, explain)
				}
			}
			return errors.Join(err, out.Flush())
		},
	}
	in.bind(cmd)
	use.bind(cmd)
	cmd.Flags().StringVar(&sweepText, "sweep", "", "one prediction per step: pressure=1bar:10bar:0.25bar; also temperature, energy, air")
	cmd.Flags().BoolVar(&asJSON, "json", false, "print one JSON object; in a sweep one on each line")
	cmd.Flags().BoolVar(&asCSV, "csv", false, "print a sweep as comma-separated values")
	cmd.Flags().BoolVar(&explain, "explain", false, "also print where each number comes from and what makes up the uncertainty")
	cmd.MarkFlagsMutuallyExclusive("json", "csv")
	return cmd
}

// predictor returns the predictor of a setup. Where it asks for the anchored
// answer that is made first.
func predictor(ctx context.Context, stderr io.Writer, s emission.Setup, inputs []emission.Input) (*emission.Predictor, error) {
	wanted := s.Answer
	if wanted == emission.Anchored {
		s.Answer = emission.Estimate // until the nodes stand
		if s.Pulse.Energy == 0 {     // a sweep sets it: its middle is the one used most
			s.Pulse.Energy = inputs[len(inputs)/2].Energy
		}
	}
	p, err := emission.NewPredictor(s)
	if err != nil {
		return nil, usage("%w", err)
	}
	if wanted == emission.Anchored {
		return anchored(ctx, stderr, p, inputs)
	}
	return p, nil
}
