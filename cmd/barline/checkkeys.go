package main

import (
	"fmt"
	"io"
	"strings"

	"barline/model/bench"
)

// writeKeys writes the reference of bench files, as README has it.
func writeKeys(w io.Writer) error {
	section := ""
	for _, k := range bench.Keys() {
		if k.Section != section {
			section = k.Section
			if _, err := fmt.Fprintf(w, "\n**`%s`**\n\n| key | takes | default | what it is |\n|---|---|---|---|\n", section); err != nil {
				return err
			}
		}
		preset := k.Default
		if k.Required {
			preset = "must be given"
		}
		if _, err := fmt.Fprintf(w, "| `%s` | %s | %s | %s |\n", k.Name, k.Takes+boundsText(k), preset, strings.ReplaceAll(k.Meaning, "|", "\\|")); err != nil {
			return err
		}
	}
	return nil
}

// boundsText writes the bounds of a key behind what it takes.
func boundsText(k bench.Key) string {
	var parts []string
	if k.Above != "" {
		parts = append(parts, "above "+k.Above)
	}
	if k.Least != "" {
		parts = append(parts, "from "+k.Least)
	}
	if k.Most != "" {
		parts = append(parts, "to "+k.Most)
	}
	if len(parts) == 0 {
		return ""
	}
	return "; " + strings.Join(parts, " ")
}
