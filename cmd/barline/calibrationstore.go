package main

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"sort"
	"strings"

	"barline/model/calibration"
)

// A logbook's calibrations stand in files of their own beside its segments, so
// that a start finds them without reading the whole record, which has them
// too:
//
//	calibrations/NAME-DIGEST.json   one calibration each
//	calibrations/in-use             which is in use, and which were before
const calibrationFolder = "calibrations"

const inUseFile = "in-use"

// chosen is what in-use holds.
type chosen struct {
	Name    string   `json:"name"`    // empty: the bench file, without a calibration
	Earlier []string `json:"earlier"` // newest last
}

// calibrationStore keeps the calibrations of one logbook.
type calibrationStore struct{ folder string }

func calibrationsOf(logbook string) calibrationStore {
	return calibrationStore{filepath.Join(logbook, calibrationFolder)}
}

// load returns all calibrations, oldest first, and which is in use. Files that
// cannot be read are named in the error, and the others are returned beside it.
func (s calibrationStore) load() (known []*calibration.Calibration, use chosen, err error) {
	entries, readErr := os.ReadDir(s.folder)
	if errors.Is(readErr, fs.ErrNotExist) {
		return nil, use, nil
	}
	if readErr != nil {
		return nil, use, readErr
	}
	var wrong []error
	for _, e := range entries {
		if !strings.HasSuffix(e.Name(), ".json") {
			continue
		}
		c, err := readCalibration(filepath.Join(s.folder, e.Name()))
		if err != nil {
			wrong = append(wrong, err)
			continue
		}
		known = append(known, c)
	}
	sort.SliceStable(known, func(i, j int) bool { return known[i].Made.Before(known[j].Made) })
	text, readErr := os.ReadFile(filepath.Join(s.folder, inUseFile))
	if readErr == nil {
		if readErr = json.Unmarshal(text, &use); readErr != nil {
			wrong = append(wrong, fmt.Errorf("%s: %w", filepath.Join(s.folder, inUseFile), readErr))
		}
	} else if !errors.Is(readErr, fs.ErrNotExist) {
		wrong = append(wrong, readErr)
	}
	return known, use, errors.Join(wrong...)
}

// add keeps a calibration.
func (s calibrationStore) add(c *calibration.Calibration) error {
	text, err := json.MarshalIndent(c, "", "  ")
	if err != nil {
		return err
	}
	digest := sha256.Sum256([]byte(c.Name))
	return s.write(fmt.Sprintf("%s-%s.json", plainName(c.Name), hex.EncodeToString(digest[:4])), append(text, '\n'))
}

// choose keeps which calibration is in use.
func (s calibrationStore) choose(use chosen) error {
	text, err := json.Marshal(use)
	if err != nil {
		return err
	}
	return s.write(inUseFile, append(text, '\n'))
}

// write replaces a file as a whole or not at all.
func (s calibrationStore) write(name string, text []byte) error {
	if err := os.MkdirAll(s.folder, 0o755); err != nil {
		return err
	}
	f, err := os.CreateTemp(s.folder, "."+name+"-*")
	if err != nil {
		return err
	}
	_, err = f.Write(text)
	if err == nil {
		err = f.Sync()
	}
	if closeErr := f.Close(); err == nil {
		err = closeErr
	}
	if err == nil {
		err = os.Rename(f.Name(), filepath.Join(s.folder, name))
	}
	if err != nil {
		return errors.Join(err, os.Remove(f.Name()))
	}
	return nil
}

// readCalibration reads a file that add wrote, or that somebody made.
func readCalibration(path string) (*calibration.Calibration, error) {
	text, err := os.ReadFile(path)
	if err != nil {
		return nil, err
	}
	c := new(calibration.Calibration)
	if err := json.Unmarshal(text, c); err != nil {
		return nil, fmt.Errorf("%s is no calibration: %w", path, err)
	}
	if err := c.Check(); err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return c, nil
}

// plainName keeps of a name what every file system takes.
func plainName(name string) string {
	const longest = 40
	text := strings.Trim(strings.Map(func(r rune) rune {
		switch {
		case r >= 'a' && r <= 'z', r >= '0' && r <= '9', r == '-':
			return r
		case r >= 'A' && r <= 'Z':
			return r - 'A' + 'a'
		}
		return '-'
	}, name), "-")
	return text[:min(len(text), longest)]
}

// named returns the calibration that a name means: the whole name, or a part
// of it that only one has.
func named(known []*calibration.Calibration, name string) (*calibration.Calibration, error) {
	var found []*calibration.Calibration
	var names []string
	for _, c := range known {
		if c.Name == name {
			return c, nil
		}
		if strings.Contains(strings.ToLower(c.Name), strings.ToLower(name)) {
			found = append(found, c)
		}
		names = append(names, fmt.Sprintf("%q", c.Name))
	}
	switch {
	case len(found) == 1:
		return found[0], nil
	case len(found) > 1:
		return nil, usage("%d calibrations have %q in their name: write it whole", len(found), name)
	case len(names) == 0:
		return nil, usage("there is no calibration here yet; barline fit makes one")
	}
	return nil, usage("no calibration is called %q: expected one of %s", name, strings.Join(names, ", "))
}
