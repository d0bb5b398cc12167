package main

import (
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// Every command block of README is run, in its order, in an empty folder that
// holds the files that README asks to be saved.
func TestReadmeIsTrue(t *testing.T) {
	if testing.Short() {
		t.Skip("runs real commands")
	}
	text, err := os.ReadFile("../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	program, err := exec.LookPath("barline")
	if err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	blocks := regexp.MustCompile("(?s)```(sh|toml)\n(.*?)```").FindAllStringSubmatch(string(text), -1)
	commands := 0
	for _, b := range blocks {
		if b[1] == "toml" {
			if err := os.WriteFile(filepath.Join(dir, "morning.toml"), []byte(b[2]), 0o600); err != nil {
				t.Fatal(err)
			}
			continue
		}
		for _, line := range strings.Split(strings.TrimSpace(b[2]), "\n") {
			if strings.HasPrefix(line, "go ") {
				continue // this test would not run without them
			}
			rest, ok := strings.CutPrefix(line, "./barline ")
			if !ok {
				t.Errorf("README block %q is not a command of barline", line)
				continue
			}
			cmd := exec.Command("sh", "-c", program+" "+rest)
			cmd.Dir = dir
			cmd.Env = append(os.Environ(), "XDG_DATA_HOME="+dir+"/data", "XDG_CACHE_HOME="+dir+"/cache")
			if out, err := cmd.CombinedOutput(); err != nil {
				t.Errorf("%s: %v\n%s", line, err, out)
			}
			commands++
		}
	}
	if commands < 10 {
		t.Errorf("README has %d commands, expected its tour", commands)
	}
}
