package simulate

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"time"

	"golang.org/x/sys/unix"

	"barline/model/clock"
)

func (b *Bench) serve(ctx context.Context, c clock.Clock) (map[string]string, error) {
	at, err := newFolder()
	if err != nil {
		return nil, err
	}
	var wires []*wire
	ports := map[string]string{}
	for name, p := range b.ports {
		w := &wire{bench: b, port: p, pace: paces[name], clock: c, path: filepath.Join(at.dir, name), start: time.Now()}
		if err := w.plug(); err != nil {
			for _, w := range wires {
				w.pull()
			}
			return nil, errors.Join(fmt.Errorf("simulated %s: %w", name, err), at.leave())
		}
		wires = append(wires, w)
		ports[name] = w.path
	}
	running := make(chan struct{}, len(wires))
	for _, w := range wires {
		b.serving.Go(func() {
			w.run(ctx)
			running <- struct{}{}
		})
	}
	b.serving.Go(func() {
		for range wires {
			<-running
		}
		_ = at.leave() // if it stays, the next bench clears it away
	})
	return ports, nil
}

// wire is one pseudo-terminal under a path that stays.
type wire struct {
	bench *Bench
	port  *port
	pace  pace
	clock clock.Clock
	path  string
	start time.Time

	master, slave *os.File // nil while the cable is pulled
}

// plug opens a terminal in raw mode and puts its name at the path.
func (w *wire) plug() error {
	master, slave, err := openTerminal()
	if err != nil {
		return err
	}
	w.master, w.slave = master, slave
	next := w.path + ".new"
	if err := os.Symlink(slave.Name(), next); err != nil {
		w.pull()
		return err
	}
	if err := os.Rename(next, w.path); err != nil {
		w.pull()
		return err
	}
	return nil
}

// pull closes the terminal and takes its path away.
func (w *wire) pull() {
	if w.master == nil {
		return
	}
	_ = os.Remove(w.path)
	_ = w.slave.Close()
	_ = w.master.Close()
	w.master, w.slave = nil, nil
}

// run lets the instrument talk until ctx ends or its bench stands still.
func (w *wire) run(ctx context.Context) {
	defer w.pull()
	buf := make([]byte, 512)
	look := w.pace.look(w.clock)
	for ctx.Err() == nil {
		n := 0
		if w.master == nil {
			pause(ctx, look)
		} else {
			_ = w.master.SetReadDeadline(time.Now().Add(look))
			n, _ = w.master.Read(buf) // silence is most of life
		}
		out, err := w.bench.exchange(w.port, buf[:n], time.Since(w.start))
		switch {
		case errors.Is(err, ErrUnplugged):
			w.pull()
			continue
		case err != nil:
			return
		case w.master == nil:
			if w.plug() != nil {
				continue // tried again at the next look
			}
		}
		if len(out) == 0 {
			continue
		}
		if n > 0 {
			pause(ctx, w.clock.Wall(w.pace.think+w.pace.lasts(n+len(out))))
		}
		// Bytes that nobody takes are lost, as on any line without flow control.
		_ = w.master.SetWriteDeadline(time.Now().Add(50 * time.Millisecond))
		_, _ = w.master.Write(out)
	}
}

func pause(ctx context.Context, d time.Duration) {
	t := time.NewTimer(d)
	defer t.Stop()
	select {
	case <-ctx.Done():
	case <-t.C:
	}
}

// openTerminal opens a pseudo-terminal that passes bytes on as they are. Both
// ends stay with the runtime's poller, so that reads have deadlines.
func openTerminal() (master, slave *os.File, err error) {
	master, err = os.OpenFile("/dev/ptmx", os.O_RDWR|unix.O_NOCTTY|unix.O_NONBLOCK, 0)
	if err != nil {
		return nil, nil, err
	}
	number := 0
	err = control(master, func(fd int) error {
		if err := unix.IoctlSetPointerInt(fd, unix.TIOCSPTLCK, 0); err != nil {
			return err
		}
		number, err = unix.IoctlGetInt(fd, unix.TIOCGPTN)
		return err
	})
	if err == nil {
		slave, err = os.OpenFile(fmt.Sprintf("/dev/pts/%d", number), os.O_RDWR|unix.O_NOCTTY|unix.O_NONBLOCK, 0)
	}
	if err != nil {
		return nil, nil, errors.Join(err, master.Close())
	}
	if err := control(slave, raw); err != nil {
		return nil, nil, errors.Join(err, slave.Close(), master.Close())
	}
	return master, slave, nil
}

func control(f *os.File, do func(fd int) error) error {
	conn, err := f.SyscallConn()
	if err != nil {
		return err
	}
	var failed error
	err = conn.Control(func(fd uintptr) { failed = do(int(fd)) })
	return errors.Join(err, failed)
}

// raw makes a terminal change no byte and echo none.
func raw(fd int) error {
	t, err := unix.IoctlGetTermios(fd, unix.TCGETS)
	if err != nil {
		return err
	}
	t.Iflag, t.Oflag = 0, 0
	t.Lflag &^= unix.ECHO | unix.ECHONL | unix.ICANON | unix.ISIG | unix.IEXTEN
	t.Cflag = t.Cflag&^(unix.CSIZE|unix.PARENB) | unix.CS8
	t.Cc[unix.VMIN], t.Cc[unix.VTIME] = 1, 0
	return unix.IoctlSetTermios(fd, unix.TCSETS, t)
}
