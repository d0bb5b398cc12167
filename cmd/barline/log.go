package main

import (
	"context"
	"fmt"
	"os"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"barline/logbook"
)

func newLog() *cobra.Command {
	log := &cobra.Command{
		Use:   "log",
		Short: "Read, check and export a logbook",
		Long:  "Reads a logbook, also one that is being written. Only note writes.",
		RunE: func(cmd *cobra.Command, args []string) error {
			if len(args) > 0 {
				return usage("log %q: expected list, show, verify, note, export or report", args[0])
			}
			return cmd.Help()
		},
	}
	log.AddCommand(newLogList(), newLogShow(), newLogVerify(), newLogNote(), newLogExport(), newLogReport())
	return log
}

// oneFolder takes exactly one argument, the folder of a logbook.
func oneFolder(cmd *cobra.Command, args []string) error {
	if len(args) != 1 {
		return usage("%s: %d arguments, expected one: the folder of a logbook", cmd.CommandPath(), len(args))
	}
	if info, err := os.Stat(args[0]); err != nil {
		return err
	} else if !info.IsDir() {
		return fmt.Errorf("%s is a file, expected the folder of a logbook", args[0])
	}
	return nil
}

func newLogVerify() *cobra.Command {
	var deep, asJSON bool
	cmd := &cobra.Command{
		Use:   "verify DIR",
		Short: "Check that nothing in a logbook was lost or changed",
		Long: `Checks framing, sequence, chain and digests of every segment, and the spectra
that records name, and says what is damaged, where, and what is still good. A torn tail, as a crash leaves it, is
told and is no failure.`,
		Args: oneFolder,
		RunE: func(cmd *cobra.Command, args []string) error {
			if err := isLogbook(args[0]); err != nil {
				return err
			}
			report, err := verifyUntil(cmd.Context(), args[0], deep)
			if err != nil {
				return err
			}
			if asJSON {
				err = printJSON(cmd.OutOrStdout(), verifyJSON(report))
			} else {
				err = printReport(cmd, report)
			}
			switch {
			case err != nil:
				return err
			case report.OnlyTorn():
				return nil
			}
			return fmt.Errorf("%s is damaged: %v", args[0], firstWorse(report))
		},
	}
	cmd.Flags().BoolVar(&deep, "deep", false, "parse every record too")
	cmd.Flags().BoolVar(&asJSON, "json", false, "print one JSON object")
	return cmd
}

// verifyUntil is logbook.Verify that Ctrl-C ends.
func verifyUntil(ctx context.Context, dir string, deep bool) (report logbook.Report, err error) {
	done := make(chan struct{})
	go func() {
		defer close(done)
		report, err = logbook.Verify(dir, deep)
	}()
	select {
	case <-done:
		return report, err
	case <-ctx.Done():
		return logbook.Report{}, fmt.Errorf("verify was stopped before it was done: %w", ctx.Err())
	}
}

// firstWorse returns the first damage that is more than a torn tail.
func firstWorse(r logbook.Report) *logbook.Damage {
	for _, d := range r.Damage {
		if d.Kind != logbook.Torn {
			return d
		}
	}
	return nil
}

func printReport(cmd *cobra.Command, r logbook.Report) error {
	table := tabwriter.NewWriter(cmd.OutOrStdout(), 0, 0, 2, ' ', 0)
	for _, s := range r.Segments {
		state := "sealed"
		if !s.Sealed {
			state = "not sealed"
		}
		fmt.Fprintf(table, "%s\t%d records\t%s\t%s\n", s.Name, s.Records, span(s.From, s.To), state)
	}
	if err := table.Flush(); err != nil {
		return err
	}
	out := cmd.OutOrStdout()
	for _, n := range r.Notices {
		fmt.Fprintln(out, "notice:", n)
	}
	for _, d := range r.Damage {
		if d.Kind == logbook.Torn {
			fmt.Fprintln(out, "notice:", d)
		} else {
			fmt.Fprintln(out, "damage:", d)
		}
	}
	verdict := "sound"
	switch {
	case !r.OnlyTorn():
		verdict = "damaged; all other records are good"
	case len(r.Damage) > 0:
		verdict = "sound up to a torn tail"
	}
	_, err := fmt.Fprintf(out, "%d records in %d segments, %.1f MB: %s\n", r.Records, len(r.Segments), float64(r.Bytes)/1e6, verdict)
	return err
}

func span(from, to string) string {
	if from == "" {
		return "empty"
	}
	return from + " to " + to
}

// verifyJSON is the report as --json prints it.
func verifyJSON(r logbook.Report) any {
	type segment struct {
		Name     string `json:"name"`
		Records  uint64 `json:"records"`
		Bytes    int64  `json:"bytes"`
		FirstSeq uint64 `json:"first_seq"`
		LastSeq  uint64 `json:"last_seq"`
		From     string `json:"from"`
		To       string `json:"to"`
		Sealed   bool   `json:"sealed"`
		SHA256   string `json:"sha256"`
	}
	type damage struct {
		Segment  string `json:"segment"`
		Offset   int64  `json:"offset"`
		Bytes    int64  `json:"bytes"`
		AfterSeq uint64 `json:"after_seq"`
		Kind     string `json:"kind"`
		Text     string `json:"text"`
	}
	answer := struct {
		Folder   string    `json:"folder"`
		Sound    bool      `json:"sound"`
		Records  uint64    `json:"records"`
		Bytes    int64     `json:"bytes"`
		Segments []segment `json:"segments"`
		Damage   []damage  `json:"damage"`
		Notices  []string  `json:"notices"`
	}{r.Folder, r.OnlyTorn(), r.Records, r.Bytes, []segment{}, []damage{}, append([]string{}, r.Notices...)}
	for _, s := range r.Segments {
		answer.Segments = append(answer.Segments, segment{s.Name, s.Records, s.Bytes, s.First, s.Last, s.From, s.To, s.Sealed, s.SHA256})
	}
	for _, d := range r.Damage {
		answer.Damage = append(answer.Damage, damage{d.Segment, d.Offset, d.Bytes, d.After, string(d.Kind), d.Text})
	}
	return answer
}
