package main

import (
	"encoding/json"
	"errors"
	"io"
	"os/exec"
	"strings"
	"testing"
)

// TestArrows lists what every package imports and keeps the map of
// DEVELOPERS.md true.
func TestArrows(t *testing.T) {
	out, err := exec.Command("go", "list", "-json=ImportPath,Imports", "barline/...").Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	within := func(path string, roots ...string) bool {
		for _, r := range roots {
			if path == "barline/"+r || strings.HasPrefix(path, "barline/"+r+"/") {
				return true
			}
		}
		return false
	}
	// What each part may import of this project, besides its own tree.
	allowed := []struct {
		part string
		may  []string
	}{
		{"model/unit", nil},
		{"model/live", []string{"model/unit", "model/reading", "model/limit", "model/bench", "model/emission", "model/alarm",
			"model/trend", "model/flow", "model/fit", "model/calibration", "model/drift", "model/gas", "model/spectrum", "model/anchor"}},
		{"model", []string{"model"}},
		{"tui", []string{"model"}},
		{"device", []string{"model"}},
		{"logbook", []string{"model/reading", "model/clock", "model/unit"}},
		{"simulate", []string{"device/modbus", "device/scpi", "device/lines", "model/unit", "model/reading", "model/clock",
			"model/bench", "model/gas", "model/fibre", "model/pulse", "model/spectrum"}},
		{"cmd", []string{"model", "tui", "device", "logbook", "simulate"}},
	}
	dec := json.NewDecoder(strings.NewReader(string(out)))
	seen := 0
	for {
		var p struct {
			ImportPath string
			Imports    []string
		}
		if err := dec.Decode(&p); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			t.Fatal(err)
		}
		seen++
		for _, rule := range allowed {
			if !within(p.ImportPath, rule.part) {
				continue
			}
			for _, imp := range p.Imports {
				if strings.HasPrefix(imp, "barline/") && !within(imp, rule.part) && !within(imp, rule.may...) {
					t.Errorf("%s imports %s, which the map does not allow", p.ImportPath, imp)
				}
				if within(p.ImportPath, "model") && (imp == "os" || imp == "net" || imp == "time/tzdata" || imp == "io/fs" && !within(p.ImportPath, "model/bench")) {
					t.Errorf("%s imports %s: the model does no I/O", p.ImportPath, imp)
				}
			}
			break
		}
	}
	if seen < 10 {
		t.Fatalf("go list named %d packages, expected the whole program", seen)
	}
}
