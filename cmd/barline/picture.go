package main

import (
	"fmt"
	"os"
	"path/filepath"

	"barline/model/live"
	"barline/tui"
	"barline/tui/figure"
	"barline/tui/frame"
)

const picturesHelp = "draw every page as an SVG picture into this folder"

// The size of the screen in a picture: the one that the pages are made for.
const (
	pictureColumns = 120
	pictureRows    = 40
)

// drawPictures draws every page of s into a folder, named after the pages, as
// a terminal with all its colours shows them.
func drawPictures(dir string, s *live.Snapshot) error {
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return fmt.Errorf("pictures: %w", err)
	}
	style, err := tui.StyleFor(s.Bench.Screen, func(string) string { return "" })
	if err != nil {
		return coded{exitUsage, err}
	}
	style.Colours = frame.Palette
	for _, page := range tui.Pages() {
		title := fmt.Sprintf("the %s page of %s, %s", page, s.Bench.Bench.Name, s.Now.UTC.In(style.Location()).Format("2006-01-02 15:04:05 MST"))
		if err := drawPicture(filepath.Join(dir, page.String()+".svg"), tui.Draw(s, page, pictureColumns, pictureRows, style), style, title); err != nil {
			return fmt.Errorf("pictures: %w", err)
		}
	}
	return nil
}

func drawPicture(path string, f *frame.Frame, style frame.Style, title string) error {
	out, err := os.Create(path)
	if err != nil {
		return err
	}
	if err := figure.SVG(out, f, style, title); err != nil {
		out.Close()
		return err
	}
	return out.Close()
}
