package link

import (
	"context"
	"errors"
	"fmt"
	"net"
	"strings"
	"time"

	"barline/model/bench"
)

// defaultPatience is how long a line may refuse bytes, or a connection may
// take to come about, before the line is given up.
const defaultPatience = 2 * time.Second

// Opener opens the line to one instrument, as often as it must.
type Opener struct {
	port    string
	address string
	command []string
	setting setting
	quiet   time.Duration
	traffic string
}

// NewOpener checks how the bench file describes the line of an instrument.
func NewOpener(spec bench.Instrument) (*Opener, error) {
	o := &Opener{port: spec.Port, address: spec.Address, command: spec.Command, traffic: spec.Traffic}
	given := 0
	for _, is := range []bool{spec.Port != "", spec.Address != "", len(spec.Command) > 0} {
		if is {
			given++
		}
	}
	if given != 1 {
		return nil, fmt.Errorf("instrument %q: expected one of port, address and command, got %d of them", spec.Name, given)
	}
	if spec.Turnaround < 0 || spec.Turnaround > 1 {
		return nil, fmt.Errorf("instrument %q: turnaround is %v: expected 0 s to 1 s", spec.Name, spec.Turnaround.Duration())
	}
	o.quiet = spec.Turnaround.Duration()
	switch {
	case spec.Port != "":
		var err error
		if o.setting, err = newSetting(spec); err != nil {
			return nil, fmt.Errorf("instrument %q: %w", spec.Name, err)
		}
		o.quiet = o.setting.silence(spec)
		if _, _, err := usbName(spec.Port); err != nil {
			return nil, fmt.Errorf("instrument %q: %w", spec.Name, err)
		}
	case spec.Address != "":
		host, port, err := net.SplitHostPort(spec.Address)
		if err != nil || host == "" || port == "" {
			return nil, fmt.Errorf("instrument %q: address is %q: expected host and port, such as \"192.168.1.20:502\"", spec.Name, spec.Address)
		}
	case spec.Command[0] == "":
		return nil, fmt.Errorf("instrument %q: command begins with an empty word: expected a program", spec.Name)
	}
	return o, nil
}

// Open opens the line. What came in before is gone.
func (o *Opener) Open(ctx context.Context) (Line, error) {
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	line, err := o.open(ctx)
	if err != nil || o.traffic == "" {
		return line, err
	}
	tap, err := openTap(line, o.traffic)
	if err != nil {
		return nil, errors.Join(err, line.Close())
	}
	return tap, nil
}

func (o *Opener) open(ctx context.Context) (Line, error) {
	switch {
	case o.port != "":
		name, err := resolve(o.port)
		if err != nil {
			return nil, err
		}
		return openSerial(name, o.setting, defaultPatience, o.quiet)
	case o.address != "":
		return openTCP(ctx, o.address, defaultPatience, o.quiet)
	}
	return openChild(o.command, defaultPatience)
}

// String says what the line is, such as "port /dev/ttyUSB0, 19200 baud 8E1".
func (o *Opener) String() string {
	switch {
	case o.port != "":
		return "port " + o.port + ", " + o.setting.String()
	case o.address != "":
		return "address " + o.address
	}
	return fmt.Sprintf("command %q", strings.Join(o.command, " "))
}
