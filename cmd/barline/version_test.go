package main

import (
	"encoding/json"
	"io"
	"io/fs"
	"os"
	"regexp"
	"strings"
	"testing"
	"testing/fstest"
)

// Every module that go.mod requires has its notice here, so that whatever is
// linked in has one; go generate in this folder brings them up to date.
func TestEveryModuleHasItsNotice(t *testing.T) {
	mod, err := os.ReadFile("../../go.mod")
	if err != nil {
		t.Fatal(err)
	}
	modules := []string{"std"}
	for _, m := range regexp.MustCompile(`(?m)^\s+(\S+) v\S+`).FindAllSubmatch(mod, -1) {
		modules = append(modules, string(m[1]))
	}
	if len(modules) < 10 {
		t.Fatalf("only %d modules found in go.mod", len(modules))
	}
	for _, m := range modules {
		if err := writeNotices(io.Discard, licences, []string{m}); err != nil {
			t.Error(err)
		}
	}
}

func TestNoticesAreWholeOrRefused(t *testing.T) {
	files := fstest.MapFS{"licences/a.org/b/LICENSE": {Data: []byte("do as you like\n")}, "licences/a.org/b/sub/LICENSE": {Data: []byte("another\n")}}
	var out strings.Builder
	if err := writeNotices(&out, fs.FS(files), []string{"a.org/b"}); err != nil || !strings.Contains(out.String(), "do as you like") || strings.Contains(out.String(), "another") {
		t.Errorf("%v, wrote %q", err, out.String())
	}
	for _, m := range []string{"a.org/c", "a.org"} {
		if err := writeNotices(io.Discard, files, []string{m}); err == nil {
			t.Errorf("%s has no notice, and nobody minded", m)
		}
	}
}

func TestVersion(t *testing.T) {
	code, out, stderr := command("version", "--json")
	var b build
	if err := json.Unmarshal([]byte(out), &b); code != exitDone || err != nil || b.Version == "" || !strings.HasPrefix(b.Go, "go") {
		t.Errorf("exit %d, %v, %s, %s", code, err, out, stderr)
	}
	if code, out, _ := command("version"); code != exitDone || !strings.HasPrefix(out, "barline ") {
		t.Errorf("exit %d, %q", code, out)
	}
	if code, out, _ := command("version", "--licences"); code != exitDone || !strings.Contains(out, "the Go standard library") {
		t.Errorf("exit %d, %d bytes", code, len(out))
	}
}
