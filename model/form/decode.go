package form

import (
	"encoding"
	"errors"
	"fmt"
	"reflect"
	"slices"
	"strconv"
	"strings"

	"barline/model/unit"
)

// decoder fills structs from a tree and collects what does not fit.
type decoder struct {
	*Report
	ambient      unit.Pascal
	ambientGiven bool
}

// field is a key of a struct.
type field struct {
	index int
	key   string
	rules rules
}

// fieldsOf returns the keys of a struct in the order of its fields.
func fieldsOf(t reflect.Type) []field {
	var fs []field
	for i := range t.NumField() {
		if key := t.Field(i).Tag.Get("toml"); key != "" {
			fs = append(fs, field{i, key, parseRules(t.Field(i).Tag.Get("form"))})
		}
	}
	return fs
}

func keysOf(t reflect.Type) []string {
	var keys []string
	for _, f := range fieldsOf(t) {
		keys = append(keys, f.key)
	}
	return keys
}

// section fills the struct v from the table n, which is nil where the file
// has no such section: then only defaults are filled in.
func (d *decoder) section(n *node, v reflect.Value, path string) {
	fs := fieldsOf(v.Type())
	var meant []string // keys that are there, mistyped
	if n != nil {
		for _, key := range n.keys {
			if !slices.ContainsFunc(fs, func(f field) bool { return f.key == key }) {
				meant = append(meant, d.unknown(join(path, key), key, n.table[key], keysOf(v.Type())))
			}
		}
	}
	for _, f := range fs {
		quiet := n == nil && path != "" || slices.Contains(meant, f.key)
		d.field(n.find(f.key), v.Field(f.index), f, join(path, f.key), quiet)
	}
}

// field fills one field; quiet suppresses complaints about what is missing,
// because the whole section is or the key was mistyped.
func (d *decoder) field(n *node, v reflect.Value, f field, path string, quiet bool) {
	if n != nil {
		d.nodes[path] = n
	}
	switch kind := v.Type(); {
	case isSection(kind):
		if n != nil && n.shape != isTable {
			d.Wrong(path, "expected a section, written as [%s]", f.key)
			return
		}
		if need := requiredKeys(kind); n == nil && len(need) > 0 && !quiet {
			d.Whole("[%s] is missing; it needs %s", path, Enumerate(need, "and"))
		}
		d.section(n, v, path)
	case kind.Kind() == reflect.Slice && isSection(kind.Elem()):
		d.sections(n, v, path)
	case n == nil && f.rules.preset != "":
		// A default that does not parse is caught by a test of this package.
		_ = d.scalar(f.rules.preset, v)
	case n == nil && f.rules.required && !quiet:
		d.Missing(path, "%s", f.rules.expected(v))
	case n == nil:
	case kind.Kind() == reflect.Slice:
		d.texts(n, v, path)
	default:
		d.value(n, v, f.rules, path)
	}
}

// sections fills a slice of structs from a list of tables.
func (d *decoder) sections(n *node, v reflect.Value, path string) {
	if n == nil {
		return
	}
	if n.shape != isList {
		d.Wrong(path, "expected sections, each written as [[%s]]", display(path))
		return
	}
	for i, item := range n.items {
		at := fmt.Sprintf("%s[%d]", path, i)
		d.nodes[at] = item
		element := reflect.New(v.Type().Elem()).Elem()
		if item.shape != isTable {
			d.Wrong(at, "expected a section")
		} else {
			d.section(item, element, at)
		}
		v.Set(reflect.Append(v, element))
	}
}

// texts fills a slice of strings.
func (d *decoder) texts(n *node, v reflect.Value, path string) {
	if n.shape != isList {
		d.Wrong(path, `expected a list of texts such as ["first", "second"]`)
		return
	}
	for i, item := range n.items {
		at := fmt.Sprintf("%s[%d]", path, i)
		d.nodes[at] = item
		if item.shape != isText {
			d.Wrong(at, "expected text in quotes")
			continue
		}
		v.Set(reflect.Append(v, reflect.ValueOf(item.text)))
	}
}

