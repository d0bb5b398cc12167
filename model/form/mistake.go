package form

import (
	"fmt"
	"sort"
	"strings"
)

// Mistake is one thing wrong with a file.
type Mistake struct {
	File   string
	Line   int    // from 1; 0 where it is about the whole file
	Column int    // from 1, in characters
	Key    string // such as limits.cells; empty where it is about the syntax
	Text   string // the whole message without its place
}

// Error writes the mistake behind its place, as editors understand it.
func (m Mistake) Error() string {
	if m.Line == 0 {
		return fmt.Sprintf("%s: %s", m.File, m.Text)
	}
	return fmt.Sprintf("%s:%d:%d: %s", m.File, m.Line, m.Column, m.Text)
}

// Mistakes is all that is wrong with a file, in the order of the file.
type Mistakes []Mistake

// Error writes one mistake a line.
func (m Mistakes) Error() string {
	lines := make([]string, len(m))
	for i, one := range m {
		lines[i] = one.Error()
	}
	return strings.Join(lines, "\n")
}

// Unwrap returns the single mistakes.
func (m Mistakes) Unwrap() []error {
	errs := make([]error, len(m))
	for i, one := range m {
		errs[i] = one
	}
	return errs
}

func (m Mistakes) sort() {
	sort.SliceStable(m, func(i, j int) bool {
		if m[i].Line != m[j].Line {
			return m[i].Line < m[j].Line
		}
		if m[i].Column != m[j].Column {
			return m[i].Column < m[j].Column
		}
		return m[i].Text < m[j].Text
	})
}
