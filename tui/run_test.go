package tui

import (
	"bytes"
	"context"
	"os"
	"os/exec"
	"strings"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"github.com/creack/pty"
	"go.uber.org/goleak"

	"barline/model/bench"
	"barline/model/live"
	"barline/tui/frame"
	"barline/tui/tuitest"
)

const startedMark = "BARLINE_TUI_TEST_START"

// Under startedMark the test binary is a program that imports this package,
// says so and leaves.
func TestMain(m *testing.M) {
	if os.Getenv(startedMark) != "" {
		os.Stdout.WriteString("started\n")
		return
	}
	// After a panic bubbletea leaves its reader of keys behind.
	goleak.VerifyTestMain(m, goleak.IgnoreAnyFunction("github.com/muesli/cancelreader.(*epollCancelReader).Read"))
}

// A terminal that answers no colour query must not stall the start: without
// package background it takes five seconds.
func TestStartOnMuteTerminal(t *testing.T) {
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), startedMark+"=1", "TERM=xterm-256color")
	from := time.Now()
	terminal, err := pty.Start(cmd)
	if err != nil {
		t.Skipf("no pseudo-terminal: %v", err)
	}
	defer terminal.Close()
	var seen []byte
	buf := make([]byte, 256)
	for !bytes.Contains(seen, []byte("started")) {
		n, err := terminal.Read(buf)
		if err != nil {
			t.Fatalf("program ended with %q on the terminal: %v", seen, err)
		}
		seen = append(seen, buf[:n]...)
	}
	took := time.Since(from)
	t.Logf("started after %v", took)
	if took > 2500*time.Millisecond {
		t.Errorf("start took %v on a terminal that answers nothing, expected well below a second", took)
	}
	if bytes.Contains(seen, []byte("\x1b]11;?")) {
		t.Error("the terminal was asked for its background colour")
	}
	_ = cmd.Wait()
}

// fake is a source whose snapshot the test sets.
type fake struct {
	mu      sync.Mutex
	s       *live.Snapshot
	changed chan struct{}
	asked   chan live.Intent
}

func newFake(s *live.Snapshot) *fake {
	return &fake{s: s, changed: make(chan struct{}, 1), asked: make(chan live.Intent, 100)}
}

func (f *fake) Snapshot() *live.Snapshot {
	f.mu.Lock()
	defer f.mu.Unlock()
	return f.s
}

func (f *fake) set(s *live.Snapshot) {
	f.mu.Lock()
	f.s = s
	f.mu.Unlock()
	select {
	case f.changed <- struct{}{}:
	default:
	}
}

func (f *fake) Changed() <-chan struct{} { return f.changed }
func (f *fake) Do(in live.Intent)        { f.asked <- in }

// screenful collects what Run writes until it holds what is waited for.
type screenful struct {
	mu   sync.Mutex
	text strings.Builder
	more chan struct{}
}

func (s *screenful) Write(p []byte) (int, error) {
	s.mu.Lock()
	s.text.Write(p)
	s.mu.Unlock()
	select {
	case s.more <- struct{}{}:
	default:
	}
	return len(p), nil
}

func (s *screenful) wait(t *testing.T, what string) {
	t.Helper()
	deadline := time.After(10 * time.Second)
	for {
		s.mu.Lock()
		found := strings.Contains(s.text.String(), what)
		s.mu.Unlock()
		if found {
			return
		}
		select {
		case <-s.more:
		case <-deadline:
			t.Fatalf("%q never came on the screen", what)
		}
	}
}

func start(t *testing.T, src Source) (terminal *os.File, out *screenful, done chan error) {
	t.Helper()
	terminal, tty, err := pty.Open()
	if err != nil {
		t.Skipf("no pseudo-terminal: %v", err)
	}
	t.Cleanup(func() { terminal.Close(); tty.Close() })
	if err := pty.Setsize(terminal, &pty.Winsize{Rows: 40, Cols: 120}); err != nil {
		t.Fatal(err)
	}
	out = &screenful{more: make(chan struct{}, 1)}
	copied := make(chan struct{})
	go func() {
		defer close(copied)
		buf := make([]byte, 64<<10)
		for {
			n, err := terminal.Read(buf)
			if err != nil {
				return
			}
			out.Write(buf[:n])
		}
	}()
	ctx, cancel := context.WithCancel(context.Background())
	t.Cleanup(cancel)
	done = make(chan error, 1)
	go func() { done <- Run(ctx, src, Options{In: tty, Out: tty}) }()
	t.Cleanup(func() { tty.Close(); terminal.Close(); <-copied })
	return terminal, out, done
}

