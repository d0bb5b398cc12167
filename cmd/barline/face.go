package main

import (
	"context"
	"io"
	"os"
	"os/signal"
	"syscall"
	"time"

	"github.com/mattn/go-isatty"

	"barline/cmd/barline/loop"
	"barline/model/live"
	"barline/tui"
)

// plainEvery is how often a run without a screen prints where it stands, in
// bench time.
const plainEvery = 5 * time.Second

// face returns how the session is shown: a screen on a terminal, lines
// elsewhere, nothing at all where it is headless.
func (s *session) face(headless bool, stdout io.Writer) front {
	if headless {
		return func(ctx context.Context, _ *loop.Loop) error {
			<-ctx.Done()
			return nil
		}
	}
	out, ok := stdout.(*os.File)
	if !ok || !isatty.IsTerminal(out.Fd()) || !isatty.IsTerminal(os.Stdin.Fd()) {
		return plain(stdout, plainEvery)
	}
	s.anchors = true
	return s.screen
}

// screen shows the dashboard. When the shell goes away the bench is held and
// recording goes on without a screen until the program is told to end.
func (s *session) screen(ctx context.Context, l *loop.Loop) error {
	style, err := tui.StyleFor(s.bench.Screen, os.Getenv)
	if err != nil {
		return coded{exitUsage, err}
	}
	hangup := make(chan os.Signal, 1)
	signal.Notify(hangup, syscall.SIGHUP)
	defer signal.Stop(hangup)
	shell, leave := context.WithCancel(ctx)
	defer leave()
	shown := make(chan error, 1)
	go func() {
		shown <- tui.Run(shell, l, tui.Options{Style: style, Plain: s.noCharts, Greet: s.greet, Plan: s.planned()})
	}()
	select {
	case err := <-shown:
		select {
		case <-hangup: // the screen noticed first
		default:
			return err
		}
	case <-hangup:
		leave()
		<-shown
	}
	l.Do(live.Hold{})
	l.Do(live.Note{Text: "the shell went away: held, recording goes on without a screen"})
	<-ctx.Done()
	return nil
}
