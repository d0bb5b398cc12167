package procedure

import (
	"errors"
	"fmt"
	"slices"
	"strings"

	"barline/model/form"
	"barline/model/unit"
)

// ParseLine reads a procedure as a person types it into one line: steps parted
// by semicolons, each a verb and its keys as in a procedure file, their values
// without quotes:
//
//	purge cycles 3, low 50 mbar, high 3 bar; fill to 9 bar; leak test for 10 min
//
// It is checked as a file is. Gauge pressures count from ambient.
func ParseLine(text string, ambient unit.Pascal) (*Procedure, error) {
	var names []string
	file := "[procedure]\nname = \"typed\"\n"
	for i, step := range strings.Split(text, ";") {
		step = strings.TrimSpace(step)
		if step == "" {
			continue
		}
		name, lines, err := stepLines(step)
		if err != nil {
			return nil, fmt.Errorf("step %d: %w", i+1, err)
		}
		names = append(names, name)
		file += lines
	}
	p, err := Parse([]byte(file), "typed", ambient)
	var mistakes form.Mistakes
	if errors.As(err, &mistakes) && len(mistakes) > 0 {
		// Lines and columns of the file that it was turned into say nothing.
		return nil, errors.New(strings.TrimPrefix(mistakes[0].Text, "step."))
	}
	if err != nil {
		return nil, err
	}
	p.Procedure.Name = strings.Join(slices.Compact(names), ", ")
	return p, nil
}

// stepLines turns one typed step into the lines of a file.
func stepLines(step string) (name, lines string, err error) {
	for v := range verbs {
		if rest, ok := strings.CutPrefix(step, v); ok && (rest == "" || rest[0] == ' ') {
			name, step = v, rest
			break
		}
	}
	if name == "" {
		var known []string
		for v := range verbs {
			known = append(known, v)
		}
		slices.Sort(known)
		return "", "", fmt.Errorf("%q: expected it to begin with %s", step, form.Enumerate(known, "or"))
	}
	lines = fmt.Sprintf("[[step]]\ndo = %q\n", name)
	for _, item := range strings.Split(step, ",") {
		item = strings.TrimSpace(item)
		if item == "" {
			continue
		}
		key, value := splitKey(item)
		switch {
		case key == "":
			return "", "", fmt.Errorf("%q: %s takes %s", item, name, takes(name))
		case value == "":
			return "", "", fmt.Errorf("%q: a value is missing", item)
		case key == "pressures" || key == "energies":
			return "", "", fmt.Errorf("a list of %s needs a procedure file", key)
		case key == "cycles" || key == "seed": // whole numbers
			if strings.Trim(value, "0123456789") != "" {
				return "", "", fmt.Errorf("%s %q: expected a whole number", key, value)
			}
			lines += fmt.Sprintf("%s = %s\n", key, value)
		default:
			lines += fmt.Sprintf("%s = %q\n", key, value)
		}
	}
	return name, lines, nil
}

// takes names the keys of a verb as they are typed, those it needs first.
func takes(name string) string {
	v := verbs[name]
	list := append(slices.Clone(v.needs), v.may...)
	for i := range list {
		list[i] = strings.ReplaceAll(list[i], "_", " ")
	}
	return form.Enumerate(list, "and")
}

// splitKey parts the longest key that an item begins with from its value; key
// is empty where it begins with none.
func splitKey(item string) (key, value string) {
	for _, k := range keys {
		typed := strings.ReplaceAll(k, "_", " ")
		rest, ok := strings.CutPrefix(item, typed)
		if ok && (rest == "" || rest[0] == ' ') && len(k) > len(key) {
			key, value = k, strings.TrimSpace(rest)
		}
	}
	return key, value
}