// value fills a field that holds a single value and applies its rules.
func (d *decoder) value(n *node, v reflect.Value, r rules, path string) {
	if n.shape == isTable || n.shape == isList {
		d.Wrong(path, "expected one value, not %s", shapeText[n.shape])
		return
	}
	if reason := d.fits(n, v); reason != "" {
		d.Wrong(path, "%s", reason)
		return
	}
	if p, ok := v.Addr().Interface().(*unit.Pascal); ok && r.gauge && n.shape == isText && unit.IsGauge(n.text) {
		g, err := unit.ParseGauge(n.text)
		switch {
		case err != nil:
			d.Wrong(path, "%s", Reason(err))
			return
		case !d.ambientGiven:
			d.Wrong(path, "it is a gauge pressure; give panel.ambient, the air pressure that it counts from, or write it as absolute")
			return
		}
		*p = g.Absolute(d.ambient)
	} else if err := d.scalar(n.text, v); err != nil {
		d.Wrong(path, "%s", d.advice(err, v, n.text))
		return
	}
	if reason := r.check(v); reason != "" {
		d.Wrong(path, "%s", reason)
	}
}

// fits says why a value of this shape cannot fill v, or "".
func (d *decoder) fits(n *node, v reflect.Value) string {
	_, quantity := v.Addr().Interface().(encoding.TextUnmarshaler)
	switch {
	case quantity: // a number is sent on, to be told which unit it lacks
		return ""
	case v.Kind() == reflect.String && n.shape != isText:
		return "expected text in quotes"
	case v.Kind() == reflect.Int && n.shape != isWhole:
		return "expected a whole number without quotes"
	case !quantity && v.Kind() == reflect.Float64 && n.shape != isWhole && n.shape != isNumber:
		return "expected a number without quotes"
	case v.Kind() == reflect.Bool && n.shape != isTruth:
		return "expected true or false, without quotes"
	}
	return ""
}

// scalar sets v from text.
func (d *decoder) scalar(text string, v reflect.Value) error {
	if u, ok := v.Addr().Interface().(encoding.TextUnmarshaler); ok {
		return u.UnmarshalText([]byte(text))
	}
	switch v.Kind() {
	case reflect.Int:
		i, err := strconv.ParseInt(text, 0, 64)
		if err != nil {
			return errors.New("expected a whole number")
		}
		v.SetInt(i)
	case reflect.Float64:
		x, err := strconv.ParseFloat(text, 64)
		if err != nil {
			return errors.New("expected a number")
		}
		v.SetFloat(x)
	case reflect.Bool:
		v.SetBool(text == "true")
	default:
		v.SetString(text)
	}
	return nil
}

// advice words an error of scalar for the user.
func (d *decoder) advice(err error, v reflect.Value, text string) string {
	if w, ok := v.Interface().(interface{ Words() []string }); ok {
		return ExpectOne(w.Words(), text)
	}
	return Reason(err)
}

// Reason is the part of an error that does not repeat the value.
func Reason(err error) string {
	var e *unit.TextError
	if errors.As(err, &e) {
		return e.Reason
	}
	return err.Error()
}

func isSection(t reflect.Type) bool {
	return t.Kind() == reflect.Struct
}

func requiredKeys(t reflect.Type) []string {
	var need []string
	for _, f := range fieldsOf(t) {
		if f.rules.required {
			need = append(need, f.key)
		}
	}
	return need
}

func join(path, key string) string {
	if path == "" {
		return key
	}
	return path + "." + key
}

// Enumerate writes "a, b and c".
func Enumerate(words []string, last string) string {
	if len(words) < 2 {
		return strings.Join(words, "")
	}
	return strings.Join(words[:len(words)-1], ", ") + " " + last + " " + words[len(words)-1]
}
