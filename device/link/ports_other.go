//go:build !linux && !windows

package link

import "path/filepath"

// Ports lists the serial ports by their names in /dev, opening none of them.
// The USB identity is not known without asking the system in its own ways.
func Ports() ([]Port, error) {
	var ports []Port
	for _, pattern := range []string{"/dev/cu.*", "/dev/cuaU*", "/dev/cuau*"} {
		names, err := filepath.Glob(pattern)
		if err != nil {
			return nil, err
		}
		for _, n := range names {
			ports = append(ports, Port{Name: n, Device: n})
		}
	}
	return ports, nil
}
