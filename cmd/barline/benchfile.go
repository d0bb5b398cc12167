package main

import (
	"fmt"
	"os"
	"path/filepath"
	"time"

	"barline/model/bench"
)

// readBench reads the bench file at path, and the files that it includes from
// beside it, and returns their text as one and its meaning.
// Its mistakes are wrong use of the program; the error then holds
// bench.Mistakes.
func readBench(path string) (text []byte, b *bench.Bench, err error) {
	text, err = os.ReadFile(path)
	if err != nil {
		return nil, nil, usage("bench file: %w", err)
	}
	whole, err := bench.Join(text, filepath.Base(path), func(file string) ([]byte, error) {
		if !filepath.IsAbs(file) {
			file = filepath.Join(filepath.Dir(path), file)
		}
		return os.ReadFile(file)
	})
	if err == nil {
		text = whole.Text
		b, err = whole.Parse()
	}
	if err != nil {
		return nil, nil, usage("the bench file needs care; barline check -b %s says what was understood\n%w", path, err)
	}
	if _, err := timeZone(b); err != nil {
		return nil, nil, usage("%s: %w", filepath.Base(path), err)
	}
	return text, b, nil
}

// timeZone returns the place whose local time the screen shows.
func timeZone(b *bench.Bench) (*time.Location, error) {
	switch name := b.Screen.TimeZone; name {
	case "local", "":
		return time.Local, nil
	default:
		zone, err := time.LoadLocation(name)
		if err != nil {
			return nil, fmt.Errorf(`screen.time_zone = %q: expected "local", "UTC" or a name such as "Europe/Lisbon": %w`, name, err)
		}
		return zone, nil
	}
}
