package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strings"

	"github.com/spf13/cobra"
)

// Exit codes of every command.
const (
	exitDone    = 0 // done, also after Ctrl-C
	exitFailed  = 1 // failed, or refused by physics
	exitUsage   = 2 // wrong use: flags, configuration
	exitStopped = 3 // stopped by an alarm or an interlock
)

// coded is an error that knows the exit code it deserves.
type coded struct {
	code int
	err  error
}

func (c coded) Error() string { return c.err.Error() }
func (c coded) Unwrap() error { return c.err }

// usage marks err as wrong use of the program.
func usage(format string, args ...any) error { return coded{exitUsage, fmt.Errorf(format, args...)} }

// run carries out one command line and returns the exit code. Results go to
// stdout, everything else to stderr.
func run(ctx context.Context, args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	root := newRoot()
	root.SetArgs(args)
	root.SetIn(stdin)
	root.SetOut(stdout)
	root.SetErr(stderr)
	err := root.ExecuteContext(ctx)
	if err == nil {
		return exitDone
	}
	if ctx.Err() != nil && errors.Is(err, context.Canceled) { // somebody asked for it
		fmt.Fprintln(stderr, "barline: stopped")
		return exitDone
	}
	fmt.Fprintln(stderr, "barline:", err)
	var c coded
	if errors.As(err, &c) {
		return c.code
	}
	if strings.HasPrefix(err.Error(), "unknown command") { // the library has no type for it
		return exitUsage
	}
	return exitFailed
}

// noArgs refuses arguments of a command that takes only flags.
func noArgs(cmd *cobra.Command, args []string) error {
	if len(args) > 0 {
		return usage("%s takes no argument, got %q; see barline %s -h", cmd.Name(), args[0], cmd.Name())
	}
	return nil
}

// oneArg wants exactly one argument.
func oneArg(what string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) != 1 {
			return usage("%s takes %s, got %d arguments; see barline %s -h", cmd.Name(), what, len(args), cmd.Name())
		}
		return nil
	}
}

func newRoot() *cobra.Command {
	root := &cobra.Command{
		Use:           "barline",
		Short:         "Dashboard beside the gas-pressure controller of a hollow-core-fibre ultraviolet source",
		SilenceErrors: true,
		SilenceUsage:  true,
	}
	root.SetFlagErrorFunc(func(cmd *cobra.Command, err error) error {
		return usage("%w; see barline %s -h", err, cmd.Name())
	})
	root.AddCommand(
		newCheck(),
		newDrift(),
		newFit(),
		newLog(),
		newManual(),
		newPlan(),
		newPorts(),
		newPredict(),
		newPropagate(),
		newReplay(),
		newRun(),
		newScan(),
		newSimulate(),
		newVersion(),
		newWatch(),
	)
	return root
}
