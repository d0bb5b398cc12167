package main

import (
	"context"
	"fmt"
	"io"
	"math"
	"os"
	"os/signal"
	"strings"
	"syscall"
	"text/tabwriter"
	"time"

	"github.com/spf13/cobra"

	"barline/logbook"
	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// fitFlags are the flags of fit.
type fitFlags struct {
	bench, csv, name string
	discrepancy      string
	scan             int
	free             []string
	dry, asJSON      bool
}

func newFit() *cobra.Command {
	var f fitFlags
	cmd := &cobra.Command{
		Use:   "fit DIR",
		Short: "Calibrate the prediction on a pressure scan",
		Long: `Fits what is not known of the bench to the emission of a pressure scan, and
writes the calibration into the logbook. With --csv the points come from a file
with the columns pressure_bar and emission_nm, and as far as they are known
temperature_degC, energy_uJ and sigma_nm; then nothing is written.

Corrections that can be free: index-scale, core-diameter, wall, energy,
nonlinear-index, gauge-zero, wavelength-offset.

The anchored prediction is what is calibrated. It stands on full-field runs;
those that are not in the cache yet are computed first, which takes minutes.`,
		Args: func(cmd *cobra.Command, args []string) error {
			if (len(args) == 1) == (f.csv != "") || len(args) > 1 {
				return usage("fit takes the folder of a logbook, or --csv FILE and -b bench.toml; see barline fit -h")
			}
			return nil
		},
		RunE: func(cmd *cobra.Command, args []string) error {
			ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
			defer stop()
			folder := ""
			if len(args) == 1 {
				folder = args[0]
			}
			return f.run(ctx, folder, cmd.OutOrStdout(), cmd.ErrOrStderr())
		},
	}
	flags := cmd.Flags()
	flags.StringVarP(&f.bench, "bench", "b", "", "bench file; default: the one in the logbook")
	flags.StringVar(&f.csv, "csv", "", "points from this file instead of a logbook")
	flags.IntVar(&f.scan, "scan", 0, "which scan of the logbook, from 1; 0 is the last")
	flags.StringSliceVar(&f.free, "free", allCorrections(), "corrections to fit")
	flags.StringVar(&f.discrepancy, "discrepancy", calibration.DefaultDiscrepancy.String(), "how far the model itself may be off, whatever its corrections")
	flags.StringVar(&f.name, "name", "", "name of the calibration; default: the scan and the date")
	flags.BoolVar(&f.dry, "dry-run", false, "print the calibration, write nothing")
	flags.BoolVar(&f.asJSON, "json", false, "print the result as one JSON object")
	return cmd
}

func (f *fitFlags) run(ctx context.Context, folder string, out, progress io.Writer) error {
	request := calibration.Request{}
	for _, text := range f.free {
		p, err := calibration.ParseParameter(text)
		if err != nil {
			return usage("--free: %w", err)
		}
		request.Free = append(request.Free, p)
	}
	if err := request.Discrepancy.UnmarshalText([]byte(f.discrepancy)); err != nil || !(request.Discrepancy > 0) {
		return usage("--discrepancy %q: expected a length above zero such as %q", f.discrepancy, "0.5 nm")
	}
	points, err := f.points(folder)
	if err != nil {
		return err
	}
	b := points.bench
	setup, err := emission.SetupFromBench(b)
	if err != nil {
		return usage("the light cannot be predicted: %w", err)
	}
	request.Points, request.Peaks = points.list, b.Emission.Reports == "peak"
	request.Prior = priorOf(setup.Uncertainty)
	model, err := f.model(ctx, setup, points.list, progress)
	if err != nil {
		return err
	}
	c, err := calibration.Fit(model, request)
	if err != nil {
		return err
	}
	c.Made, c.Data, c.Name = time.Now().UTC().Truncate(time.Microsecond), points.about, f.name
	if c.Name == "" {
		c.Name = fmt.Sprintf("%s, %s", points.about, c.Made.Format("2006-01-02 15:04"))
	}
	if folder != "" && !f.dry {
		if err := writeCalibration(folder, c); err != nil {
			return err
		}
	}
	if f.asJSON {
		return writeObject(out, c)
	}
	printCalibration(out, c)
	return nil
}

// allCorrections lists what can be fitted; what is known of each before keeps
// apart what the points cannot.
func allCorrections() (names []string) {
	for p := range calibration.Parameter(calibration.ParameterCount) {
		names = append(names, p.String())
	}
	return names
}

// priorOf is what is known of each correction before the fit.
func priorOf(u emission.Uncertainty) [calibration.ParameterCount]float64 {
	prior := calibration.DefaultPrior()
	for p, q := range map[calibration.Parameter]emission.Quantity{
		calibration.CoreDiameter: emission.CoreRadius, calibration.Wall: emission.Wall,
		calibration.Energy: emission.PulseEnergy, calibration.NonlinearIndex: emission.NonlinearIndex,
	} {
		if s := u.Standard[q]; s > 0 {
			prior[p] = s
		}
	}
	return prior
}

// writeCalibration appends the calibration to a logbook that no program is
// writing.
func writeCalibration(folder string, c *calibration.Calibration) error {
	book, err := logbook.Open(folder, logbook.Options{})
	if err != nil {
		return err
	}
	_, err = book.Append(reading.Stamp{UTC: time.Now().UTC()}, string(live.KindCalibration), c)
	if closeErr := book.Close(); err == nil {
		err = closeErr
	}
	return err
}

// printCalibration says what was found.
func printCalibration(w io.Writer, c *calibration.Calibration) {
	fmt.Fprintf(w, "%s\n\n", c.Name)
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	for _, v := range c.Values {
		p, err := calibration.ParseParameter(v.Parameter)
		if err != nil {
			continue // Fit names none that it does not know
		}
		before := "nothing was known before"
		if v.Prior > 0 {
			before = fmt.Sprintf("before: ± %s; %.0f %% of what is known the points told", strings.TrimPrefix(p.Format(v.Prior), "+"), 100*v.Told)
		}
		fmt.Fprintf(table, "%s\t%s\t± %s\t%s\n", v.Parameter, p.Format(v.Value), strings.TrimPrefix(p.Format(v.Sigma), "+"), before)
	}
	table.Flush()
	fmt.Fprintf(w, "\n%d points from %v to %v, %v to %v\n", c.Points,
		unit.Pascal(c.PressurePa[0]), unit.Pascal(c.PressurePa[1]), unit.Joule(c.EnergyJ[0]), unit.Joule(c.EnergyJ[1]))
	fmt.Fprintf(w, "measured minus predicted: %.2f nm rms before, %.2f nm after; chi² %.2f per degree of freedom, %d degrees\n",
		1e9*c.Before, 1e9*c.After, c.Reduced, c.Freedom)
	fmt.Fprintf(w, "beyond all corrections the answer is bent by up to %.2f nm between these pressures\n", c.MostBent().Nanometres())
	for _, v := range c.Values {
		if v.Prior > 0 && math.Abs(v.Value) > 3*v.Prior {
			fmt.Fprintf(w, "%s is %.1f times what was thought of it: something else may be wrong\n", v.Parameter, math.Abs(v.Value)/v.Prior)
		}
	}
	for _, a := range c.Alike {
		fmt.Fprintf(w, "%s and %s are hardly told apart: correlation %+.3f\n", a.One, a.Other, a.Correlation)
	}
	for _, text := range c.Doubtful {
		fmt.Fprintf(w, "counts for less than half: %s\n", text)
	}
	for _, s := range c.SetAside {
		fmt.Fprintf(w, "set aside: point %d, %s\n", s.Point, s.Why)
	}
}

// fitPoints are the points of a fit and the bench they were taken on.
type fitPoints struct {
	list  []calibration.Point
	about string
	bench *bench.Bench
}
