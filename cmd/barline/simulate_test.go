package main

import (
	"strings"
	"testing"
)

// A fault that is none is wrong use, said before anything is opened.
func TestSimulateRefusesFaults(t *testing.T) {
	for text, says := range map[string]string{"60s flood": "leak, air", "leak": "60s leak", "60s leak moon": "cell B"} {
		var out, errs strings.Builder
		code := run(t.Context(), []string{"simulate", "--headless", "--for", "1s", "--fault", text}, strings.NewReader(""), &out, &errs)
		if code != exitUsage || !strings.Contains(errs.String(), says) || out.Len() != 0 {
			t.Errorf("--fault %q: code %d, says %q, want %d and %q", text, code, errs.String(), exitUsage, says)
		}
	}
}
