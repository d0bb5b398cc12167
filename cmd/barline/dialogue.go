package main

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
	"unicode"
)

// errLeft is returned where the answers end before the questions do.
var errLeft = errors.New("the questions were left: nothing was written")

// dialogue asks one question after another.
type dialogue struct {
	in  *bufio.Reader
	out io.Writer
	err error // the first; nothing is asked after it
}

// ask prints a question and returns the answer, or what stands in brackets
// where the answer is empty. It asks again until check, which may be nil, says
// nothing.
func (d *dialogue) ask(question, preset string, check func(string) string) string {
	for d.err == nil {
		fmt.Fprint(d.out, question)
		if preset != "" {
			fmt.Fprintf(d.out, " [%s]", preset)
		}
		fmt.Fprint(d.out, ": ")
		line, err := d.in.ReadString('\n')
		if err != nil && strings.TrimSpace(line) == "" {
			d.err = errLeft
			if !errors.Is(err, io.EOF) {
				d.err = fmt.Errorf("reading the answer: %w", err)
			}
			return ""
		}
		answer := strings.TrimSpace(line)
		if answer == "" {
			answer = preset
		}
		if strings.ContainsFunc(answer, unicode.IsControl) {
			fmt.Fprintln(d.out, "  the answer holds a key that is no letter; please type it again")
			continue
		}
		if check != nil {
			if wrong := check(answer); wrong != "" {
				fmt.Fprintln(d.out, "  "+wrong)
				continue
			}
		}
		return answer
	}
	return ""
}

// choose asks for one of a few words.
func (d *dialogue) choose(question, preset string, words ...string) string {
	return d.ask(question+" ("+strings.Join(words, ", ")+")", preset, func(answer string) string {
		if slices.Contains(words, answer) {
			return ""
		}
		return fmt.Sprintf("%q: expected one of %s", answer, strings.Join(words, ", "))
	})
}

// yes asks whether.
func (d *dialogue) yes(question string, preset bool) bool {
	word := "no"
	if preset {
		word = "yes"
	}
	return d.choose(question, word, "yes", "no") == "yes"
}

// say prints a line, where the dialogue still goes on.
func (d *dialogue) say(format string, args ...any) {
	if d.err == nil {
		fmt.Fprintf(d.out, format+"\n", args...)
	}
}
