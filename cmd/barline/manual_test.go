package main

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

// Every command that a person sees has a page, and the system's own reader of
// man pages finds nothing to complain of.
func TestManual(t *testing.T) {
	dir := t.TempDir()
	if code, _, stderr := command("manual", dir); code != exitDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	pages, err := filepath.Glob(filepath.Join(dir, "man1", "*.1"))
	if err != nil || len(pages) < 14 {
		t.Fatalf("%d pages (%v), expected one for each command", len(pages), err)
	}
	for _, cmd := range described(newRoot()) {
		name := strings.ReplaceAll(cmd.CommandPath(), " ", "-")
		text, err := os.ReadFile(filepath.Join(dir, "man1", name+".1"))
		if err != nil {
			t.Error(err)
			continue
		}
		for _, want := range []string{".SH NAME", ".SH SYNOPSIS", ".SH EXIT STATUS", ".SH CAUTIONS"} {
			if !bytes.Contains(text, []byte(want)) {
				t.Errorf("%s: no %s", name, want)
			}
		}
	}
	plan, err := os.ReadFile(filepath.Join(dir, "man1", "barline-plan.1"))
	if err != nil || !bytes.Contains(plan, []byte(`\-\-target`)) || bytes.Contains(plan, []byte(`\-\-pressure\fR`)) {
		t.Errorf("the page of plan lacks --target or shows a hidden flag (%v)", err)
	}
	for _, name := range []string{"barline.bash", "_barline", "barline.fish", "barline.ps1"} {
		if text, err := os.ReadFile(filepath.Join(dir, "completions", name)); err != nil || !bytes.Contains(text, []byte("barline")) {
			t.Errorf("completion %s: %v", name, err)
		}
	}
	if groff, err := exec.LookPath("groff"); err == nil {
		for _, page := range pages {
			out, err := exec.Command(groff, "-man", "-ww", "-z", "-Tutf8", page).CombinedOutput()
			if err != nil || len(out) > 0 {
				t.Errorf("groff of %s: %v\n%s", filepath.Base(page), err, out)
			}
		}
	} else {
		t.Log("groff is not here: the pages were not read back")
	}
}

func TestRoffIsEscaped(t *testing.T) {
	for text, want := range map[string]string{
		"a-b":          `a\-b`,
		`C:\x`:         `C:\ex`,
		".SH is text":  `\&.SH is text`,
		"one\n'two":    "one\n\\&'two",
		"plain, text.": "plain, text.",
	} {
		if got := escaped(text); got != want {
			t.Errorf("escaped %q is %q, expected %q", text, got, want)
		}
	}
}
