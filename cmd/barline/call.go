package main

import (
	"context"
	"fmt"
	"io"
	"os"
	"os/exec"
	"time"

	"barline/model/live"
)

// callWithin bounds how long the command of [alarms] on_alarm may run.
const callWithin = 30 * time.Second

// caller runs the bench file's on_alarm command for people who are elsewhere.
// It never waits for the command; while one runs, at most a few more wait.
type caller struct {
	words   []string
	stderr  io.Writer
	waiting chan live.Call
}

// newCaller returns a caller, or nil where no command is configured.
func newCaller(words []string, stderr io.Writer) *caller {
	if len(words) == 0 {
		return nil
	}
	return &caller{words: words, stderr: stderr, waiting: make(chan live.Call, 8)}
}

// serve runs commands until ctx ends.
func (c *caller) serve(ctx context.Context) {
	if c == nil {
		return
	}
	for {
		select {
		case <-ctx.Done():
			return
		case call := <-c.waiting:
			c.run(ctx, call)
		}
	}
}

// call asks for the command to be run. Where too many wait already it is
// dropped: the record and the screen have every alarm.
func (c *caller) call(a live.Call) {
	if c == nil {
		return
	}
	select {
	case c.waiting <- a:
	default:
	}
}

func (c *caller) run(ctx context.Context, a live.Call) {
	ctx, cancel := context.WithTimeout(ctx, callWithin)
	defer cancel()
	cmd := exec.CommandContext(ctx, c.words[0], c.words[1:]...)
	cmd.Env = append(os.Environ(), "BARLINE_ALARM="+a.Alarm, "BARLINE_CAUSE="+a.Cause, "BARLINE_ACTION="+a.Action)
	if out, err := cmd.CombinedOutput(); err != nil {
		fmt.Fprintf(c.stderr, "barline: on_alarm command %q: %v: %.200s\n", c.words[0], err, out)
	}
}
