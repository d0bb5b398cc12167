//go:build !(linux || darwin || freebsd || openbsd)

package link

import (
	"errors"
	"time"

	"go.bug.st/serial"
)

// openSerial opens a port through the serial library alone.
func openSerial(name string, s setting, patience, quiet time.Duration) (Line, error) {
	port, err := serial.Open(name, &s.mode)
	if err != nil {
		return nil, explainPort(name, err)
	}
	// A read that returns now and then lets the reader see that it is to end.
	if err := errors.Join(port.SetReadTimeout(100*time.Millisecond), port.ResetInputBuffer()); err != nil {
		return nil, explainPort(name, errors.Join(err, port.Close()))
	}
	return newPump("port "+name, port, patience, quiet), nil
}
