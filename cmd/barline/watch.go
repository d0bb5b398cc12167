package main

import (
	"context"
	"io"
	"math"
	"time"

	"github.com/spf13/cobra"

	"barline/device/instrument"
	"barline/device/link"
	"barline/model/bench"
	"barline/model/clock"
)

type watchFlags struct {
	bench      string
	logbook    string
	followOnly bool
	noCharts   bool
	capture    string
}

func newWatch() *cobra.Command {
	var f watchFlags
	cmd := &cobra.Command{
		Use:   "watch -b bench.toml",
		Short: "The dashboard on real instruments",
		Long: `The dashboard on the instruments of a bench file. Ctrl-C or q holds the bench,
closes the logbook and leaves. Where the shell goes away the bench is held and
recording goes on; --follow-only attaches to it again, for you or for a second
person. Without a bench file, on a terminal, it offers to write one by questions.

barline is no safety device: pressure ratings, relief valve and hardware
interlocks come first.`,
		Args: noArgs,
		RunE: func(cmd *cobra.Command, _ []string) error {
			if f.bench == "" && !f.followOnly && isTerminal(cmd.InOrStdin()) && isTerminal(cmd.OutOrStdout()) {
				return askForBench(cmd.Context(), cmd.InOrStdin(), cmd.OutOrStdout())
			}
			return f.run(cmd.Context(), cmd.OutOrStdout(), cmd.ErrOrStderr())
		},
	}
	cmd.Flags().StringVarP(&f.bench, "bench", "b", "", "the bench file; barline check --sample prints one")
	cmd.Flags().StringVar(&f.logbook, "logbook", "", "folder of the logbook; without it that of the bench file, else one in your data folder")
	cmd.Flags().BoolVar(&f.followOnly, "follow-only", false, "a second screen on the record that another barline is writing: nothing can be commanded")
	cmd.Flags().StringVar(&f.capture, "capture", "", captureHelp)
	cmd.Flags().BoolVar(&f.noCharts, "no-charts", false, "begin without charts, for a slow line; g brings them")
	return cmd
}

// place makes the bench of the bench file.
func (f watchFlags) place(stderr io.Writer) (*place, error) {
	text, b, err := readBench(f.bench)
	if err != nil {
		return nil, err
	}
	s, err := newSession(b, text)
	if err != nil {
		return nil, err
	}
	if s.folder, err = logbookFolder(f.logbook, b.Logbook.Folder, b.Bench.Name, false); err != nil {
		return nil, err
	}
	s.greet = unused(s.folder, f.logbook, b.Logbook.Folder)
	if s.capture, err = parseCapture(f.capture); err != nil {
		return nil, err
	}
	s.speed, s.opener, s.noCharts, s.stderr = 1, openLine, f.noCharts, stderr
	return &place{session: s, begin: func(_ context.Context, s *session) (func(), error) {
		s.clock = clock.NewScaled(1)
		return func() {}, nil
	}}, nil
}

func (f watchFlags) run(ctx context.Context, stdout, stderr io.Writer) error {
	if f.bench == "" {
		return usage("watch needs a bench file: -b bench.toml; barline check --sample prints one to start from")
	}
	if f.followOnly {
		_, b, err := readBench(f.bench)
		if err != nil {
			return err
		}
		folder, err := logbookFolder(f.logbook, b.Logbook.Folder, b.Bench.Name, false)
		if err != nil {
			return err
		}
		return follow(ctx, folder, stdout, stderr)
	}
	p, err := f.place(stderr)
	if err != nil {
		return err
	}
	return p.run(ctx, p.session.face(false, stdout))
}

// openLine returns how the line of an instrument is opened.
func openLine(in bench.Instrument) (instrument.Open, error) {
	o, err := link.NewOpener(in)
	if err != nil {
		return nil, err
	}
	return o.Open, nil
}

const captureHelp = "record every reading and not only changes: always, or for a bench time such as 10m"

// parseCapture reads --capture.
func parseCapture(text string) (time.Duration, error) {
	switch text {
	case "":
		return 0, nil
	case "always":
		return math.MaxInt64, nil
	}
	d, err := time.ParseDuration(text)
	if err != nil || d <= 0 {
		return 0, usage("--capture %q: expected always, or a time such as 10m", text)
	}
	return d, nil
}
