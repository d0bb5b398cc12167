package bench

import (
	"errors"
	"fmt"
	"strings"

	"github.com/pelletier/go-toml/v2"

	"barline/model/form"
)

// Joined is a bench file with the files that it includes behind it: one text
// that stands by itself, as the record keeps it.
type Joined struct {
	Text  []byte
	parts []part
}

// part is where a file begins in the joined text.
type part struct {
	name string
	line int // of the text, from 1
}

// instrumentFile is what an included file may hold.
type instrumentFile struct {
	Instrument []Instrument `toml:"instrument"`
}

// Join appends the files that a bench file names under include, which is one
// line at its head such as
//
//	include = ["gauges.toml", "spectrometer.toml"]
//
// Each of them holds [[instrument]] sections and nothing else. The line becomes
// a comment, and no line of the bench file moves. Read returns the text of a
// file under the name that the bench file gives it. An error is of type
// Mistakes.
func Join(text []byte, name string, read func(file string) ([]byte, error)) (Joined, error) {
	j := Joined{Text: text, parts: []part{{name, 1}}}
	var head struct {
		Include []string `toml:"include"`
	}
	lines := strings.SplitAfter(string(text), "\n")
	at := includeLine(lines)
	if at < 0 {
		return j, nil
	}
	wrong := func(format string, args ...any) (Joined, error) {
		return j, Mistakes{{File: name, Line: at + 1, Column: 1, Key: "include", Text: "include: " + fmt.Sprintf(format, args...)}}
	}
	if err := toml.Unmarshal([]byte(lines[at]), &head); err != nil {
		return wrong("expected one line such as include = [\"gauges.toml\"]")
	}
	lines[at] = "# " + lines[at]
	all := strings.Join(lines, "")
	seen := map[string]bool{}
	var found Mistakes
	for _, file := range head.Include {
		if seen[file] {
			return wrong("%q stands there twice", file)
		}
		seen[file] = true
		more, err := read(file)
		if err != nil {
			return wrong("%v", err)
		}
		found = append(found, alone(more, file)...)
		if all != "" && !strings.HasSuffix(all, "\n") {
			all += "\n"
		}
		j.parts = append(j.parts, part{file, strings.Count(all, "\n") + 1})
		all += string(more)
	}
	if len(found) > 0 {
		return j, found
	}
	j.Text = []byte(all)
	return j, nil
}

// includeLine returns the place of the line before the first section that
// begins with the key include, or -1.
func includeLine(lines []string) int {
	for i, line := range lines {
		line = strings.TrimSpace(line)
		if strings.HasPrefix(line, "[") {
			return -1
		}
		if rest, ok := strings.CutPrefix(line, "include"); ok && strings.HasPrefix(strings.TrimSpace(rest), "=") {
			return i
		}
	}
	return -1
}

// alone returns what is wrong with an included file by itself: its syntax, and
// what does not belong into it. All else shows when it is joined.
func alone(text []byte, file string) (found Mistakes) {
	var only instrumentFile
	r, sound := form.Form{Noun: "file of instruments"}.Read(text, file, &only)
	var all Mistakes
	if !errors.As(r.Err(), &all) {
		return nil
	}
	for _, m := range all {
		if section, _, _ := strings.Cut(m.Key, "."); !sound || section != "instrument" {
			found = append(found, m)
		}
	}
	return found
}

// Parse reads the joined text as Parse does. Mistakes are named with the file
// that they are in and its own lines.
func (j Joined) Parse() (*Bench, error) {
	b, err := Parse(j.Text, j.parts[0].name)
	var found Mistakes
	if !errors.As(err, &found) {
		return b, err
	}
	for i := range found {
		for _, p := range j.parts[1:] {
			if found[i].Line >= p.line {
				found[i].File = p.name
			}
		}
		for _, p := range j.parts {
			if p.name == found[i].File && found[i].Line >= p.line {
				found[i].Line -= p.line - 1
				break
			}
		}
	}
	return nil, found
}
