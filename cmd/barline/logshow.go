package main

import (
	"bufio"
	"encoding/json"
	"fmt"
	"io"
	"time"

	"github.com/spf13/cobra"

	"barline/logbook"
)

// filterFlags adds the flags that choose records and returns what reads them.
func filterFlags(cmd *cobra.Command) func() (logbook.Filter, error) {
	var from, to string
	var f logbook.Filter
	flags := cmd.Flags()
	flags.StringVar(&from, "from", "", `first time, such as 2026-12-01T11:42:00Z, "2026-12-01 11:42" (local) or "2h" (ago)`)
	flags.StringVar(&to, "to", "", "time to stop before, written like --from")
	flags.StringSliceVar(&f.Kinds, "kind", nil, "kinds of record, such as reading,alarm,note")
	flags.StringSliceVar(&f.Channels, "channel", nil, "channels, as the bench file names them")
	return func() (logbook.Filter, error) {
		var err error
		if f.From, err = instant(from, time.Now()); err == nil {
			f.To, err = instant(to, time.Now())
		}
		return f, err
	}
}

// instant reads a time as a person writes it; empty is no time.
func instant(text string, now time.Time) (time.Time, error) {
	if text == "" {
		return time.Time{}, nil
	}
	for _, layout := range []string{time.RFC3339Nano, "2006-01-02 15:04:05", "2006-01-02 15:04", "2006-01-02"} {
		if t, err := time.ParseInLocation(layout, text, time.Local); err == nil {
			return t, nil
		}
	}
	if d, err := time.ParseDuration(text); err == nil && d >= 0 {
		return now.Add(-d), nil
	}
	return time.Time{}, usage(`time %q: expected one such as 2026-12-01T11:42:00Z, "2026-12-01 11:42" or "2h" for two hours ago`, text)
}

func newLogShow() *cobra.Command {
	var asJSON, follow bool
	cmd := &cobra.Command{
		Use:   "show DIR",
		Short: "Print records, one a line",
		Long: `Prints records in words, with the local time; --json prints them as JSON Lines
with UTC, the data as it stands in the logbook.`,
		Args: oneFolder,
	}
	filter := filterFlags(cmd)
	cmd.Flags().BoolVar(&asJSON, "json", false, "print JSON Lines")
	cmd.Flags().BoolVarP(&follow, "follow", "f", false, "go on with what is written from now on, until Ctrl-C")
	cmd.RunE = func(cmd *cobra.Command, args []string) error {
		f, err := filter()
		if err != nil {
			return err
		}
		out := bufio.NewWriter(cmd.OutOrStdout())
		write := writeText
		if asJSON {
			write = writeJSON
		}
		trouble := damageTold{to: cmd.ErrOrStderr()}
		records := logbook.Records(args[0], f)
		if follow {
			records = logbook.Follow(cmd.Context(), args[0], f)
		} else if err := isLogbook(args[0]); err != nil {
			return err
		}
		for r, err := range leavingOut(cmd.Context(), records, &trouble) {
			if err != nil {
				return err
			}
			if err := write(out, r); err != nil {
				return err
			}
			if follow {
				if err := out.Flush(); err != nil {
					return err
				}
			}
		}
		if err := out.Flush(); err != nil || cmd.Context().Err() != nil {
			return err
		}
		return trouble.verdict()
	}
	return cmd
}

// damageTold reports damage that a reader passed over.
type damageTold struct {
	to    io.Writer
	worse int // places worse than a torn tail
}

// tell prints damage, and returns an error with which reading cannot go on.
func (t *damageTold) tell(err error) error {
	d := logbook.AsDamage(err)
	if d == nil {
		return err
	}
	if d.Kind != logbook.Torn {
		t.worse++
	}
	fmt.Fprintln(t.to, "barline: left out:", d)
	return nil
}

func (t *damageTold) verdict() error {
	if t.worse > 0 {
		return fmt.Errorf("%d damaged places were left out; log verify tells all", t.worse)
	}
	return nil
}

func writeText(w io.Writer, r logbook.Record) error {
	_, err := fmt.Fprintf(w, "%s  %6d  %-13s %s\n", r.UTC.Local().Format("2006-01-02 15:04:05.000"), r.Seq, r.Kind, recordText(r))
	return err
}

func writeJSON(w io.Writer, r logbook.Record) error {
	_, err := fmt.Fprintf(w, `{"seq":%d,"t":"%s","mono_ns":%d,"kind":"%s","data":%s}`+"\n",
		r.Seq, r.UTC.Format("2006-01-02T15:04:05.000000Z"), int64(r.Mono), r.Kind, r.Data)
	return err
}

func printJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	return e.Encode(v)
}
