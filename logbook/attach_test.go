package logbook

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func TestAttachments(t *testing.T) {
	dir := t.TempDir()
	b, err := Open(dir, Options{})
	if err != nil {
		t.Fatal(err)
	}
	spectrum := []byte("wavelength_m,counts\r\n2.65e-07,1200\r\n")
	a, err := b.Attach(spectrum, ".csv")
	if err != nil {
		t.Fatal(err)
	}
	if again, err := b.Attach(spectrum, ".csv"); err != nil || again != a {
		t.Errorf("a second time: %+v, %v", again, err)
	}
	if _, err := b.Attach(spectrum, "/../x"); err == nil {
		t.Error("a suffix that leaves the folder was taken")
	}
	b.Append(stampAt(0), "step", struct {
		Step     int        `json:"step"`
		Spectrum Attachment `json:"spectrum"`
	}{1, a})
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
	if r := sound(t, dir); len(r.Notices) > 0 {
		t.Errorf("notices %q", r.Notices)
	}
	if got, err := ReadAttachment(dir, a); err != nil || string(got) != string(spectrum) {
		t.Errorf("read back %q, %v", got, err)
	}
	for _, wrong := range []Attachment{{File: "../x"}, {File: "spectra/../lock"}, {File: "spectra/none.csv"}, {File: a.File, SHA256: "00"}} {
		if got, err := ReadAttachment(dir, wrong); err == nil {
			t.Errorf("%+v was read: %q", wrong, got)
		}
	}
	name := filepath.Join(dir, a.File)
	if got, err := os.ReadFile(name); err != nil || string(got) != string(spectrum) {
		t.Errorf("%q, %v", got, err)
	}
	if err := os.WriteFile(name, spectrum[1:], 0o644); err != nil {
		t.Fatal(err)
	}
	expectAttached(t, dir, "has digest")
	if err := os.Remove(name); err != nil {
		t.Fatal(err)
	}
	expectAttached(t, dir, "names spectra/")
}

func expectAttached(t *testing.T, dir, what string) {
	t.Helper()
	for _, deep := range []bool{false, true} {
		r, err := Verify(dir, deep)
		if err != nil || len(r.Damage) != 1 || r.Damage[0].Kind != Attached || !strings.Contains(r.Damage[0].Text, what) {
			t.Errorf("deep %v: %v %v, expected one with %q", deep, r.Damage, err, what)
		}
	}
}
