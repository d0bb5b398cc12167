package form

import (
	"encoding"
	"reflect"
	"strings"
)

// Key is one key that a form takes.
type Key struct {
	Section  string // such as [fibre] or [[instrument.channel]]
	Name     string
	Path     string // such as instrument.channel.role
	Takes    string // what its value looks like: a quantity with its unit, words, a number
	Required bool
	Default  string // as a person would write it; empty: none
	Least    string // bounds, empty where there is none
	Above    string
	Most     string
}

// worded is a type that has a fixed set of words.
type worded interface{ Words() []string }

// Keys lists every key of the struct that into points to, in the order of its
// fields: what the reference of a file is made from.
func Keys(into any) []Key {
	var list []Key
	var walk func(t reflect.Type, section, path string)
	walk = func(t reflect.Type, section, path string) {
		for i := range t.NumField() {
			f := t.Field(i)
			key := f.Tag.Get("toml")
			if key == "" {
				continue
			}
			at := join(path, key)
			kind := f.Type
			many := kind.Kind() == reflect.Slice && kind.Elem().Kind() == reflect.Struct
			switch {
			case many:
				walk(kind.Elem(), "[["+at+"]]", at)
				continue
			case isSection(kind):
				walk(kind, "["+at+"]", at)
				continue
			}
			r := parseRules(f.Tag.Get("form"))
			list = append(list, Key{
				Section: section, Name: key, Path: at, Takes: takes(kind, r), Required: r.required,
				Default: r.preset, Least: r.least, Above: r.above, Most: r.most,
			})
		}
	}
	walk(reflect.TypeOf(into).Elem(), "", "")
	return list
}

// takes says what a value looks like.
func takes(t reflect.Type, r rules) string {
	if r.oneof != nil {
		return strings.Join(r.oneof, ", ")
	}
	v := reflect.New(t).Interface()
	if w, ok := v.(worded); ok {
		return strings.Join(w.Words(), ", ")
	}
	if u, ok := v.(encoding.TextUnmarshaler); ok {
		return quantity(Reason(u.UnmarshalText([]byte("1"))))
	}
	switch t.Kind() {
	case reflect.Bool:
		return "true or false"
	case reflect.Int:
		return "whole number"
	case reflect.Float64:
		return "number"
	case reflect.Slice:
		return "list of texts"
	}
	return "text"
}

// quantity turns what is said of a number without a unit, such as
//
//	it has no unit; expected a length such as "1 um" (m, cm, mm, um, nm)
//
// into "length in m, cm, mm, um, nm".
func quantity(reason string) string {
	_, rest, _ := strings.Cut(reason, "expected a ")
	noun, units, ok := strings.Cut(rest, " such as ")
	_, units, listed := strings.Cut(units, " (")
	if !ok || !listed {
		return reason
	}
	return noun + " in " + strings.TrimSuffix(units, ")")
}
