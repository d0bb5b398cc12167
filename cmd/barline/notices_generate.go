//go:build ignore

// Command generate copies the licence notices of every module that go.mod
// requires from the module cache into the folder licences, one folder a
// module, and that of Go itself. Run it with go generate in this folder after
// go.mod has changed.
package main

import (
	"encoding/json"
	"fmt"
	"log"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
)

type module struct{ Path, Version, Dir string }

func main() {
	log.SetFlags(0)
	log.SetPrefix("licences: ")
	var mod struct{ Require []module }
	read(&mod, "go", "mod", "edit", "-json")
	folders := []module{{Path: "std", Dir: strings.TrimSpace(string(output("go", "env", "GOROOT")))}}
	for _, m := range mod.Require {
		var got module
		read(&got, "go", "mod", "download", "-json", m.Path+"@"+m.Version)
		folders = append(folders, module{m.Path, m.Version, got.Dir})
	}
	old, err := os.ReadDir("licences")
	check(err)
	for _, e := range old {
		if e.IsDir() {
			check(os.RemoveAll(filepath.Join("licences", e.Name())))
		}
	}
	for _, m := range folders {
		if copyFiles(m, "LICENSE", "LICENCE", "COPYING", "NOTICE", "PATENTS", "UNLICENSE") > 0 {
			continue
		}
		// Some modules state their licence in the introduction alone.
		if copyFiles(m, "README") == 0 {
			log.Fatalf("%s %s carries no licence file", m.Path, m.Version)
		}
		log.Printf("%s %s has no licence file; its README stands in", m.Path, m.Version)
	}
}

// copyFiles copies the files of one module whose names start so and returns
// how many there were.
func copyFiles(m module, starts ...string) (copied int) {
	entries, err := os.ReadDir(m.Dir)
	check(err)
	to := filepath.Join("licences", filepath.FromSlash(m.Path))
	for _, e := range entries {
		name := strings.ToUpper(e.Name())
		if e.IsDir() || strings.HasSuffix(name, ".GO") {
			continue
		}
		for _, start := range starts {
			if strings.HasPrefix(name, start) {
				text, err := os.ReadFile(filepath.Join(m.Dir, e.Name()))
				check(err)
				check(os.MkdirAll(to, 0o755))
				check(os.WriteFile(filepath.Join(to, strings.TrimSuffix(e.Name(), filepath.Ext(e.Name()))), text, 0o644))
				copied++
				break
			}
		}
	}
	return copied
}

func output(name string, args ...string) []byte {
	cmd := exec.Command(name, args...)
	cmd.Stderr = os.Stderr
	out, err := cmd.Output()
	check(err)
	return out
}

func read(into any, name string, args ...string) {
	if err := json.Unmarshal(output(name, args...), into); err != nil {
		log.Fatal(fmt.Errorf("%s %s: %w", name, strings.Join(args, " "), err))
	}
}

func check(err error) {
	if err != nil {
		log.Fatal(err)
	}
}
