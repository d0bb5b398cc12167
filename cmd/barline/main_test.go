package main

import (
	"bufio"
	"encoding/json"
	"errors"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/creack/pty"
	"github.com/rogpeppe/go-internal/testscript"
)

// TestMain lets this test binary stand in for the program, so that scripts
// and kills drive a real process.
func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"barline": main})
}

func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir: "testdata/script",
		Setup: func(env *testscript.Env) error {
			env.Setenv("XDG_DATA_HOME", filepath.Join(env.WorkDir, "data"))
			env.Setenv("XDG_CACHE_HOME", filepath.Join(env.WorkDir, "cache"))
			return nil
		},
	})
}

// barline returns the command line of the program, which is found on PATH
// where testscript.Main put it.
func barline(t *testing.T, args ...string) *exec.Cmd {
	t.Helper()
	path, err := exec.LookPath("barline")
	if err != nil {
		t.Fatalf("no barline on PATH: %v", err)
	}
	cmd := exec.Command(path, args...)
	cmd.Env = append(os.Environ(), "XDG_DATA_HOME="+t.TempDir(), "XDG_CACHE_HOME="+t.TempDir())
	return cmd
}

// kills is how often TestKill pulls the plug: BARLINE_KILLS sets it for longer
// runs.
func kills(t *testing.T) int {
	n, err := strconv.Atoi(os.Getenv("BARLINE_KILLS"))
	if err != nil {
		return 2
	}
	return n
}

// A kill in the middle of a fill leaves a logbook that verifies up to its last
// whole record, and the next start appends to a new segment.
func TestKill(t *testing.T) {
	if testing.Short() {
		t.Skip("starts real processes")
	}
	dir := filepath.Join(t.TempDir(), "logbook")
	for i := range kills(t) {
		cmd := barline(t, "simulate", "--headless", "--for", "1h", "--speed", "20", "--logbook", dir)
		stderr, err := cmd.StderrPipe()
		if err != nil {
			t.Fatal(err)
		}
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		go io.Copy(io.Discard, stderr)
		awaitCommand(t, dir, i+1)
		if err := cmd.Process.Kill(); err != nil {
			t.Fatal(err)
		}
		cmd.Wait()

		out, err := barline(t, "log", "verify", dir).CombinedOutput()
		if err != nil {
			t.Fatalf("kill %d: verify: %v\n%s", i+1, err, out)
		}
		segments, err := filepath.Glob(filepath.Join(dir, "*.jsonl"))
		if err != nil || len(segments) != i+1 {
			t.Fatalf("kill %d: %d segments, want %d", i+1, len(segments), i+1)
		}
	}
}

// awaitCommand waits until the segment holds a command that moves gas.
func awaitCommand(t *testing.T, dir string, segment int) {
	t.Helper()
	deadline := time.After(30 * time.Second)
	poll := time.NewTicker(20 * time.Millisecond)
	defer poll.Stop()
	for {
		segments, _ := filepath.Glob(filepath.Join(dir, "*.jsonl"))
		if len(segments) >= segment {
			b, err := os.ReadFile(segments[segment-1])
			if err == nil && strings.Count(string(b), `"kind":"command"`) >= 3 {
				return
			}
		}
		select {
		case <-deadline:
			t.Fatalf("segment %d of %s holds no commands after 30 s", segment, dir)
		case <-poll.C:
		}
	}
}

// A run without a screen drives the real protocols over pseudo-terminals and
// ends with a prediction and a measurement.
func TestHeadlessRunMeasuresAndPredicts(t *testing.T) {
	if testing.Short() {
		t.Skip("starts a real process")
	}
	dir := filepath.Join(t.TempDir(), "logbook")
	cmd := barline(t, "simulate", "--headless", "--for", "150s", "--speed", "20", "--seed", "1", "--json", "--logbook", dir)
	var stderr strings.Builder
	cmd.Stderr = &stderr
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("%v\n%s", err, stderr.String())
	}
	var s summary
	if err := json.Unmarshal(out, &s); err != nil {
		t.Fatalf("%v in %s", err, out)
	}
	if s.CellAPa == nil || *s.CellAPa < 9.9e5 || *s.CellAPa > 10.1e5 {
		t.Errorf("cell A after the steps of the fill: want 10 bar: %s", out)
	}
	if s.PredictedNm == nil || s.MeasuredNm == nil || s.ResidualNm == nil {
		t.Fatalf("no prediction or no measurement: %s", out)
	}
	if *s.ResidualNm == 0 {
		t.Error("measured and predicted emission are the same: the truth is not hidden")
	}
	if s.Lost != 0 || s.Dropped != 0 {
		t.Errorf("%d records lost, %d readings dropped", s.Lost, s.Dropped)
	}
}

// The dashboard in a terminal that answers no question shows prediction and
// measurement within seconds, and leaves the terminal whole.
func TestDashboardInATerminal(t *testing.T) {
	if testing.Short() {
		t.Skip("starts a real process")
	}
	cmd := barline(t, "simulate", "--speed", "20", "--logbook", filepath.Join(t.TempDir(), "logbook"))
	cmd.Env = append(cmd.Env, "TERM=xterm-256color")
	tty, err := pty.StartWithSize(cmd, &pty.Winsize{Rows: 40, Cols: 120})
	if err != nil {
		t.Skipf("no pseudo-terminal here: %v", err)
	}
	defer tty.Close()
	started := time.Now()
	screen := make(chan string, 64)
	go func() {
		defer close(screen)
		r := bufio.NewReader(tty)
		buf := make([]byte, 1<<16)
		for {
			n, err := r.Read(buf)
			if err != nil {
				return
			}
			screen <- string(buf[:n])
		}
	}()
	var seen strings.Builder
	await := func(what string, words ...string) {
		t.Helper()
		deadline := time.After(30 * time.Second)
		for {
			missing := ""
			for _, w := range words {
				if !strings.Contains(seen.String(), w) {
					missing = w
				}
			}
			if missing == "" {
				return
			}
			select {
			case s, ok := <-screen:
				if !ok {
					t.Fatalf("%s: the program ended before it showed %q", what, missing)
				}
				seen.WriteString(s)
			case <-deadline:
				t.Fatalf("%s: no %q within 30 s on\n%s", what, missing, seen.String())
			}
		}
	}
	await("first frame", "bar")
	if late := time.Since(started); late > 4*time.Second {
		t.Errorf("first frame after %v: the start waits for the terminal", late)
	}
	await("prediction and measurement", "predicted", "measured", "nm")
	if err := cmd.Process.Signal(syscall.SIGTERM); err != nil {
		t.Fatal(err)
	}
	for s := range screen {
		seen.WriteString(s)
	}
	var exit *exec.ExitError
	if err := cmd.Wait(); err != nil && !errors.As(err, &exit) {
		t.Fatal(err)
	} else if err != nil {
		t.Errorf("exit code %d after SIGTERM, want 0", exit.ExitCode())
	}
	if !strings.Contains(seen.String(), "\x1b[?1049l") {
		t.Error("the alternate screen was left on")
	}
}
