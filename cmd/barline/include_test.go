package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"barline/model/bench"
)

// A bench whose instruments stand in files beside it is checked as one, and
// what goes into the record stands by itself.
func TestBenchOfSeveralFiles(t *testing.T) {
	dir := t.TempDir()
	head, rest, _ := strings.Cut(string(bench.Sample()), "[[instrument]]")
	_, tail, _ := strings.Cut(rest, "[emission]")
	write := func(name, text string) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	path := write("bench.toml", "include = [\"panel-serial.toml\", \"talking.toml\"]\n"+head+"[emission]"+tail)
	var files []string
	for _, name := range []string{"panel-serial.toml", "talking.toml"} {
		text, err := os.ReadFile(filepath.Join("testdata", "instruments", name))
		if err != nil {
			t.Fatal(err)
		}
		files = append(files, write(name, string(text)))
	}
	code, out, stderr := command("check", "-b", path)
	if code != exitDone || !strings.Contains(out, "spectrometer") || !strings.Contains(out, "gauges") {
		t.Fatalf("exit %d\n%s%s", code, out, stderr)
	}
	text, b, err := readBench(path)
	if err != nil {
		t.Fatal(err)
	}
	again, err := bench.Parse(text, "configuration in the record")
	if err != nil || len(again.Instrument) != len(b.Instrument) || len(b.Instrument) != 4 {
		t.Errorf("%d instruments, read again %v", len(b.Instrument), err)
	}
	if err := os.WriteFile(files[1], []byte("[[instrument]]\nname = \"gauge\"\nprotocoll = \"lines\"\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	code, _, stderr = command("check", "-b", path)
	if code != exitUsage || !strings.Contains(stderr, "talking.toml:3:1: instrument.protocoll is not a key") {
		t.Errorf("exit %d\n%s", code, stderr)
	}
	if err := os.Remove(files[0]); err != nil {
		t.Fatal(err)
	}
	code, _, stderr = command("check", "-b", path)
	if code != exitUsage || !strings.Contains(stderr, "bench.toml:1:1: include:") {
		t.Errorf("exit %d\n%s", code, stderr)
	}
}
