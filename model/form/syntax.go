package form

import (
	"errors"
	"regexp"
	"strings"

	"github.com/pelletier/go-toml/v2"
)

// syntax proves that data is TOML and returns its tree, or nil where it is not.
func (r *Report) syntax(data []byte) *node {
	var proof map[string]any
	if err := toml.Unmarshal(data, &proof); err != nil {
		var at place
		var e *toml.DecodeError
		if errors.As(err, &e) {
			at.line, at.column = e.Position()
		}
		r.add(at, "", reword(err.Error()))
		return nil
	}
	root, err := grow(data)
	if err != nil {
		r.add(place{}, "", reword(err.Error()))
		return nil
	}
	return root
}

// rewordings turn the decoder's messages that a user meets most into words
// for somebody who has never read the grammar.
var rewordings = []struct {
	pattern *regexp.Regexp
	words   string
}{
	{regexp.MustCompile(`^unexpected character U\+\w+ ('.*') at start of value$`), `a value cannot start with $1; text stands in quotes`},
	{regexp.MustCompile(`^expected newline but got U\+\w+ ('.*')$`), `expected the end of the line, but $1 follows; one key and one value stand on a line`},
	{regexp.MustCompile(`^expected '=' after key$`), `expected = and a value behind the key`},
	{regexp.MustCompile(`^(unterminated basic string|basic strings cannot have new lines)$`), `the closing quote of a text is missing`},
	{regexp.MustCompile(`^array is incomplete$`), `the closing ] of a list is missing`},
}

func reword(message string) string {
	message = strings.TrimPrefix(message, "toml: ")
	for _, r := range rewordings {
		if r.pattern.MatchString(message) {
			return r.pattern.ReplaceAllString(message, r.words)
		}
	}
	return message
}
