package bench

import (
	"fmt"
	"slices"
	"strings"
)

// patternFields returns the names in braces of the pattern of a lines
// instrument, in order. Between two fields there must be text, or nothing
// would say where the first one ends.
func patternFields(pattern string) ([]string, error) {
	var names []string
	rest := pattern
	for {
		between, tail, open := strings.Cut(rest, "{")
		if strings.Contains(between, "}") {
			return nil, fmt.Errorf("a } has no { before it")
		}
		if !open {
			break
		}
		if len(names) > 0 && between == "" {
			return nil, fmt.Errorf("nothing stands between {%s} and the next field", names[len(names)-1])
		}
		name, after, closed := strings.Cut(tail, "}")
		if !closed {
			return nil, fmt.Errorf("{%s has no }", clip(name))
		}
		if name == "" || strings.ContainsFunc(name, func(c rune) bool {
			return (c < 'a' || c > 'z') && (c < 'A' || c > 'Z') && (c < '0' || c > '9') && c != '_' && c != '-'
		}) {
			return nil, fmt.Errorf("field {%s}: expected a name of letters, digits, - and _", clip(name))
		}
		if slices.Contains(names, name) {
			return nil, fmt.Errorf("field {%s} stands there twice", name)
		}
		names = append(names, name)
		rest = after
	}
	if len(names) == 0 {
		return nil, fmt.Errorf("expected at least one field in braces, such as \"P {pressure} bar\"")
	}
	return names, nil
}
