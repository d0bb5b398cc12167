package link

import (
	"fmt"
	"path/filepath"
	"strings"
)

// Port is a serial port that the system knows of.
type Port struct {
	Name    string // what to write in the bench file, stable where the system has such a name
	Device  string // such as /dev/ttyUSB0
	Vendor  string // USB, four hexadecimal digits; empty where the port is not on USB
	Product string
	Serial  string // of the USB device, often empty
	Text    string // how the USB device describes itself
}

// usbName reads "usb:0403:6001" or "usb:0403:6001:SERIAL"; is reports whether
// name is meant so.
func usbName(name string) (want Port, is bool, err error) {
	rest, is := strings.CutPrefix(name, "usb:")
	if !is {
		return Port{}, false, nil
	}
	part := strings.SplitN(rest, ":", 3)
	if len(part) < 2 || !isHex4(part[0]) || !isHex4(part[1]) {
		return Port{}, true, fmt.Errorf("port is %q: expected \"usb:\" with vendor, product and perhaps serial number, such as \"usb:0403:6001\"", name)
	}
	want = Port{Vendor: strings.ToLower(part[0]), Product: strings.ToLower(part[1])}
	if len(part) == 3 {
		want.Serial = part[2]
	}
	return want, true, nil
}

func isHex4(s string) bool {
	if len(s) != 4 {
		return false
	}
	for _, c := range strings.ToLower(s) {
		if !strings.ContainsRune("0123456789abcdef", c) {
			return false
		}
	}
	return true
}

// resolve returns the device that a port of the bench file means now.
func resolve(name string) (string, error) {
	want, is, err := usbName(name)
	if err != nil || !is {
		return name, err
	}
	ports, err := Ports()
	if err != nil {
		return "", fmt.Errorf("port %s: %w", name, err)
	}
	return choose(name, want, ports)
}

func choose(name string, want Port, ports []Port) (string, error) {
	var found []string
	for _, p := range ports {
		if p.Vendor == want.Vendor && p.Product == want.Product && (want.Serial == "" || p.Serial == want.Serial) {
			found = append(found, p.Device)
		}
	}
	switch len(found) {
	case 0:
		return "", fmt.Errorf("port %s: no such device is plugged in; \"barline ports\" lists what is", name)
	case 1:
		return found[0], nil
	}
	return "", fmt.Errorf("port %s: %d devices answer to that (%s); add the serial number, or name the port", name, len(found), strings.Join(found, ", "))
}

// byStableName replaces the name of each port by a link that survives
// replugging, where links maps such links to devices.
func byStableName(ports []Port, links map[string]string) {
	for i := range ports {
		for link, device := range links {
			if filepath.Base(device) == filepath.Base(ports[i].Device) && (ports[i].Name == ports[i].Device || link < ports[i].Name) {
				ports[i].Name = link
			}
		}
	}
}
