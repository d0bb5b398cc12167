package link

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"time"
)

// parrot gives back what is written to it.
type parrot struct{ said []byte }

func (p *parrot) Read(b []byte, _ time.Duration) (int, error) {
	if len(p.said) == 0 {
		return 0, os.ErrDeadlineExceeded
	}
	n := copy(b, p.said)
	p.said = p.said[n:]
	return n, nil
}

func (p *parrot) Write(b []byte) (int, error) {
	p.said = append(p.said, b...)
	return len(b), nil
}

func (p *parrot) Close() error { return nil }

func TestTrafficFileKeepsEveryByte(t *testing.T) {
	name := filepath.Join(t.TempDir(), "traffic")
	tap, err := openTap(&parrot{}, name)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := tap.Write([]byte{0x01, 0x04, 0xFF}); err != nil {
		t.Fatal(err)
	}
	buf := make([]byte, 2)
	for range 3 { // the last finds nothing
		tap.Read(buf, 0)
	}
	if err := tap.Close(); err != nil {
		t.Fatal(err)
	}
	text, err := os.ReadFile(name)
	want := regexp.MustCompile(`^\S+Z > 01 04 FF\n\S+Z < 01 04\n\S+Z < FF\n$`)
	if err != nil || !want.Match(text) {
		t.Errorf("%q, %v", text, err)
	}
	stamp, _, _ := strings.Cut(string(text), " ")
	if _, err := time.Parse(time.RFC3339Nano, stamp); err != nil {
		t.Error(err)
	}
}

func TestTrafficFilesAreRotated(t *testing.T) {
	dir := t.TempDir()
	name := filepath.Join(dir, "traffic")
	tap, err := openTap(&parrot{}, name)
	if err != nil {
		t.Fatal(err)
	}
	defer tap.Close()
	tap.size = 1000
	for range 400 {
		if _, err := tap.Write([]byte("0123456789")); err != nil {
			t.Fatal(err)
		}
	}
	files, err := os.ReadDir(dir)
	if err != nil || len(files) != trafficKept+1 {
		t.Errorf("%d files, want %d: %v", len(files), trafficKept+1, files)
	}
	for _, f := range files {
		if info, err := f.Info(); err != nil || info.Size() > 1100 {
			t.Errorf("%s has %d bytes, %v", f.Name(), info.Size(), err)
		}
	}
}

func TestTrafficFileThatCannotBeOpened(t *testing.T) {
	if _, err := openTap(&parrot{}, filepath.Join(t.TempDir(), "no", "folder")); err == nil {
		t.Error("opened")
	}
}
