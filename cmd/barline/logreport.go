package main

import (
	"fmt"
	"io"
	"time"

	"github.com/spf13/cobra"

	"barline/logbook/report"
)

func newLogReport() *cobra.Command {
	var output, zone string
	cmd := &cobra.Command{
		Use:   "report DIR",
		Short: "Draw a stretch of a logbook as one HTML file",
		Long: `Writes one HTML file with everything in it: pressure, emission over pressure,
residual, steps, alarms, notes, calibration, configuration. It can be printed.`,
		Args: oneFolder,
	}
	filter := filterFlags(cmd)
	cmd.Flags().StringVarP(&output, "output", "o", "", "file to write; it must not exist yet (default: stdout)")
	cmd.Flags().StringVar(&zone, "zone", "UTC", `time zone of the times shown, such as Europe/Zurich, or "Local"`)
	cmd.RunE = func(cmd *cobra.Command, args []string) error {
		f, err := filter()
		if err != nil {
			return err
		}
		place, err := time.LoadLocation(zone)
		if err != nil {
			return usage(`time zone %q: expected one such as UTC, Local or Europe/Zurich`, zone)
		}
		if err := isLogbook(args[0]); err != nil {
			return err
		}
		err = toFile(output, cmd.OutOrStdout(), func(w io.Writer) error {
			return report.Write(w, args[0], report.Options{Filter: f, Zone: place})
		})
		if err == nil && output != "" {
			fmt.Fprintf(cmd.ErrOrStderr(), "barline: report in %s\n", output)
		}
		return err
	}
	return cmd
}
