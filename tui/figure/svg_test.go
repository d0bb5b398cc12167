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
		w, h            int
		style           frame.Style
	}{
		{"bench", "filling", 120, 40, frame.Style{Colours: frame.Palette}},
		{"bench-80x24", "filling", 80, 24, frame.Style{Colours: frame.Palette}},
		{"bench-light", "calm", 120, 40, frame.Style{Colours: frame.Palette, Light: true}},
		{"bench-alarm", "stale", 100, 30, frame.Style{Colours: frame.Palette}},
	} {
		t.Run(c.name, func(t *testing.T) {
			var b bytes.Buffer
			f := tui.Draw(tuitest.Situations()[c.situation](), tui.Bench, c.w, c.h, c.style)
			if err := SVG(&b, f, c.style, "the bench page: "+c.situation); err != nil {
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