func TestRunFromArmingToLeaving(t *testing.T) {
	src := newFake(tuitest.Calm())
	terminal, out, done := start(t, src)
	out.wait(t, "9.003 bar")

	typed := func(s string) {
		if _, err := terminal.WriteString(s); err != nil {
			t.Fatal(err)
		}
	}
	expect := func(want live.Intent) {
		t.Helper()
		select {
		case got := <-src.asked:
			if got != want {
				t.Fatalf("asked for %T %v, want %T %v", got, got, want, want)
			}
		case <-time.After(10 * time.Second):
			t.Fatalf("%T was never asked for", want)
		}
	}

	typed("aarm\r") // the a opens the caution, the rest is the word: one burst
	expect(live.Arm{})
	src.set(tuitest.Filling())
	out.wait(t, "RAMPING")
	typed("s")
	out.wait(t, "go to pressure")
	typed("9.2 bar")
	out.wait(t, "6.800 bar below the rating of fibre seal")
	typed("\r")
	expect(live.GoTo{Target: 9.2e5})
	typed("\t")
	expect(live.Hold{})
	typed("\x1b[200~9 bar q\r\x1b[201~") // pasted by mistake: presses nothing
	typed("q")
	out.wait(t, "put on HOLD")
	typed("\r")
	expect(live.Hold{})
	select {
	case err := <-done:
		if err != nil {
			t.Fatalf("Run ends with %v, want nil", err)
		}
	case <-time.After(10 * time.Second):
		t.Fatal("Run does not end")
	}
	out.wait(t, "\x1b[?1049l") // the terminal is given back (xterm's alternate screen)
}

// explosive panics as soon as it is told to.
type explosive struct {
	*fake
	now atomic.Bool
}

func (e *explosive) Snapshot() *live.Snapshot {
	if e.now.Load() {
		panic("out of order")
	}
	return e.fake.Snapshot()
}

func TestPanicGivesTheTerminalBackAndHolds(t *testing.T) {
	src := &explosive{fake: newFake(tuitest.Calm())}
	_, out, done := start(t, src)
	out.wait(t, "9.003 bar")
	src.now.Store(true)
	src.set(tuitest.Calm())
	select {
	case err := <-done:
		if err == nil {
			t.Error("Run ends with nil after a panic, want an error")
		}
	case <-time.After(10 * time.Second):
		t.Fatal("Run does not end")
	}
	out.wait(t, "\x1b[?1049l")
	select {
	case got := <-src.asked:
		if got != live.Intent(live.Hold{}) {
			t.Errorf("asked for %T, want HOLD", got)
		}
	default:
		t.Error("HOLD was not asked for")
	}
}

func TestEndOfContextEndsQuietly(t *testing.T) {
	src := newFake(nil) // nothing known yet is no reason to fail
	ctx, cancel := context.WithCancel(context.Background())
	out := &screenful{more: make(chan struct{}, 1)}
	done := make(chan error, 1)
	go func() { done <- Run(ctx, src, Options{In: strings.NewReader(""), Out: out}) }()
	out.wait(t, "\x1b[?1049h")
	cancel()
	select {
	case err := <-done:
		if err != nil {
			t.Errorf("Run ends with %v, want nil", err)
		}
	case <-time.After(10 * time.Second):
		t.Fatal("Run does not end")
	}
}

func TestStyleForTerminal(t *testing.T) {
	for _, c := range []struct {
		env    map[string]string
		screen bench.Screen
		want   Style
	}{
		{map[string]string{"TERM": "xterm-256color", "LANG": "en_GB.UTF-8"}, bench.Screen{}, Style{Colours: frame.Palette}},
		{map[string]string{"TERM": "linux"}, bench.Screen{Background: "light"}, Style{Colours: frame.Sixteen, Light: true}},
		{map[string]string{"TERM": "xterm-256color", "NO_COLOR": "1"}, bench.Screen{}, Style{}},
		{map[string]string{"TERM": "xterm-256color", "LC_ALL": "C"}, bench.Screen{}, Style{Colours: frame.Palette, ASCII: true}},
		{map[string]string{"TERM": "dumb"}, bench.Screen{ASCII: true}, Style{ASCII: true}},
	} {
		got, err := StyleFor(c.screen, func(k string) string { return c.env[k] })
		if err != nil {
			t.Fatal(err)
		}
		c.want.Zone = time.Local
		if got != c.want {
			t.Errorf("style for %v is %+v, want %+v", c.env, got, c.want)
		}
	}
	if _, err := StyleFor(bench.Screen{TimeZone: "Nowhere/Land"}, func(string) string { return "" }); err == nil {
		t.Error("an unknown time zone is taken")
	}
}
