package main

import (
	"encoding/json"
	"path/filepath"
	"strings"
	"testing"
)

// The full-field runs of a fibre too short to emit take milliseconds. They are
// made once, kept, and say what they find.
func TestPredictAnchored(t *testing.T) {
	cache := t.TempDir()
	t.Setenv("XDG_CACHE_HOME", cache)
	t.Setenv("HOME", cache)
	t.Setenv("LocalAppData", cache)
	args := bore("--length", "5 mm", "--pressure", "9 bar", "--emission", "anchored", "--json")
	code, out, stderr := command(args...)
	if code != exitDone || !strings.Contains(stderr, "full-field runs, kept in "+cache) {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var got struct {
		Emission *float64 `json:"emission_nm"`
		Why      string   `json:"why"`
		Sources  struct {
			Emission string `json:"emission"`
		} `json:"sources"`
	}
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	if got.Emission != nil || got.Sources.Emission != "anchored" || !strings.Contains(got.Why, "no full-field run near") {
		t.Errorf("got %+v", got)
	}
	files, err := filepath.Glob(filepath.Join(cache, "*", "nodes", "*.jsonl"))
	if more, _ := filepath.Glob(filepath.Join(cache, "*", "*", "*", "nodes", "*.jsonl")); err != nil || len(files)+len(more) != 1 {
		t.Errorf("kept in %v, %v", files, err)
	}
	code, again, stderr := command(args...)
	if code != exitDone || stderr != "" || again != out {
		t.Errorf("the second time: exit %d, %s\n%s\nwant\n%s", code, stderr, again, out)
	}
}

func TestPredictAnchoredRefuses(t *testing.T) {
	t.Setenv("XDG_CACHE_HOME", t.TempDir())
	code, _, stderr := command(bore("--sweep", "pressure=1bar:12bar:1bar", "--emission", "anchored")...)
	if code != exitFailed || !strings.Contains(stderr, "range") {
		t.Errorf("exit %d, %s", code, stderr)
	}
}
