//go:build unix && !linux

package logbook

import "os"

func syncData(f *os.File) error { return f.Sync() }
