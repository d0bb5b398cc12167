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
	adopt            bool
}

func newFit() *cobra.Command {
	var f fitFlags
	cmd := &cobra.Command{
		Use:   "fit [DIR]",
		Short: "Calibrate the prediction on a pressure scan",
		Long: `Fits what is not known of the bench to the emission of a pressure scan, and
writes the calibration into the logbook. With --csv the points come from a file
with the columns pressure_bar and emission_nm, and as far as they are known
temperature_degC, energy_uJ and sigma_nm; the calibration is then kept where the
folder of a logbook is named too, and only printed otherwise.

Corrections that can be free: index-scale, core-diameter, wall, energy,
nonlinear-index, gauge-zero, wavelength-offset.

The calibration is kept in the logbook and as a file in its folder
calibrations. --adopt uses it from the next start on; adopt, revert, list, show
and compare do the rest.

The anchored prediction is what is calibrated. It stands on full-field runs;
those that are not in the cache yet are computed first, which takes minutes.`,
		Args: func(cmd *cobra.Command, args []string) error {
			if len(args) == 0 && f.csv == "" || len(args) > 1 {
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
	flags.StringVar(&f.csv, "csv", "", "points from this file instead of a scan of the logbook")
	flags.IntVar(&f.scan, "scan", 0, "which scan of the logbook, from 1; 0 is the last")
	flags.StringSliceVar(&f.free, "free", allCorrections(), "corrections to fit")
	flags.StringVar(&f.discrepancy, "discrepancy", calibration.DefaultDiscrepancy.String(), "how far the model itself may be off, whatever its corrections")
	flags.StringVar(&f.name, "name", "", "name of the calibration; default: the scan and the date")
	flags.BoolVar(&f.dry, "dry-run", false, "print the calibration, write nothing")
	flags.BoolVar(&f.adopt, "adopt", false, "use the calibration from the next start on")
	flags.BoolVar(&f.asJSON, "json", false, "print the result as one JSON object")
	addManaging(cmd)
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
	if f.adopt && (f.dry || folder == "") {
		return usage("--adopt needs the folder of a logbook to keep the calibration in, and does not go with --dry-run")
	}
	points, setup, err := f.scanOf(folder)
	if err != nil {
		return err
	}
	if err := spread(points.list); err != nil {
		return err
	}
	request.Points, request.Peaks = points.list, points.bench.Emission.Reports == "peak"
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
		if err := f.keep(folder, c); err != nil {
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

// scanOf returns the points of a fit, and the bench that they were taken on.
func (f *fitFlags) scanOf(folder string) (fitPoints, emission.Setup, error) {
	points, err := f.points(folder)
	if err != nil {
		return points, emission.Setup{}, err
	}
	setup, err := emission.SetupFromBench(points.bench)
	if err != nil {
		return points, setup, usage("the light cannot be predicted: %w", err)
	}
	return points, setup, nil
}

// keep writes the calibration into a logbook that no program is writing and
// into a file beside it, and puts it into use where that is asked for.
func (f *fitFlags) keep(folder string, c *calibration.Calibration) error {
	store := calibrationsOf(folder)
	known, use, err := store.load()
	if err != nil {
		return err
	}
	for _, k := range known {
		if k.Name == c.Name {
			return usage("a calibration is called %q already: give this one another --name", c.Name)
		}
	}
	c.Replaced = use.Name
	book, err := logbook.Open(folder, logbook.Options{})
	if err != nil {
		return fmt.Errorf("%w; where a dashboard is running, calibrate on its drift page", err)
	}
	at := reading.Stamp{UTC: time.Now().UTC()}
	_, err = book.Append(at, string(live.KindCalibration), live.CalibrationData{Action: "fitted", Replaces: use.Name, Calibration: c})
	if err == nil && f.adopt {
		_, err = book.Append(at, string(live.KindCalibration), live.CalibrationData{Action: "adopted", Replaces: use.Name, Calibration: c})
	}
	if closeErr := book.Close(); err == nil {
		err = closeErr
	}
	if err == nil {
		err = store.add(c)
	}
	if err == nil && f.adopt {
		err = store.choose(chosen{Name: c.Name, Earlier: append(use.Earlier, use.Name)})
	}
	return err
}

// leastTold is the share of what is known of a correction that the points must
// have told for it to count as seen.
const leastTold = 0.02

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
	for _, v := range c.Values {
		if v.Told < leastTold {
			fmt.Fprintf(w, "%s is not seen by these points: its value is what was thought of it before\n", v.Parameter)
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
