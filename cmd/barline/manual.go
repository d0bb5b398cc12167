package main

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"runtime/debug"
	"strings"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"
)

// newManual makes the hidden command that a release runs: man pages and shell
// completions, both from the command tree.
func newManual() *cobra.Command {
	return &cobra.Command{
		Use:    "manual DIR",
		Short:  "Write man pages and shell completions",
		Hidden: true,
		Args:   oneArg("a folder"),
		RunE: func(cmd *cobra.Command, args []string) error {
			return writeManual(cmd.Root(), args[0])
		},
	}
}

// writeManual writes man1/*.1 and completions/* under dir.
func writeManual(root *cobra.Command, dir string) error {
	pages, shells := filepath.Join(dir, "man1"), filepath.Join(dir, "completions")
	if err := errors.Join(os.MkdirAll(pages, 0o755), os.MkdirAll(shells, 0o755)); err != nil {
		return fmt.Errorf("manual: %w", err)
	}
	version := "(unversioned)"
	if info, ok := debug.ReadBuildInfo(); ok {
		version = describe(info).Version
	}
	for _, cmd := range described(root) {
		name := strings.ReplaceAll(cmd.CommandPath(), " ", "-") + ".1"
		err := writeFile(filepath.Join(pages, name), func(w io.Writer) error { return manPage(w, cmd, version) })
		if err != nil {
			return err
		}
	}
	return errors.Join(
		writeFile(filepath.Join(shells, "barline.bash"), func(w io.Writer) error { return root.GenBashCompletionV2(w, true) }),
		writeFile(filepath.Join(shells, "_barline"), root.GenZshCompletion),
		writeFile(filepath.Join(shells, "barline.fish"), func(w io.Writer) error { return root.GenFishCompletion(w, true) }),
		writeFile(filepath.Join(shells, "barline.ps1"), root.GenPowerShellCompletionWithDesc),
	)
}

// described returns the commands that have a page: all that a person sees.
func described(root *cobra.Command) []*cobra.Command {
	list := []*cobra.Command{root}
	for _, cmd := range root.Commands() {
		if cmd.IsAvailableCommand() && cmd.Name() != "completion" && cmd.Name() != "help" {
			list = append(list, described(cmd)...)
		}
	}
	return list
}

func writeFile(path string, write func(io.Writer) error) error {
	file, err := os.Create(path)
	if err != nil {
		return fmt.Errorf("manual: %w", err)
	}
	out := bufio.NewWriter(file)
	return errors.Join(write(out), out.Flush(), file.Close())
}

// manPage writes the page of one command in the man macros of roff. It carries
// no date: the same tree gives the same bytes.
func manPage(w io.Writer, cmd *cobra.Command, version string) error {
	path := cmd.CommandPath()
	out := &roff{w: w}
	out.line(".TH %s 1 \"\" %s %s", escaped(strings.ToUpper(strings.ReplaceAll(path, " ", "-"))), argument("barline "+version), argument("barline"))
	out.line(".SH NAME")
	out.line("%s \\- %s", escaped(strings.ReplaceAll(path, " ", "-")), escaped(cmd.Short))
	out.line(".SH SYNOPSIS")
	if cmd.Runnable() {
		out.line(".B %s", escaped(cmd.UseLine()))
	} else {
		out.line(".B %s", escaped(path+" COMMAND"))
	}
	if cmd.Long != "" {
		out.line(".SH DESCRIPTION")
		out.text(cmd.Long)
	}
	if list := children(cmd); len(list) > 0 {
		out.line(".SH COMMANDS")
		for _, c := range list {
			out.line(".TP")
			out.line(".B %s", escaped(c.Name()))
			out.line("%s", escaped(c.Short))
		}
	}
	out.flags(cmd)
	out.line(".SH EXIT STATUS")
	for _, e := range [...]struct {
		code int
		text string
	}{
		{exitDone, "done; also after Ctrl-C"}, {exitFailed, "failed, or refused by physics"},
		{exitUsage, "wrong use: flags, bench file, procedure"}, {exitStopped, "stopped by an alarm or an interlock"},
	} {
		out.line(".TP")
		out.line(".B %d", e.code)
		out.line("%s", escaped(e.text))
	}
	out.line(".SH CAUTIONS")
	out.text("barline is no safety device. Pressure ratings, relief valve and hardware interlocks come first, and it replaces none of them. Follow your local codes and the people licensed to apply them.")
	if cmd.HasParent() {
		out.line(".SH SEE ALSO")
		out.line(".BR %s (1)", escaped(strings.ReplaceAll(cmd.Parent().CommandPath(), " ", "-")))
	}
	return out.err
}

func children(cmd *cobra.Command) []*cobra.Command {
	var list []*cobra.Command
	for _, c := range cmd.Commands() {
		if c.IsAvailableCommand() && c.Name() != "completion" && c.Name() != "help" {
			list = append(list, c)
		}
	}
	return list
}

// roff writes lines and keeps the first error.
type roff struct {
	w   io.Writer
	err error
}

func (r *roff) line(format string, args ...any) {
	if r.err == nil {
		_, r.err = fmt.Fprintf(r.w, format+"\n", args...)
	}
}

// text writes paragraphs; indented ones keep their lines.
func (r *roff) text(text string) {
	for _, paragraph := range strings.Split(strings.TrimSpace(text), "\n\n") {
		r.line(".PP")
		if strings.HasPrefix(paragraph, "    ") {
			r.line(".EX")
			for _, l := range strings.Split(paragraph, "\n") {
				r.line("%s", escaped(l))
			}
			r.line(".EE")
			continue
		}
		r.line("%s", escaped(paragraph))
	}
}

func (r *roff) flags(cmd *cobra.Command) {
	first := true
	cmd.NonInheritedFlags().VisitAll(func(f *pflag.Flag) {
		if f.Hidden || f.Name == "help" {
			return
		}
		if first {
			r.line(".SH OPTIONS")
			first = false
		}
		name := "--" + f.Name
		if f.Shorthand != "" {
			name = "-" + f.Shorthand + ", " + name
		}
		value, usage := pflag.UnquoteUsage(f)
		r.line(".TP")
		if value == "" {
			r.line(".B %s", escaped(name))
		} else {
			r.line("\\fB%s\\fR \\fI%s\\fR", escaped(name), escaped(value))
		}
		if d := f.DefValue; d != "" && d != "false" && d != "0" && d != "[]" {
			usage += " (default " + d + ")"
		}
		r.line("%s", escaped(usage))
	})
}

// escaped makes a text safe at the start of a line and inside it.
func escaped(text string) string {
	text = strings.NewReplacer(`\`, `\e`, "-", `\-`).Replace(text)
	lines := strings.Split(text, "\n")
	for i, l := range lines {
		if strings.HasPrefix(l, ".") || strings.HasPrefix(l, "'") {
			lines[i] = `\&` + l
		}
	}
	return strings.Join(lines, "\n")
}

// argument quotes an argument of a macro.
func argument(text string) string {
	return `"` + strings.ReplaceAll(escaped(text), `"`, `""`) + `"`
}
