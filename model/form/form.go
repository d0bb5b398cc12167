package form

import (
	"errors"
	"fmt"
	"reflect"

	"barline/model/unit"
)

// Form says what a file is about.
type Form struct {
	Noun string // such as "bench file", for messages
	// Ambient is the air pressure that gauge pressures count from. Where it
	// is zero, AmbientKey names the key of the file that gives it; without
	// either, gauge pressures are refused.
	Ambient    unit.Pascal
	AmbientKey [2]string
}

// Read fills the struct that into points to from data. Name is the file's
// name for messages. The report holds what was wrong, and takes what the
// caller finds wrong between keys; sound is false where not even the syntax
// held, and nothing was filled in.
func (f Form) Read(data []byte, name string, into any) (r *Report, sound bool) {
	v := reflect.ValueOf(into).Elem()
	r = &Report{file: name, noun: f.Noun, root: v.Type(), nodes: map[string]*node{}}
	root := r.syntax(data)
	if root == nil {
		return r, false
	}
	d := &decoder{Report: r, ambient: f.Ambient, ambientGiven: f.Ambient > 0}
	if n := root.find(f.AmbientKey[0], f.AmbientKey[1]); !d.ambientGiven && n != nil && n.shape == isText {
		ambient, err := unit.ParsePressure(n.text)
		d.ambient, d.ambientGiven = ambient, err == nil
	}
	d.section(root, v, "")
	return r, true
}

// CheckTags reports the tags of the struct that into points to which cannot be
// read as a value of their field, or whose default breaks its own rule. It is
// for the tests of those who define such structs.
func CheckTags(into any) error {
	var errs []error
	var walk func(reflect.Type)
	walk = func(kind reflect.Type) {
		for i := range kind.NumField() {
			f := kind.Field(i)
			if f.Type.Kind() == reflect.Struct {
				walk(f.Type)
			} else if f.Type.Kind() == reflect.Slice && f.Type.Elem().Kind() == reflect.Struct {
				walk(f.Type.Elem())
			}
			r, d := parseRules(f.Tag.Get("form")), decoder{}
			for _, text := range []string{r.preset, r.above, r.least, r.most} {
				if text == "" {
					continue
				}
				if err := d.scalar(text, reflect.New(f.Type).Elem()); err != nil {
					errs = append(errs, fmt.Errorf("%s.%s: %q: %w", kind.Name(), f.Name, text, err))
				}
			}
			if v := reflect.New(f.Type).Elem(); r.preset != "" {
				if err := d.scalar(r.preset, v); err != nil || r.check(v) != "" {
					errs = append(errs, fmt.Errorf("%s.%s: default %q breaks its own rule: %v %s", kind.Name(), f.Name, r.preset, err, r.check(v)))
				}
			}
		}
	}
	walk(reflect.TypeOf(into).Elem())
	return errors.Join(errs...)
}
