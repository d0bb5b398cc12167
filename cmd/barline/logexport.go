package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"

	"github.com/spf13/cobra"

	"barline/logbook"
	"barline/logbook/export"
	"barline/model/live"
)

// formats are the ways to write records for other programs.
var formats = map[string]func(io.Writer, export.Records) (int, error){
	"csv":     export.CSV,
	"scan":    export.Scan,
	"parquet": export.Parquet,
}

func newLogExport() *cobra.Command {
	var format, output string
	cmd := &cobra.Command{
		Use:   "export DIR",
		Short: "Write records as CSV, as Parquet or as a scan table",
		Long: `Writes records for other programs: csv (RFC 4180) and parquet have a row for each
record, scan has one for each step of a scan. Quantities are in the SI unit
that the table names, times are UTC.`,
		Args: oneFolder,
	}
	filter := filterFlags(cmd)
	cmd.Flags().StringVar(&format, "format", "csv", "csv, parquet or scan")
	cmd.Flags().StringVarP(&output, "output", "o", "", "file to write; it must not exist yet (default: stdout)")
	cmd.RunE = func(cmd *cobra.Command, args []string) error {
		write, ok := formats[format]
		if !ok {
			return usage("format %q: expected csv, parquet or scan", format)
		}
		f, err := filter()
		if err != nil {
			return err
		}
		if format == "scan" {
			f.Kinds = []string{string(live.KindStep)}
		}
		if format == "parquet" && output == "" {
			return usage("parquet is no text: name a file with --output")
		}
		if err := isLogbook(args[0]); err != nil {
			return err
		}
		trouble := damageTold{to: cmd.ErrOrStderr()}
		var n int
		err = toFile(output, cmd.OutOrStdout(), func(w io.Writer) error {
			n, err = write(w, leavingOut(cmd.Context(), logbook.Records(args[0], f), &trouble))
			if err == nil {
				err = cmd.Context().Err() // half a table is none
			}
			return err
		})
		if err != nil {
			return err
		}
		if output != "" {
			fmt.Fprintf(cmd.ErrOrStderr(), "barline: %d rows in %s\n", n, output)
		}
		return trouble.verdict()
	}
	return cmd
}

// leavingOut tells damage and leaves it out of records, and ends with ctx.
func leavingOut(ctx context.Context, records export.Records, trouble *damageTold) export.Records {
	return func(yield func(logbook.Record, error) bool) {
		for r, err := range records {
			if ctx.Err() != nil {
				return
			}
			if err != nil {
				if err = trouble.tell(err); err == nil {
					continue
				}
			}
			if !yield(r, err) {
				return
			}
		}
	}
}

// toFile gives write a new file of that name, or stdout where there is none.
// A file that could not be written whole is removed.
func toFile(name string, stdout io.Writer, write func(io.Writer) error) error {
	if name == "" {
		out := bufio.NewWriter(stdout)
		return errors.Join(write(out), out.Flush())
	}
	f, err := os.OpenFile(name, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o644)
	if errors.Is(err, fs.ErrExist) {
		return fmt.Errorf("%s exists already; choose another name", name)
	}
	if err != nil {
		return err
	}
	out := bufio.NewWriterSize(f, 1<<20)
	err = errors.Join(write(out), out.Flush(), f.Close())
	if err != nil {
		os.Remove(name)
	}
	return err
}
