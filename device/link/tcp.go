package link

import (
	"context"
	"errors"
	"fmt"
	"net"
	"os"
	"time"
)

// openTCP connects to host:port. Keep-alives find a peer whose cable was
// pulled even where the protocol is silent.
func openTCP(ctx context.Context, address string, patience, quiet time.Duration) (Line, error) {
	dialer := net.Dialer{
		Timeout:         patience,
		KeepAliveConfig: net.KeepAliveConfig{Enable: true, Idle: 2 * time.Second, Interval: time.Second, Count: 3},
	}
	conn, err := dialer.DialContext(ctx, "tcp", address)
	if err != nil {
		return nil, fmt.Errorf("address %s: %w", address, err)
	}
	tcp, ok := conn.(*net.TCPConn)
	if !ok {
		return nil, errors.Join(fmt.Errorf("address %s: got a %T", address, conn), conn.Close())
	}
	return &stream{
		name: "address " + address, rx: tcp, tx: tcp, patience: patience, quiet: quiet,
		closing: func() error {
			if err := tcp.Close(); !errors.Is(err, os.ErrClosed) && !errors.Is(err, net.ErrClosed) {
				return err
			}
			return nil
		},
	}, nil
}
