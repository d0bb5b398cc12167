package link

import (
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
)

// plant lays out files as the kernel does; a value that begins with "-> " is a
// symbolic link.
func plant(t *testing.T, files map[string]string) string {
	t.Helper()
	root := t.TempDir()
	for name, text := range files {
		path := filepath.Join(root, name)
		if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
			t.Fatal(err)
		}
		var err error
		if target, is := strings.CutPrefix(text, "-> "); is {
			err = os.Symlink(target, path)
		} else {
			err = os.WriteFile(path, []byte(text), 0o644)
		}
		if err != nil {
			t.Fatal(err)
		}
	}
	return root
}

// No device stands in the tree, so that nothing can have been opened.
func TestPortsAreListedWithoutOpening(t *testing.T) {
	const usb = "sys/devices/pci0/usb1/1-2/"
	root := plant(t, map[string]string{
		usb + "idVendor":                          "0403\n",
		usb + "idProduct":                         "6001\n",
		usb + "serial":                            "A1B2\n",
		usb + "manufacturer":                      "Heron\n",
		usb + "product":                           "serial adapter\n",
		usb + "1-2:1.0/ttyUSB0/tty/ttyUSB0/dev":   "188:0\n",
		"sys/class/tty/ttyUSB0/device":            "-> ../../../devices/pci0/usb1/1-2/1-2:1.0/ttyUSB0",
		"sys/devices/platform/serial8250/ttyS0/x": "",
		"sys/class/tty/ttyS0/device":              "-> ../../../devices/platform/serial8250",
		"sys/class/tty/ttyS0/type":                "4\n",
		"sys/class/tty/ttyS1/device":              "-> ../../../devices/platform/serial8250",
		"sys/class/tty/ttyS1/type":                "0\n", // not fitted
		"sys/class/tty/tty1/dev":                  "4:1\n",
		"dev/serial/by-id/usb-Heron_A1B2-if00":    "-> ../../ttyUSB0",
	})
	got, err := portsBelow(root)
	want := []Port{
		{Name: "/dev/ttyS0", Device: "/dev/ttyS0"},
		{Name: "/dev/serial/by-id/usb-Heron_A1B2-if00", Device: "/dev/ttyUSB0", Vendor: "0403", Product: "6001", Serial: "A1B2", Text: "Heron serial adapter"},
	}
	if err != nil || !reflect.DeepEqual(got, want) {
		t.Errorf("%+v, %v; want %+v", got, err, want)
	}
	if got, err := portsBelow(t.TempDir()); err != nil || len(got) != 0 {
		t.Errorf("a system without serial ports: %v, %v", got, err)
	}
}

func TestPortByUSBIdentity(t *testing.T) {
	ports := []Port{{Device: "/dev/ttyUSB0", Vendor: "0403", Product: "6001", Serial: "A"}, {Device: "/dev/ttyUSB1", Vendor: "0403", Product: "6001", Serial: "B"},
		{Device: "/dev/ttyACM0", Vendor: "2341", Product: "0043"}}
	for name, want := range map[string]string{
		"usb:0403:6001:B": "/dev/ttyUSB1", "usb:2341:0043": "/dev/ttyACM0", "usb:0403:6001": "", "usb:0403:6001:C": "", "usb:ABCD:0001": "",
	} {
		id, is, err := usbName(name)
		if err != nil || !is {
			t.Fatalf("%s: %v, %v", name, is, err)
		}
		got, err := choose(name, id, ports)
		if got != want || (err == nil) != (want != "") {
			t.Errorf("%s is %q, %v; want %q", name, got, err, want)
		}
	}
	for _, name := range []string{"usb:", "usb:0403", "usb:403:6001", "usb:0403:600g"} {
		if _, _, err := usbName(name); err == nil {
			t.Errorf("%q accepted", name)
		}
	}
}
