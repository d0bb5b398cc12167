package main

import (
	"context"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
	"text/tabwriter"
	"time"

	"github.com/spf13/cobra"

	"barline/logbook"
	"barline/model/calibration"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// addManaging gives fit the commands that list, show, compare, adopt and
// revert calibrations of a logbook.
func addManaging(fit *cobra.Command) {
	var asJSON bool
	list := &cobra.Command{
		Use: "list DIR", Short: "Calibrations of a logbook, and which is in use", Args: oneArg("the folder of a logbook"),
		RunE: func(cmd *cobra.Command, args []string) error {
			return listCalibrations(cmd.OutOrStdout(), args[0], asJSON)
		},
	}
	show := &cobra.Command{
		Use: "show DIR NAME", Short: "One calibration; a part of the name will do", Args: folderAndName,
		RunE: func(cmd *cobra.Command, args []string) error {
			_, c, _, err := oneCalibration(args[0], args[1])
			if err != nil {
				return err
			}
			if asJSON {
				return writeObject(cmd.OutOrStdout(), c)
			}
			printCalibration(cmd.OutOrStdout(), c)
			return nil
		},
	}
	adopt := &cobra.Command{
		Use: "adopt DIR NAME", Short: "Use a calibration from the next start on", Args: folderAndName,
		Long: `Use a calibration from the next start on, for predictions of the bench whose
logbook this is. It corrects the anchored answer, never the estimate. Where a
dashboard is running, adopt on its drift page instead: it holds the logbook.`,
		RunE: func(cmd *cobra.Command, args []string) error {
			store, c, use, err := oneCalibration(args[0], args[1])
			if err != nil {
				return err
			}
			if use.Name == c.Name {
				return fmt.Errorf("calibration %q is in use already", c.Name)
			}
			next := chosen{Name: c.Name, Earlier: append(slices.Clone(use.Earlier), use.Name)}
			if err := putInUse(args[0], store, next, live.CalibrationData{Action: "adopted", Replaces: use.Name, Calibration: c}); err != nil {
				return err
			}
			fmt.Fprintf(cmd.OutOrStdout(), "in use from the next start on: %s, %s\n", c.Name, c.Summary())
			return nil
		},
	}
	revert := &cobra.Command{
		Use: "revert DIR", Short: "Back to the calibration that was in use before", Args: oneArg("the folder of a logbook"),
		RunE: func(cmd *cobra.Command, args []string) error { return revertCalibration(cmd.OutOrStdout(), args[0]) },
	}
	var scan int
	compare := &cobra.Command{
		Use: "compare DIR NAME [OTHER]", Short: "Two calibrations, or one and the bench file, side by side",
		Long: `Two calibrations side by side, or one and the bench file where only one is
named: each correction, and how far apart they are in their own uncertainty.
With --scan also how far a scan of the logbook lies from either.`,
		Args: func(cmd *cobra.Command, args []string) error {
			if len(args) != 2 && len(args) != 3 {
				return usage("compare takes the folder of a logbook and one or two names; see barline fit compare -h")
			}
			return nil
		},
		RunE: func(cmd *cobra.Command, args []string) error {
			return compareCalibrations(cmd.Context(), args, scan, cmd.Flags().Changed("scan"), asJSON, cmd.OutOrStdout(), cmd.ErrOrStderr())
		},
	}
	compare.Flags().IntVar(&scan, "scan", 0, "lay both over this scan of the logbook, from 1; 0 is the last")
	for _, c := range []*cobra.Command{list, show, compare} {
		c.Flags().BoolVar(&asJSON, "json", false, "print the result as one JSON object")
	}
	fit.AddCommand(list, show, compare, adopt, revert)
}

func folderAndName(cmd *cobra.Command, args []string) error {
	if len(args) != 2 {
		return usage("%s takes the folder of a logbook and the name of a calibration, got %d arguments; see barline fit %s -h", cmd.Name(), len(args), cmd.Name())
	}
	return nil
}

// oneCalibration finds a calibration of a logbook by its name.
func oneCalibration(folder, name string) (store calibrationStore, c *calibration.Calibration, use chosen, err error) {
	if err := isLogbook(folder); err != nil {
		return store, nil, use, err
	}
	store = calibrationsOf(folder)
	known, use, err := store.load()
	if err != nil {
		return store, nil, use, err
	}
	c, err = named(known, name)
	return store, c, use, err
}

// putInUse writes into the record which calibration is in use, and then beside
// it. It refuses while another program is writing the record.
func putInUse(folder string, store calibrationStore, use chosen, d live.CalibrationData) error {
	book, err := logbook.Open(folder, logbook.Options{})
	if err != nil {
		return fmt.Errorf("%w; where a dashboard is running, use its drift page", err)
	}
	_, err = book.Append(reading.Stamp{UTC: time.Now().UTC()}, string(live.KindCalibration), d)
	if closeErr := book.Close(); err == nil {
		err = closeErr
	}
	if err != nil {
		return err
	}
	return store.choose(use)
}

func revertCalibration(w io.Writer, folder string) error {
	if err := isLogbook(folder); err != nil {
		return err
	}
	store := calibrationsOf(folder)
	known, use, err := store.load()
	if err != nil {
		return err
	}
	n := len(use.Earlier)
	if use.Name == "" && n == 0 {
		return fmt.Errorf("no calibration is in use, and none was before")
	}
	next := chosen{}
	if n > 0 {
		next = chosen{Name: use.Earlier[n-1], Earlier: use.Earlier[:n-1]}
	}
	var c *calibration.Calibration
	for _, k := range known {
		if k.Name == next.Name {
			c = k
		}
	}
	if c == nil {
		next.Name = ""
	}
	if err := putInUse(folder, store, next, live.CalibrationData{Action: "reverted", Replaces: use.Name, Calibration: c}); err != nil {
		return err
	}
	if c == nil {
		fmt.Fprintln(w, "in use from the next start on: the bench file, without a calibration")
		return nil
	}
	fmt.Fprintf(w, "in use from the next start on: %s, %s\n", c.Name, c.Summary())
	return nil
}

// listedCalibration is one entry of fit list --json.
type listedCalibration struct {
	Name   string    `json:"name"`
	InUse  bool      `json:"in_use"`
	Made   time.Time `json:"made"`
	Data   string    `json:"data"`
	Low    number    `json:"pressure_low_bar"`
	High   number    `json:"pressure_high_bar"`
	Points int       `json:"points"`
	Before number    `json:"rms_before_nm"`
	After  number    `json:"rms_after_nm"`
}

func listCalibrations(w io.Writer, folder string, asJSON bool) error {
	if err := isLogbook(folder); err != nil {
		return err
	}
	known, use, err := calibrationsOf(folder).load()
	if err != nil {
		return err
	}
	all := []listedCalibration{}
	for _, c := range known {
		all = append(all, listedCalibration{c.Name, c.Name == use.Name, c.Made, c.Data, number(c.PressurePa[0] / 1e5), number(c.PressurePa[1] / 1e5),
			c.Points, number(1e9 * c.Before), number(1e9 * c.After)})
	}
	if asJSON {
		return writeObject(w, struct {
			Calibrations []listedCalibration `json:"calibrations"`
			Earlier      []string            `json:"earlier"`
		}{all, append([]string{}, use.Earlier...)})
	}
	if len(known) == 0 {
		fmt.Fprintln(w, "no calibration yet; barline fit makes one from a scan")
		return nil
	}
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(table, "\tname\tmade\tpoints\trange\trms before\trms after")
	for _, c := range known {
		mark := ""
		if c.Name == use.Name {
			mark = "in use"
		}
		fmt.Fprintf(table, "%s\t%s\t%s\t%d\t%v to %v\t%.2f nm\t%.2f nm\n", mark, c.Name, c.Made.Format("2006-01-02 15:04 UTC"), c.Points,
			unit.Pascal(c.PressurePa[0]), unit.Pascal(c.PressurePa[1]), 1e9*c.Before, 1e9*c.After)
	}
	if use.Name == "" {
		fmt.Fprintln(table, "in use\tthe bench file, without a calibration")
	}
	return table.Flush()
}

// comparedEntry is one correction of fit compare --json.
type comparedEntry struct {
	Correction string `json:"correction"`
	Unit       string `json:"unit"`
	One        number `json:"one"`
	OneSigma   number `json:"one_sigma"`
	Other      number `json:"other"`
	OtherSigma number `json:"other_sigma"`
	Sigmas     number `json:"apart_in_sigma"`
}

// comparedScan is what fit compare says of a scan.
type comparedScan struct {
	Scan   string  `json:"scan"`
	Points int     `json:"points"`
	Bench  number  `json:"rms_bench_file_nm"`
	One    number  `json:"rms_one_nm"`
	Other  *number `json:"rms_other_nm,omitempty"`
}

func compareCalibrations(ctx context.Context, args []string, scan int, withScan, asJSON bool, w, progress io.Writer) error {
	_, one, _, err := oneCalibration(args[0], args[1])
	if err != nil {
		return err
	}
	var other *calibration.Calibration
	otherName := "the bench file"
	if len(args) == 3 {
		if _, other, _, err = oneCalibration(args[0], args[2]); err != nil {
			return err
		}
		otherName = other.Name
	}
	apart := calibration.Compare(other, one)
	var over *comparedScan
	if withScan {
		if over, err = compareOver(ctx, args[0], scan, one, other, progress); err != nil {
			return err
		}
	}
	if asJSON {
		entries := []comparedEntry{}
		for _, d := range apart {
			entries = append(entries, comparedEntry{d.Parameter.String(), d.Parameter.Unit(), number(d.Other), number(d.OtherSigma), number(d.One), number(d.OneSigma), number(d.Sigmas)})
		}
		return writeObject(w, struct {
			One         string          `json:"one"`
			Other       string          `json:"other"`
			Corrections []comparedEntry `json:"corrections"`
			Scan        *comparedScan   `json:"scan,omitempty"`
		}{one.Name, otherName, entries, over})
	}
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintf(table, "correction\t%s\t%s\tapart\n", one.Name, otherName)
	value := func(p calibration.Parameter, v, sigma float64) string {
		if sigma == 0 {
			if v == 0 {
				return "as stated"
			}
			return p.Format(v)
		}
		return p.Format(v) + " ± " + strings.TrimPrefix(p.Format(sigma), "+")
	}
	for _, d := range apart {
		fmt.Fprintf(table, "%v\t%s\t%s\t%.1f σ\n", d.Parameter, value(d.Parameter, d.Other, d.OtherSigma), value(d.Parameter, d.One, d.OneSigma), math.Abs(d.Sigmas))
	}
	if err := table.Flush(); err != nil {
		return err
	}
	fmt.Fprintf(w, "\n%s: %s\n", one.Name, one.Summary())
	if other != nil {
		fmt.Fprintf(w, "%s: %s\n", other.Name, other.Summary())
	}
	if over != nil {
		fmt.Fprintf(w, "%s, %d points, measured minus predicted: %.2f nm rms with the bench file, %.2f nm with %s", over.Scan, over.Points, float64(over.Bench), float64(over.One), one.Name)
		if over.Other != nil {
			fmt.Fprintf(w, ", %.2f nm with %s", float64(*over.Other), other.Name)
		}
		fmt.Fprintln(w)
	}
	return nil
}

// compareOver lays calibrations over a scan of the logbook.
func compareOver(ctx context.Context, folder string, scan int, one, other *calibration.Calibration, progress io.Writer) (*comparedScan, error) {
	f := fitFlags{scan: scan}
	points, setup, err := f.scanOf(folder)
	if err != nil {
		return nil, err
	}
	m, err := f.model(ctx, setup, points.list, progress)
	if err != nil {
		return nil, err
	}
	for _, c := range []*calibration.Calibration{one, other} {
		if c != nil {
			if _, err := calibration.NewCorrector(c, m.Nodes()); err != nil {
				return nil, err
			}
		}
	}
	bare := (*calibration.Calibration)(nil).Residuals(m, points.list)
	s := &comparedScan{Scan: points.about, Points: len(bare), Bench: rmsNM(bare), One: rmsNM(one.Residuals(m, points.list))}
	if other != nil {
		o := rmsNM(other.Residuals(m, points.list))
		s.Other = &o
	}
	return s, nil
}

func rmsNM(list []float64) number {
	sum := 0.0
	for _, v := range list {
		sum += v * v
	}
	return number(1e9 * math.Sqrt(sum/float64(max(len(list), 1))))
}
