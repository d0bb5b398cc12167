package main

import (
	"bytes"
	"flag"
	"fmt"
	"os"
	"strings"
	"testing"

	"barline/model/procedure"
)

var updateTables = flag.Bool("update-readme", false, "write README's tables anew")

// README's tables of keys are what the program accepts.
func TestReadmeTables(t *testing.T) {
	const path = "../../README.md"
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	var keys, verbs bytes.Buffer
	if err := writeKeys(&keys); err != nil {
		t.Fatal(err)
	}
	fmt.Fprintln(&verbs, "\n| step | must have | may have |\n|---|---|---|")
	for _, v := range procedure.Verbs() {
		fmt.Fprintf(&verbs, "| `%s` | %s | %s |\n", v.Name, strings.Join(v.Needs, ", "), strings.Join(v.May, ", "))
	}
	whole := string(text)
	for mark, table := range map[string]string{"keys": keys.String(), "verbs": verbs.String()} {
		head, rest, ok := strings.Cut(whole, "<!-- "+mark+" -->\n")
		was, tail, closed := strings.Cut(rest, "\n<!-- end -->")
		if !ok || !closed {
			t.Fatalf("README has no place for the table of %s", mark)
		}
		table = strings.TrimRight(table, "\n")
		if was != table && !*updateTables {
			t.Errorf("README's table of %s is not what the program accepts; go test ./cmd/barline -run ReadmeTables -update-readme writes it", mark)
		}
		whole = head + "<!-- " + mark + " -->\n" + table + "\n<!-- end -->" + tail
	}
	if *updateTables {
		if err := os.WriteFile(path, []byte(whole), 0o666); err != nil {
			t.Fatal(err)
		}
	}
}
