package link

import (
	"errors"
	"fmt"
	"io/fs"
	"syscall"
	"time"

	"go.bug.st/serial"

	"barline/device/modbus"
	"barline/model/bench"
)

// setting is how a serial port is to be driven.
type setting struct {
	mode serial.Mode
	bits int // of one character, start and stop included
}

func newSetting(spec bench.Instrument) (setting, error) {
	s := setting{mode: serial.Mode{BaudRate: spec.Baud, DataBits: spec.DataBits}}
	if s.mode.BaudRate == 0 {
		s.mode.BaudRate = 9600
	}
	if s.mode.DataBits == 0 {
		s.mode.DataBits = 8
	}
	if s.mode.BaudRate < 50 || s.mode.BaudRate > 4_000_000 {
		return s, fmt.Errorf("baud is %d: expected 50 to 4000000", spec.Baud)
	}
	if s.mode.DataBits < 7 || s.mode.DataBits > 8 {
		return s, fmt.Errorf("data_bits is %d: expected 7 or 8", spec.DataBits)
	}
	s.bits = 1 + s.mode.DataBits + 1
	switch spec.Parity {
	case "", "none":
		s.mode.Parity = serial.NoParity
	case "even":
		s.mode.Parity = serial.EvenParity
		s.bits++
	case "odd":
		s.mode.Parity = serial.OddParity
		s.bits++
	default:
		return s, fmt.Errorf("parity is %q: expected none, even or odd", spec.Parity)
	}
	switch spec.StopBits {
	case 0, 1:
		s.mode.StopBits = serial.OneStopBit
	case 2:
		s.mode.StopBits = serial.TwoStopBits
		s.bits++
	default:
		return s, fmt.Errorf("stop_bits is %d: expected 1 or 2", spec.StopBits)
	}
	return s, nil
}

// String returns the setting as people write it, such as "19200 baud 8E1".
func (s setting) String() string {
	parity := map[serial.Parity]string{serial.NoParity: "N", serial.EvenParity: "E", serial.OddParity: "O"}[s.mode.Parity]
	stop := 1
	if s.mode.StopBits == serial.TwoStopBits {
		stop = 2
	}
	return fmt.Sprintf("%d baud %d%s%d", s.mode.BaudRate, s.mode.DataBits, parity, stop)
}

// silence is the quiet that the protocol wants before a message.
func (s setting) silence(spec bench.Instrument) time.Duration {
	quiet := spec.Turnaround.Duration()
	if spec.Protocol == "modbus-rtu" {
		quiet = max(quiet, modbus.Silence(s.mode.BaudRate, s.bits))
	}
	return quiet
}

// explainPort says in words why a port did not open.
func explainPort(name string, err error) error {
	var port *serial.PortError
	isPort := errors.As(err, &port)
	switch {
	case errors.Is(err, fs.ErrNotExist) || isPort && port.Code() == serial.PortNotFound:
		return fmt.Errorf("port %s: nothing is plugged in there; \"barline ports\" lists what is: %w", name, err)
	case errors.Is(err, fs.ErrPermission) || isPort && port.Code() == serial.PermissionDenied:
		return fmt.Errorf("port %s: no permission; on Linux the user must belong to the group of the port, often dialout: %w", name, err)
	case errors.Is(err, syscall.EBUSY) || isPort && port.Code() == serial.PortBusy || errors.Is(err, errLocked):
		return fmt.Errorf("port %s: another program has it open: %w", name, err)
	case isPort && port.Code() == serial.InvalidSerialPort:
		return fmt.Errorf("port %s: is no serial port: %w", name, err)
	case isPort && port.Code() == serial.InvalidSpeed:
		return fmt.Errorf("port %s: does not run at this baud rate: %w", name, err)
	}
	return fmt.Errorf("port %s: %w", name, err)
}

var errLocked = errors.New("locked")
