package bench

import (
	"fmt"
	"slices"
	"strings"

	"barline/model/form"
)

// patternFields returns the names in braces of the pattern of a lines
// instrument, in order: {name} is a number, {name...} a list of numbers, {_} a
// word passed over, and a brace itself is written twice. Between two fields
// there must be text, or nothing would say where the first one ends.
func patternFields(pattern string) ([]string, error) {
	var names []string
	last, lists := "", 0 // the field that the text before ends with
	for rest := pattern; rest != ""; {
		switch {
		case strings.HasPrefix(rest, "{{") || strings.HasPrefix(rest, "}}"):
			rest, last = rest[2:], ""
			continue
		case rest[0] == '}':
			return nil, fmt.Errorf("a } has no { before it")
		case rest[0] != '{':
			rest, last = rest[1:], ""
			continue
		}
		if last != "" {
			return nil, fmt.Errorf("nothing stands between {%s} and the next field", last)
		}
		field, after, closed := strings.Cut(rest[1:], "}")
		if !closed {
			return nil, fmt.Errorf("{%s has no }", form.Clip(field))
		}
		name, isList := strings.CutSuffix(field, "...")
		if !isFieldName(name) || name == "_" && isList {
			return nil, fmt.Errorf("field {%s}: expected a name of letters, digits, - and _", form.Clip(field))
		}
		if isList {
			lists++
		}
		if lists > 1 {
			return nil, fmt.Errorf("field {%s}: a second list; expected one at most", form.Clip(field))
		}
		if slices.Contains(names, name) {
			return nil, fmt.Errorf("field {%s} stands there twice", name)
		}
		if name != "_" {
			names = append(names, name)
		}
		rest, last = after, field
	}
	if len(names) == 0 {
		return nil, fmt.Errorf("expected at least one field in braces, such as \"P {pressure} bar\"")
	}
	return names, nil
}

func isFieldName(name string) bool {
	return name != "" && !strings.ContainsFunc(name, func(c rune) bool {
		return (c < 'a' || c > 'z') && (c < 'A' || c > 'Z') && (c < '0' || c > '9') && c != '_' && c != '-'
	})
}
