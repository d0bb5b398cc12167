package main

import (
	"fmt"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"barline/logbook"
	"barline/model/live"
	"barline/model/reading"
)

// noteData is a remark written from outside a session. About is the time that
// it speaks of, where that is not when it was written; Corrects is the record
// that it puts right.
type noteData struct {
	Text     string `json:"text"`
	About    string `json:"about,omitempty"`
	Corrects uint64 `json:"corrects,omitempty"`
}

// String returns the remark in words.
func (d noteData) String() string {
	text := d.Text
	if d.About != "" {
		text += " (about " + d.About + ")"
	}
	if d.Corrects != 0 {
		text += fmt.Sprintf(" (corrects record %d)", d.Corrects)
	}
	return text
}

func newLogNote() *cobra.Command {
	var about string
	var corrects uint64
	cmd := &cobra.Command{
		Use:   "note DIR TEXT",
		Short: "Add a remark to a logbook that no program is writing",
		Long: `Adds a remark. Nothing in a logbook is ever changed: a remark may say which
record it corrects, or which time it is about. While barline is running on the
logbook, write the remark there.`,
		Args: func(cmd *cobra.Command, args []string) error {
			if len(args) < 2 {
				return usage("log note: expected the folder of a logbook and a text")
			}
			return oneFolder(cmd, args[:1])
		},
		RunE: func(cmd *cobra.Command, args []string) error {
			data := noteData{Text: strings.TrimSpace(strings.Join(args[1:], " ")), Corrects: corrects}
			if data.Text == "" {
				return usage("log note: the text is empty")
			}
			when, err := instant(about, time.Now())
			if err != nil {
				return err
			}
			if !when.IsZero() {
				data.About = when.UTC().Format(time.RFC3339Nano)
			}
			if err := isLogbook(args[0]); err != nil {
				return err
			}
			if corrects != 0 {
				if err := holdsRecord(args[0], corrects); err != nil {
					return err
				}
			}
			book, err := logbook.Open(args[0], logbook.Options{})
			if err != nil {
				return err
			}
			seq, err := book.Append(reading.Stamp{UTC: time.Now().UTC()}, string(live.KindNote), data)
			if closeErr := book.Close(); err == nil {
				err = closeErr
			}
			if err != nil {
				return err
			}
			_, err = fmt.Fprintf(cmd.OutOrStdout(), "record %d\n", seq)
			return err
		},
	}
	cmd.Flags().StringVar(&about, "at", "", `time that the remark is about, such as 2026-12-01T11:42:00Z or "2h" (ago)`)
	cmd.Flags().Uint64Var(&corrects, "corrects", 0, "number of the record that the remark corrects")
	return cmd
}

// isLogbook refuses a folder that holds no segment, so that a misspelt name
// does not begin a logbook.
func isLogbook(dir string) error {
	n, err := logbook.Segments(dir)
	if err == nil && n == 0 {
		err = fmt.Errorf("%s is no logbook: it holds no segment such as 000001.jsonl", dir)
	}
	return err
}

func holdsRecord(dir string, seq uint64) error {
	for r, err := range logbook.Records(dir, logbook.Filter{After: seq - 1}) {
		if err != nil {
			continue
		}
		if r.Seq == seq {
			return nil
		}
		break
	}
	return fmt.Errorf("%s holds no record %d", dir, seq)
}
