package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"barline/model/bench"
)

// command runs one command line and returns its exit code and what it wrote.
func command(args ...string) (code int, stdout, stderr string) {
	var out, err bytes.Buffer
	code = run(context.Background(), args, strings.NewReader(""), &out, &err)
	return code, out.String(), err.String()
}

func benchFile(t *testing.T, text string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "heron.toml")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func TestCheckTakesItsOwnSample(t *testing.T) {
	code, sample, stderr := command("check", "--sample")
	if code != exitDone || stderr != "" {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	code, out, stderr := command("check", "-b", benchFile(t, sample))
	if code != exitDone || stderr != "" {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	for _, want := range []string{"setpoints up to 16 bar, the rating of fibre seal", "core 34 um", "19200 8E1", "input register 0, float32 ABCD", "an energy meter: 1.3 uJ is assumed"} {
		if !strings.Contains(out, want) {
			t.Errorf("the summary does not say %q:\n%s", want, out)
		}
	}
}

func TestCheckNamesEveryMistake(t *testing.T) {
	path := benchFile(t, strings.NewReplacer(`cells = "16 bar"`, `cells = "16"`, `loss = "1 dB/m"`, `los = "1 dB/m"`, `"Europe/Lisbon"`, ``).Replace(string(bench.Sample())))
	code, out, stderr := command("check", "-b", path)
	if code != exitUsage || out != "" {
		t.Errorf("exit %d, on the output %q", code, out)
	}
	lines := strings.Split(strings.TrimSpace(stderr), "\n")
	before, _, _ := strings.Cut(string(bench.Sample()), `cells = "16 bar"`)
	cells := strings.Count(before, "\n") + 1
	if len(lines) != 3 || !strings.HasPrefix(lines[0], "heron.toml:15:1: fibre.los is not a key") || !strings.HasPrefix(lines[1], fmt.Sprintf(`heron.toml:%d:9: limits.cells = "16"`, cells)) || !strings.HasSuffix(lines[2], "2 mistakes") {
		t.Errorf("said\n%s", stderr)
	}
	code, out, _ = command("check", "--json", "-b", path)
	var got checkedFile
	if err := json.Unmarshal([]byte(out), &got); err != nil || code != exitUsage {
		t.Fatalf("exit %d, %v in %s", code, err, out)
	}
	if got.OK || len(got.Mistakes) != 2 || got.Mistakes[1].Key != "limits.cells" || got.Mistakes[1].Line != cells {
		t.Errorf("JSON %+v", got)
	}
}

func TestCheckWrongUse(t *testing.T) {
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"check"}, "needs a bench file"},
		{[]string{"check", "bench.toml"}, `takes no argument, got "bench.toml"`},
		{[]string{"check", "-b", "no such file"}, "no such file"},
		{[]string{"check", "-b", "x", "--sample"}, "[bench sample]"},
		{[]string{"check", "-b", benchFile(t, strings.Replace(string(bench.Sample()), `"local"`, `"Mars/Olympus"`, 1))}, `screen.time_zone = "Mars/Olympus"`},
	} {
		code, out, stderr := command(c.args...)
		if (code != exitUsage && c.want != "[bench sample]") || code == exitDone || out != "" || !strings.Contains(stderr, c.want) {
			t.Errorf("%q: exit %d, output %q, error %q, want %q", c.args, code, out, stderr, c.want)
		}
	}
}
