package main

import (
	"encoding/xml"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"barline/tui"
)

// Pictures are of real frames: of a run as it ends, and of its record.
func TestPicturesOfARunAndOfItsRecord(t *testing.T) {
	if testing.Short() {
		t.Skip("runs a bench")
	}
	dir := t.TempDir()
	book := filepath.Join(dir, "book")
	for _, args := range [][]string{
		{"simulate", "--headless", "--scenario", "quiet", "--for", "20s", "--speed", "20", "--logbook", book, "--pictures", filepath.Join(dir, "run")},
		{"replay", book, "--pictures", filepath.Join(dir, "record")},
	} {
		var errs strings.Builder
		if code := run(t.Context(), args, strings.NewReader(""), io.Discard, &errs); code != exitDone {
			t.Fatalf("%q: code %d, %s", args, code, errs.String())
		}
	}
	for _, from := range []string{"run", "record"} {
		for _, page := range tui.Pages() {
			text, err := os.ReadFile(filepath.Join(dir, from, page.String()+".svg"))
			if err != nil {
				t.Fatal(err)
			}
			if err := xml.Unmarshal(text, new(struct{})); err != nil {
				t.Errorf("%s of the %s is no XML: %v", page, from, err)
			}
			if !strings.Contains(string(text), "Heron") {
				t.Errorf("%s of the %s does not name the bench", page, from)
			}
			if got := strings.Contains(string(text), ">REPLAY,<"); got != (from == "record") {
				t.Errorf("%s of the %s says that it is a replay: %v", page, from, got)
			}
		}
	}
}
