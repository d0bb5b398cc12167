package link

import (
	"strings"

	"go.bug.st/serial/enumerator"
)

// Ports lists the serial ports, opening none of them.
func Ports() ([]Port, error) {
	found, err := enumerator.GetDetailedPortsList()
	if err != nil {
		return nil, err
	}
	ports := make([]Port, len(found))
	for i, p := range found {
		ports[i] = Port{Name: p.Name, Device: p.Name, Vendor: strings.ToLower(p.VID), Product: strings.ToLower(p.PID), Serial: p.SerialNumber, Text: p.Product}
	}
	return ports, nil
}
