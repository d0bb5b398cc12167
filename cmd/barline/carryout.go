package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"os/signal"
	"strings"
	"syscall"
	"time"

	"github.com/mattn/go-isatty"

	"barline/cmd/barline/loop"
	"barline/model/live"
	"barline/model/unit"
)

// consent shows the cautions of a program and waits for somebody to type arm.
// It returns those besides the arming itself.
func (f *runFlags) consent(s *session, p *live.Program, in *bufio.Reader, terminal bool) ([]live.Caution, error) {
	fmt.Fprintln(s.stderr, cautions)
	// Where the gas stands is not known yet: whatever may come is said.
	limits, ambient := s.bench.Limits, s.bench.Panel.Ambient
	shown := live.CautionsOf(p, 0, limits.CautionAbove, ambient)
	for _, c := range live.CautionsOf(p, unit.Pascal(math.MaxFloat64), limits.CautionAbove, ambient) {
		if c == live.Venting {
			shown = append(shown, c)
			break
		}
	}
	for _, c := range shown {
		fmt.Fprintf(s.stderr, "\nAt %v: %s\n", c, c.Text())
	}
	if f.arm {
		return shown, nil
	}
	if !terminal {
		return nil, usage("nobody is there to arm the bench: --arm says that the cautions have been read")
	}
	fmt.Fprint(s.stderr, "Type arm and press Enter to go on: ")
	if word, err := in.ReadString('\n'); err != nil || strings.TrimSpace(word) != "arm" {
		return nil, usage("not armed; nothing was moved")
	}
	return shown, nil
}

// errStoppedEarly is what a program ends in that was held or refused.
var errStoppedEarly = errors.New("the procedure was stopped")

// execution is a program that is carried out without a screen.
type execution struct {
	program *live.Program
	read    []live.Caution // acknowledged
	in      *bufio.Reader  // where somebody confirms what is asked for
	out     io.Writer
	bar     *bar
}

// carryOut runs the program and prints how it goes on, until it ends. When the
// shell goes away the bench is held and recording goes on until the program is
// told to end.
func (e *execution) carryOut(ctx context.Context, l *loop.Loop) error {
	hangup := make(chan os.Signal, 1)
	signal.Notify(hangup, syscall.SIGHUP)
	defer signal.Stop(hangup)
	shown, done := context.WithCancel(ctx)
	defer done()
	printed := make(chan error, 1)
	go func() { printed <- e.print(shown, l) }()
	for s := l.Snapshot(); !ready(s); s = l.Snapshot() {
		select {
		case <-ctx.Done():
			return nil
		case <-time.After(50 * time.Millisecond):
		}
	}
	l.Do(live.Arm{})
	for _, c := range e.read {
		l.Do(live.Understood{Caution: c})
	}
	l.Do(live.Run{Program: e.program})
	look := time.NewTicker(20 * time.Millisecond)
	defer look.Stop()
	defer e.bar.clear()
	confirmed := make(chan error, 1)
	asked := ""
	for began := false; ; {
		select {
		case <-hangup:
			done()
			l.Do(live.Hold{})
			l.Do(live.Note{Text: "the shell went away: held, recording goes on without a screen"})
			<-ctx.Done()
			return coded{exitStopped, fmt.Errorf("%w: the shell went away", errStoppedEarly)}
		case err := <-printed:
			select {
			case <-hangup: // the printing noticed first
				hangup <- syscall.SIGHUP
				continue
			default:
				return err
			}
		case err := <-confirmed:
			if err != nil {
				return fmt.Errorf("%w: it waits for somebody to %s, and nobody is there", errStoppedEarly, asked)
			}
			asked = ""
			l.Do(live.Confirm{})
			continue // what is asked for now is seen after the answer
		case <-look.C:
		}
		s := l.Snapshot()
		began = began || s.Program.Count > 0
		if p := s.Program; p.Count > 0 {
			e.bar.draw(float64(p.Index)/float64(p.Count), fmt.Sprintf("  step %d of %d, %s", p.Index+1, p.Count, waitText(p.Left)))
		}
		switch {
		case s.Outcome == live.Completed && began:
			return nil
		case s.Mode == live.Held && began:
			return coded{exitStopped, fmt.Errorf("%w: %s", errStoppedEarly, s.Why)}
		case !began && strings.HasPrefix(s.Notice, "refused"):
			return coded{exitStopped, fmt.Errorf("%w: %s", errStoppedEarly, s.Notice)}
		case s.Program.Asks != "" && asked == "":
			asked = s.Program.Asks
			e.bar.clear()
			fmt.Fprintf(e.out, "%s: press Enter when it is done\n", asked)
			go func() {
				_, err := e.in.ReadString('\n')
				confirmed <- err
			}()
		}
	}
}

// print prints lines: on a terminal what changes, beside the bar; else also
// where the bench stands every few seconds.
func (e *execution) print(ctx context.Context, l *loop.Loop) error {
	if e.bar.w == nil {
		return plain(e.out, plainEvery)(ctx, l)
	}
	return plain(behind{e.bar, e.out}, 1<<62)(ctx, l)
}

// behind takes the bar away before each line.
type behind struct {
	bar *bar
	out io.Writer
}

func (b behind) Write(p []byte) (int, error) {
	b.bar.clear()
	return b.out.Write(p)
}

// waitText says how long a program still takes.
func waitText(d time.Duration) string {
	if d < time.Minute {
		return fmt.Sprintf("%.0f s left", d.Seconds())
	}
	return fmt.Sprintf("%.0f min left", d.Minutes())
}

// somebody returns the reader of what a person types, and whether it is a
// terminal.
func somebody(in io.Reader) (*bufio.Reader, bool) {
	file, ok := in.(*os.File)
	return bufio.NewReader(in), ok && isatty.IsTerminal(file.Fd())
}
