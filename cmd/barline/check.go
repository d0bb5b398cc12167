package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"syscall"

	"github.com/spf13/cobra"

	"barline/model/bench"
	"barline/model/emission"
)

func newCheck() *cobra.Command {
	var file string
	var sample, keys, asJSON, live bool
	cmd := &cobra.Command{
		Use:   "check -b bench.toml",
		Short: "Read a bench file, say what was understood and everything that is wrong",
		Long: `Read a bench file, say what was understood and everything that is wrong.

Mistakes go to the error output, each with file, line and column; the exit
code is then 2. A first bench file is written by

    barline check --sample > bench.toml

Every key that a bench file may hold is listed, in Markdown, by --keys.

With --live every instrument is read once, and nothing is set; the exit code
is 1 where one does not answer.`,
		Args: noArgs,
		RunE: func(cmd *cobra.Command, args []string) error {
			out := cmd.OutOrStdout()
			if sample {
				_, err := out.Write(bench.Sample())
				return err
			}
			if keys {
				return writeKeys(out)
			}
			if file == "" {
				return usage("check needs a bench file: -b bench.toml; a first one is written by barline check --sample")
			}
			_, b, err := readBench(file)
			if err == nil {
				if _, wrong := emission.SetupFromBench(b); wrong != nil {
					err = usage("%s: the light cannot be predicted: %w", file, wrong)
				}
			}
			var found bench.Mistakes
			errors.As(err, &found)
			if live && err == nil {
				return showLive(cmd, b, asJSON)
			}
			switch {
			case asJSON && (err == nil || found != nil):
				if err := writeObject(out, checked(file, b, found)); err != nil {
					return err
				}
			case found == nil && err == nil:
				writeSummary(out, file, b)
			}
			if found != nil {
				if !asJSON {
					fmt.Fprintln(cmd.ErrOrStderr(), found)
				}
				return usage("%s: %s", file, counted(len(found), "mistake"))
			}
			return err
		},
	}
	cmd.Flags().StringVarP(&file, "bench", "b", "", "bench file")
	cmd.Flags().BoolVar(&keys, "keys", false, "list every key with its unit and default")
	cmd.Flags().BoolVar(&sample, "sample", false, "print a commented bench file")
	cmd.Flags().BoolVar(&live, "live", false, "read every instrument once")
	cmd.Flags().BoolVar(&asJSON, "json", false, "print the result as one JSON object")
	cmd.MarkFlagsMutuallyExclusive("bench", "sample")
	cmd.MarkFlagsMutuallyExclusive("live", "sample")
	return cmd
}

// showLive reads the instruments and prints what they said.
func showLive(cmd *cobra.Command, b *bench.Bench, asJSON bool) error {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	reports := checkLive(ctx, b)
	if asJSON {
		if err := writeObject(cmd.OutOrStdout(), struct {
			Instruments []liveReport `json:"instruments"`
		}{reports}); err != nil {
			return err
		}
	} else {
		writeLive(cmd.OutOrStdout(), reports)
	}
	if !sound(reports) {
		return errors.New("not every channel gave a value")
	}
	return nil
}

// checkedFile is what check --json prints.
type checkedFile struct {
	File     string         `json:"file"`
	OK       bool           `json:"ok"`
	Name     string         `json:"name,omitempty"`
	Highest  float64        `json:"highest_setpoint_bar,omitempty"`
	Bound    string         `json:"bound_by,omitempty"`
	Channels []checkedEntry `json:"channels,omitempty"`
	Missing  []string       `json:"without,omitempty"`
	Mistakes []checkedWrong `json:"mistakes,omitempty"`
}

type checkedEntry struct {
	Instrument string `json:"instrument"`
	Channel    string `json:"channel"`
	Role       string `json:"role"`
	Protocol   string `json:"protocol"`
	Reached    string `json:"reached_by"`
}

type checkedWrong struct {
	Line   int    `json:"line,omitempty"`
	Column int    `json:"column,omitempty"`
	Key    string `json:"key,omitempty"`
	Text   string `json:"text"`
}

func checked(file string, b *bench.Bench, found bench.Mistakes) checkedFile {
	c := checkedFile{File: file, OK: b != nil}
	for _, m := range found {
		c.Mistakes = append(c.Mistakes, checkedWrong{m.Line, m.Column, m.Key, m.Text})
	}
	if b == nil {
		return c
	}
	low := b.Limits.Enforced().Lowest()
	c.Name, c.Highest, c.Bound, c.Missing = b.Bench.Name, low.Max.Bar(), low.Part, lacking(b)
	for i := range b.Instrument {
		inst := &b.Instrument[i]
		for j := range inst.Channel {
			ch := &inst.Channel[j]
			c.Channels = append(c.Channels, checkedEntry{inst.Name, ch.Name, ch.Role.String(), inst.Protocol, reachedBy(inst)})
		}
	}
	return c
}

// writeObject prints v as one object on one line.
func writeObject(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	return e.Encode(v)
}

// counted writes "1 mistake" or "3 mistakes".
func counted(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return fmt.Sprintf("%d %ss", n, noun)
}
