package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"time"

	"github.com/mattn/go-isatty"

	"barline/logbook"
	"barline/model/live"
	"barline/tui"
)

// follow shows a record that another program is writing, to a second person.
// Nothing can be commanded and nothing is written.
func follow(ctx context.Context, folder string, stdout, stderr io.Writer) error {
	if _, err := os.Stat(folder); err != nil {
		return fmt.Errorf("nothing to follow: %w", err)
	}
	ctx, cancel := context.WithCancel(ctx)
	defer cancel()
	r := &replay{player: newPlayer(folder), dir: folder, changed: make(chan struct{}, 1), control: make(chan rune, 1), speed: 1}
	records := make(chan logbook.Record, 1024)
	read := make(chan error, 1)
	go func() {
		defer close(records)
		read <- safely(func() error {
			for rec, err := range logbook.Follow(ctx, folder, logbook.Filter{}) {
				if err != nil {
					continue // damage is what log verify is for
				}
				select {
				case records <- rec:
				case <-ctx.Done():
					return nil
				}
			}
			return nil
		})
	}()
	ready := make(chan struct{})
	played := make(chan error, 1)
	go func() {
		defer cancel()
		err := safely(func() error { return r.followOn(ctx, records, ready) })
		select {
		case readErr := <-read:
			err = errors.Join(err, readErr)
		default:
		}
		played <- err
	}()
	fmt.Fprintf(stderr, "barline: following %s\n", folder)
	select {
	case <-ready:
	case err := <-played:
		return err
	case <-ctx.Done():
		return nil
	}
	out, ok := stdout.(*os.File)
	if !ok || !isatty.IsTerminal(out.Fd()) || !isatty.IsTerminal(os.Stdin.Fd()) {
		return r.print(stdout, played)
	}
	style, err := tui.StyleFor(r.shown().Bench.Screen, os.Getenv)
	if err != nil {
		return coded{exitUsage, err}
	}
	err = tui.Run(ctx, r, tui.Options{Style: style})
	cancel()
	if followErr := <-played; err == nil {
		err = followErr
	}
	return err
}

// followOn takes records as they come and lets bench time pass as it does.
// ready is closed when there is something to show.
func (r *replay) followOn(ctx context.Context, records <-chan logbook.Record, ready chan<- struct{}) error {
	tick := time.NewTicker(playerTick)
	defer tick.Stop()
	shown := false
	for {
		select {
		case <-ctx.Done():
			return nil
		case rec, ok := <-records:
			if !ok {
				return nil
			}
			r.player.meet(rec)
			if err := r.player.take(rec); err != nil {
				return err
			}
			r.stopped = rec.Kind == string(live.KindStop)
			continue
		case <-tick.C:
		}
		if r.player.loop == nil {
			continue
		}
		if !r.stopped { // between the records bench time passes by itself
			step := time.Duration(float64(playerTick) * r.player.speed)
			if r.player.speed > fastest {
				r.player.skip(step)
			} else {
				r.player.advance(step)
			}
		}
		s := *r.player.loop.Snapshot()
		s.ReadOnly, s.Simulated = true, r.player.simulated
		if r.stopped {
			s.Notice = "the program that wrote this record has ended"
		}
		r.snap.Store(&s)
		select {
		case r.changed <- struct{}{}:
		default:
		}
		if !shown {
			shown = true
			close(ready)
		}
	}
}
