package link

import (
	"os"
	"path/filepath"
	"slices"
	"strings"
)

// Ports lists the serial ports, opening none of them: opening alone can reset
// an instrument.
func Ports() ([]Port, error) { return portsBelow("/") }

// portsBelow reads the kernel's description of the ports under root.
func portsBelow(root string) ([]Port, error) {
	const class = "sys/class/tty"
	entries, err := os.ReadDir(filepath.Join(root, class))
	if err != nil {
		if os.IsNotExist(err) {
			return nil, nil
		}
		return nil, err
	}
	var ports []Port
	for _, e := range entries {
		dir := filepath.Join(root, class, e.Name())
		device, err := filepath.EvalSymlinks(filepath.Join(dir, "device"))
		if err != nil {
			continue // consoles and pseudo-terminals have no device behind them
		}
		if kind := firstLine(filepath.Join(dir, "type")); kind == "0" {
			continue // a place for a chip that is not fitted
		}
		p := Port{Name: "/dev/" + e.Name(), Device: "/dev/" + e.Name()}
		if usb := usbParent(device, root); usb != "" {
			p.Vendor, p.Product = firstLine(filepath.Join(usb, "idVendor")), firstLine(filepath.Join(usb, "idProduct"))
			p.Serial = firstLine(filepath.Join(usb, "serial"))
			p.Text = strings.TrimSpace(firstLine(filepath.Join(usb, "manufacturer")) + " " + firstLine(filepath.Join(usb, "product")))
		}
		ports = append(ports, p)
	}
	byStableName(ports, stableLinks(filepath.Join(root, "dev/serial/by-id")))
	slices.SortFunc(ports, func(a, b Port) int { return strings.Compare(a.Device, b.Device) })
	return ports, nil
}

// usbParent climbs from a device to the USB device that it is part of.
func usbParent(device, root string) string {
	for dir := device; len(dir) > len(root)+1; dir = filepath.Dir(dir) {
		if _, err := os.Stat(filepath.Join(dir, "idVendor")); err == nil {
			return dir
		}
	}
	return ""
}

func stableLinks(dir string) map[string]string {
	links := map[string]string{}
	entries, err := os.ReadDir(dir)
	if err != nil {
		return links
	}
	for _, e := range entries {
		if target, err := os.Readlink(filepath.Join(dir, e.Name())); err == nil {
			links["/dev/serial/by-id/"+e.Name()] = target
		}
	}
	return links
}

func firstLine(file string) string {
	b, err := os.ReadFile(file)
	if err != nil {
		return ""
	}
	line, _, _ := strings.Cut(string(b), "\n")
	return strings.TrimSpace(line)
}
