package main

import (
	"errors"
	"fmt"
	"strconv"
	"strings"

	"barline/model/bench"
)

// draft is a bench file under way: tables in the order of the file, each with
// its keys as they will be written.
type draft struct {
	tables []draftTable
}

type draftTable struct {
	header string // such as [fibre] or [[instrument]]
	path   string // such as fibre or instrument[0], as mistakes name it
	lines  []draftLine
}

type draftLine struct{ key, value string }

// table begins a table; what is set next goes into it.
func (d *draft) table(header, path string) {
	d.tables = append(d.tables, draftTable{header: header, path: path})
}

// set writes a value, in TOML, under a key of the last table.
func (d *draft) set(key, value string) {
	t := &d.tables[len(d.tables)-1]
	for i := range t.lines {
		if t.lines[i].key == key {
			t.lines[i].value = value
			return
		}
	}
	t.lines = append(t.lines, draftLine{key, value})
}

// drop takes the key of the last table away again.
func (d *draft) drop(key string) {
	t := &d.tables[len(d.tables)-1]
	for i := range t.lines {
		if t.lines[i].key == key {
			t.lines = append(t.lines[:i], t.lines[i+1:]...)
			return
		}
	}
}

// file returns the file as it is to be written.
func (d *draft) file() []byte {
	var b strings.Builder
	for i, t := range d.tables {
		if i > 0 {
			b.WriteByte('\n')
		}
		fmt.Fprintf(&b, "%s\n", t.header)
		for _, l := range t.lines {
			fmt.Fprintf(&b, "%s = %s\n", l.key, l.value)
		}
	}
	return []byte(b.String())
}

// wrong returns what the checker of bench files says of a key of the last
// table; empty where it says nothing.
func (d *draft) wrong(key string) string {
	path := d.tables[len(d.tables)-1].path + "." + key
	for _, m := range d.mistakes("bench.toml") {
		if m.Key == path || strings.HasPrefix(m.Key, path+"[") {
			return m.Text
		}
	}
	return ""
}

func (d *draft) mistakes(name string) bench.Mistakes {
	_, err := bench.Parse(d.file(), name)
	var list bench.Mistakes
	errors.As(err, &list)
	return list
}

// quoted writes a text, tomlList several texts, in TOML. The backslashes of a
// basic string are those of Go but for \x, \a and \v, which no key press makes.
func quoted(text string) string { return strconv.Quote(text) }

func tomlList(texts ...string) string {
	for i := range texts {
		texts[i] = quoted(texts[i])
	}
	return "[" + strings.Join(texts, ", ") + "]"
}

// bare writes a number or a truth as it stands.
func bare(text string) string { return text }
