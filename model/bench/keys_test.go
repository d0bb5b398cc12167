package bench

import (
	"strings"
	"testing"
)

// Every key that a bench file may hold is explained, and nothing else is.
func TestKeysAreExplained(t *testing.T) {
	seen := map[string]bool{}
	for _, k := range Keys() {
		seen[k.Path] = true
		if k.Meaning == "" {
			t.Errorf("%s: no meaning", k.Path)
		}
		if k.Takes == "" || strings.Contains(k.Takes, "it is") {
			t.Errorf("%s takes %q", k.Path, k.Takes)
		}
	}
	for path := range meaning {
		if !seen[path] {
			t.Errorf("%s is explained and not accepted", path)
		}
	}
	// The sample uses keys of every section.
	for _, path := range []string{"fibre.kind", "limits.windows", "instrument.channel.role", "screen.ascii"} {
		if !seen[path] {
			t.Errorf("%s is missing from the list", path)
		}
	}
}
