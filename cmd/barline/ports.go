package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strings"
	"sync"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"barline/device/instrument"
	"barline/device/link"
)

func newPorts() *cobra.Command {
	var try, asJSON bool
	cmd := &cobra.Command{
		Use:   "ports [PORT ...]",
		Short: "List the serial ports; with --try say what answers there",
		Long: `List the serial ports of this computer, or those that are named. No port is
opened: opening alone can reset an instrument.

With --try each port is opened with the usual settings. barline listens, asks
for a name (*IDN?) and reads one Modbus register of units 1 to 8. It never
writes a value, but an instrument may note a question that it does not know
as an error.`,
		RunE: func(cmd *cobra.Command, args []string) error {
			ports, err := portsNamed(args)
			if err != nil {
				return err
			}
			found := make([]foundPort, len(ports)) // an empty list in JSON, not null
			for i, p := range ports {
				found[i] = foundPort{Port: p.Name, Device: p.Device, Vendor: p.Vendor, Product: p.Product, Serial: p.Serial, Text: p.Text}
			}
			if try {
				tryPorts(cmd.Context(), found)
			}
			if asJSON {
				return writeObject(cmd.OutOrStdout(), found)
			}
			if len(found) == 0 {
				fmt.Fprintln(cmd.ErrOrStderr(), "no serial port; plug one in, or see the bench file for address and command")
				return nil
			}
			return writePorts(cmd.OutOrStdout(), found)
		},
	}
	cmd.Flags().BoolVar(&try, "try", false, "open the ports and ask what is there")
	cmd.Flags().BoolVar(&asJSON, "json", false, "print the result as one JSON array")
	return cmd
}

// foundPort is what ports --json prints of one port.
type foundPort struct {
	Port     string `json:"port"`
	Device   string `json:"device"`
	Vendor   string `json:"usb_vendor,omitempty"`
	Product  string `json:"usb_product,omitempty"`
	Serial   string `json:"usb_serial,omitempty"`
	Text     string `json:"usb_text,omitempty"`
	Tried    bool   `json:"tried"`
	Protocol string `json:"protocol,omitempty"`
	Baud     int    `json:"baud,omitempty"`
	Parity   string `json:"parity,omitempty"`
	Answer   string `json:"answer,omitempty"`
	Problem  string `json:"problem,omitempty"`
}

// portsNamed returns the ports of the system, or those that are named.
func portsNamed(names []string) ([]link.Port, error) {
	all, err := link.Ports()
	if err != nil {
		return nil, fmt.Errorf("list of ports: %w", err)
	}
	if len(names) == 0 {
		return all, nil
	}
	var some []link.Port
	for _, name := range names {
		port := link.Port{Name: name, Device: name}
		for _, p := range all {
			if name == p.Name || name == p.Device {
				port = p
			}
		}
		some = append(some, port)
	}
	return some, nil
}

// tryPorts asks on all ports at the same time.
func tryPorts(ctx context.Context, found []foundPort) {
	var wait sync.WaitGroup
	for i := range found {
		wait.Add(1)
		go func() {
			defer wait.Done()
			p := &found[i]
			p.Tried = true
			f, err := instrument.Try(ctx, p.Device)
			switch {
			case errors.Is(err, instrument.ErrNothing):
			case err != nil:
				p.Problem = err.Error()
			default:
				p.Protocol, p.Baud, p.Parity, p.Answer = f.Protocol, f.Baud, f.Parity, f.Answer
			}
		}()
	}
	wait.Wait()
}

func writePorts(w io.Writer, found []foundPort) error {
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	for _, p := range found {
		name := p.Port
		if p.Device != p.Port {
			name += " (" + p.Device + ")"
		}
		var is []string
		if p.Vendor != "" {
			is = append(is, "usb:"+p.Vendor+":"+p.Product)
		}
		if p.Vendor == "" {
			is = append(is, "not on USB")
		}
		if p.Serial != "" {
			is = append(is, "serial number "+p.Serial)
		}
		if p.Text != "" {
			is = append(is, p.Text)
		}
		switch {
		case p.Problem != "":
			is = append(is, p.Problem)
		case p.Answer != "":
			is = append(is, fmt.Sprintf("%s at %d baud, parity %s: %s", p.Protocol, p.Baud, p.Parity, p.Answer))
		case p.Tried:
			is = append(is, "nothing answered")
		}
		fmt.Fprintf(t, "%s\t%s\n", name, strings.Join(is, "; "))
	}
	return t.Flush()
}
