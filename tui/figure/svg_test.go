package figure

import (
	"bytes"
	"encoding/xml"
	"flag"
	"io"
	"os"
	"path/filepath"
	"testing"

	"barline/tui"
	"barline/tui/frame"
	"barline/tui/tuitest"
)

var update = flag.Bool("update", false, "rewrite the pictures in testdata, which README.md shows")

func TestPictures(t *testing.T) {
	for _, c := range []struct {
		name, situation string
		page            tui.Page
		w, h            int
		light           bool
	}{
		{"bench", "filling", tui.Bench, 120, 40, false},
		{"bench-light", "calm", tui.Bench, 80, 24, true},
		{"bench-alarm", "stale", tui.Bench, 100, 30, false},
		{"spectrum", "filling", tui.Spectrum, 120, 40, false},
		{"scan", "filling", tui.Scan, 120, 40, false},
		{"drift", "calm", tui.Drift, 120, 40, false},
		{"log", "filling", tui.Log, 80, 24, false},
	} {
		t.Run(c.name, func(t *testing.T) {
			var b bytes.Buffer
			style := frame.Style{Colours: frame.Palette, Light: c.light}
			f := tui.Draw(tuitest.Situations()[c.situation](), c.page, c.w, c.h, style)
			if err := SVG(&b, f, style, "the "+c.page.String()+" page: "+c.situation); err != nil {
				t.Fatal(err)
			}
			path := filepath.Join("testdata", c.name+".svg")
			if *update {
				if err := os.MkdirAll("testdata", 0o755); err != nil {
					t.Fatal(err)
				}
				if err := os.WriteFile(path, b.Bytes(), 0o644); err != nil {
					t.Fatal(err)
				}
			}
			want, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			if !bytes.Equal(b.Bytes(), want) {
				t.Errorf("%s no longer shows what the screen shows; rewrite it with -update", path)
			}
			for d := xml.NewDecoder(&b); ; {
				if _, err := d.Token(); err == io.EOF {
					break
				} else if err != nil {
					t.Fatalf("the picture is not well-formed XML: %v", err)
				}
			}
		})
	}
}
