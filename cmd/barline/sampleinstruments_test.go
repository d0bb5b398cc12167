package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"barline/device/instrument"
	"barline/device/link"
	"barline/model/bench"
)

// The sample instruments can be put in place of those of the sample bench.
func TestSampleInstruments(t *testing.T) {
	files, err := filepath.Glob("testdata/instruments/*.toml")
	if err != nil || len(files) < 2 {
		t.Fatalf("%q, %v", files, err)
	}
	sample := string(bench.Sample())
	head, _, _ := strings.Cut(sample, "[[instrument]]")
	_, tail, _ := strings.Cut(sample, "[emission]")
	for _, file := range files {
		text, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		b, err := bench.Parse([]byte(head+string(text)+"\n[emission]"+tail), file)
		if err != nil {
			t.Error(err)
			continue
		}
		for _, spec := range b.Instrument {
			if _, err := instrument.New(spec, b.Panel.Ambient); err != nil {
				t.Errorf("%s: %v", file, err)
			}
			if _, err := link.NewOpener(spec); err != nil {
				t.Errorf("%s: %v", file, err)
			}
		}
	}
}
