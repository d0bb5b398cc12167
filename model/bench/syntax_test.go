package bench

import (
	"strings"
	"testing"
)

func TestSyntaxIsSaidInPlainWords(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"[fibre]\nkind = argon\n", "b:2:8: a value cannot start with 'a'; text stands in quotes"},
		{"[fibre]\nlength = 30 cm\n", "b:2:13: expected the end of the line, but 'c' follows; one key and one value stand on a line"},
		{"[fibre]\nkind = \"capillary\n", "b:2:"},
		{"[fibre]\nkind\n", "b:2:5: expected = and a value behind the key"},
		{"a = [\"x\", \n", "the closing ] of a list is missing"},
		{"[fibre]\nkind = \"a\"\nkind = \"b\"\n", "b:3:1: "},
		{"[fibre\n", "b:1:7: "},
		{"[fibre]\n[fibre]\n", "b:2:"},
		{"a = 99999999999999999999\n", "b:1:5: "},
	} {
		_, err := Parse([]byte(c.text), "b")
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: got %v, want %s", c.text, err, c.want)
		} else {
			t.Logf("%v", err)
		}
	}
}
