package main

import (
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"strings"
)

// dataFolder returns where this user's logbooks live: XDG_DATA_HOME or its
// equal on the system (XDG Base Directory Specification 0.8).
func dataFolder() (string, error) {
	if dir := os.Getenv("XDG_DATA_HOME"); filepath.IsAbs(dir) {
		return filepath.Join(dir, "barline"), nil
	}
	if runtime.GOOS == "windows" {
		if dir := os.Getenv("LocalAppData"); dir != "" {
			return filepath.Join(dir, "barline"), nil
		}
	}
	home, err := os.UserHomeDir()
	if err != nil {
		return "", fmt.Errorf("no folder for the logbook: %w; name one with --logbook", err)
	}
	if runtime.GOOS == "darwin" {
		return filepath.Join(home, "Library", "Application Support", "barline"), nil
	}
	return filepath.Join(home, ".local", "share", "barline"), nil
}

// unused reports whether a folder in the user's data folder has never been
// written to: whoever sits here may be new. One that was asked for by name
// says nothing about that.
func unused(folder, asked, configured string) bool {
	_, err := os.Stat(folder)
	return asked == "" && configured == "" && os.IsNotExist(err)
}

// logbookFolder returns the folder of the bench's logbook: the one asked for,
// else the one of the bench file, else one in the user's data folder that is
// named after the bench.
func logbookFolder(asked, configured, benchName string, simulated bool) (string, error) {
	if asked != "" {
		return asked, nil
	}
	if configured != "" && !simulated {
		return configured, nil
	}
	base, err := dataFolder()
	if err != nil {
		return "", err
	}
	name := strings.Map(func(r rune) rune {
		switch {
		case r >= 'a' && r <= 'z', r >= '0' && r <= '9', r == '-', r == '_':
			return r
		case r >= 'A' && r <= 'Z':
			return r - 'A' + 'a'
		}
		return '-'
	}, benchName)
	if name == "" {
		name = "bench"
	}
	if simulated {
		name += "-simulated"
	}
	return filepath.Join(base, name), nil
}
