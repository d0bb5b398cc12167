package form

import (
	"encoding"
	"fmt"
	"reflect"
	"slices"
	"strconv"
	"strings"
)

// rules are what holds for one key alone, from its tag.
type rules struct {
	required bool
	gauge    bool
	preset   string
	oneof    []string
	above    string
	least    string
	most     string
}

func parseRules(tag string) rules {
	var r rules
	for _, rule := range strings.Split(tag, ";") {
		name, value, _ := strings.Cut(strings.TrimSpace(rule), "=")
		switch name {
		case "required":
			r.required = true
		case "gauge":
			r.gauge = true
		case "default":
			r.preset = value
		case "oneof":
			r.oneof = strings.Split(value, "|")
		case "above":
			r.above = value
		case "least":
			r.least = value
		case "most":
			r.most = value
		}
	}
	return r
}

// check says why the value breaks the rules, or "".
func (r rules) check(v reflect.Value) string {
	switch {
	case r.oneof != nil && !slices.Contains(r.oneof, v.String()):
		return ExpectOne(r.oneof, v.String())
	case r.above != "" && !(number(v) > bound(r.above, v)):
		return "expected more than " + r.above
	case r.least != "" && !(number(v) >= bound(r.least, v)):
		return "expected " + r.least + " or more"
	case r.most != "" && !(number(v) <= bound(r.most, v)):
		return "expected " + r.most + " or less"
	case r.required && v.Kind() == reflect.String && strings.TrimSpace(v.String()) == "":
		return "it is empty"
	}
	return ""
}

// expected says what a missing value should have been.
func (r rules) expected(v reflect.Value) string {
	if r.oneof != nil {
		return "expected " + Enumerate(r.oneof, "or")
	}
	if u, ok := v.Addr().Interface().(encoding.TextUnmarshaler); ok {
		return Reason(u.UnmarshalText(nil))
	}
	return "it has no default"
}

func number(v reflect.Value) float64 {
	if v.Kind() == reflect.Int {
		return float64(v.Int())
	}
	return v.Float()
}

// bound reads the bound of a rule as a value of the same type as v.
func bound(text string, v reflect.Value) float64 {
	b := reflect.New(v.Type())
	if u, ok := b.Interface().(encoding.TextUnmarshaler); ok {
		_ = u.UnmarshalText([]byte(text)) // every tag is tried by a test
		return b.Elem().Float()
	}
	f, _ := strconv.ParseFloat(text, 64)
	return f
}

func ExpectOne(allowed []string, got string) string {
	text := "expected " + Enumerate(allowed, "or")
	if near := Nearest(got, allowed); near != "" {
		text += fmt.Sprintf("; did you mean %q?", near)
	}
	return text
}
