package link

import (
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"strings"
	"sync"
	"time"
)

// openChild starts a program whose standard output and input are the line. It
// is ended with the line, and what it last said on standard error explains
// why it went.
func openChild(words []string, patience time.Duration) (Line, error) {
	name := fmt.Sprintf("command %q", words[0])
	cmd := exec.Command(words[0], words[1:]...)
	said := &lastWords{}
	cmd.Stderr = said
	cmd.WaitDelay = time.Second // for what its own children hold open
	ownGroup(cmd)
	in, err := cmd.StdinPipe()
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	out, err := cmd.StdoutPipe()
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	if err := cmd.Start(); err != nil {
		return nil, fmt.Errorf("%s: does not start: %w", name, err)
	}
	var once sync.Once
	end := func() error {
		once.Do(func() {
			// Its exit status is no news: it was told to go.
			_ = errors.Join(in.Close(), kill(cmd), cmd.Wait())
		})
		return nil
	}
	rx, rxOK := out.(*os.File)
	tx, txOK := unwrapPipe(in)
	if rxOK && txOK && rx.SetReadDeadline(time.Time{}) == nil {
		return &stream{name: name, rx: rx, tx: tx, patience: patience, closing: end, why: said.text}, nil
	}
	return newPump(name, childPipes{out, in, end}, patience, 0), nil
}

// unwrapPipe finds the file inside what exec hands out.
func unwrapPipe(w io.WriteCloser) (file, bool) {
	f, ok := w.(file)
	return f, ok
}

type childPipes struct {
	io.Reader
	io.Writer
	end func() error
}

func (c childPipes) Close() error { return c.end() }

// lastWords keeps the last line that a program wrote.
type lastWords struct {
	mu   sync.Mutex
	tail []byte
}

const lastWordsLength = 400

func (l *lastWords) Write(p []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	l.tail = append(l.tail, p...)
	if over := len(l.tail) - lastWordsLength; over > 0 {
		l.tail = append(l.tail[:0], l.tail[over:]...)
	}
	return len(p), nil
}

func (l *lastWords) text() string {
	l.mu.Lock()
	defer l.mu.Unlock()
	said := strings.TrimSpace(string(l.tail))
	if said == "" {
		return ""
	}
	return fmt.Sprintf(" (it said %q)", said[strings.LastIndexByte(said, '\n')+1:])
}
