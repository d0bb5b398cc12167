// Command vulndb lays the Go vulnerability reports of a module out as the
// database that govulncheck reads, so that the check works where only modules
// can be fetched:
//
//	go run ./.ci/vulndb MODULE_FOLDER OUT
package main

import (
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"sort"
)

// report is the part of an OSV entry that the indexes need
// (go.dev/doc/security/vuln/database).
type report struct {
	ID       string   `json:"id"`
	Modified string   `json:"modified"`
	Aliases  []string `json:"aliases"`
	Affected []struct {
		Package struct {
			Name string `json:"name"`
		} `json:"package"`
		Ranges []struct {
			Events []struct {
				Fixed string `json:"fixed"`
			} `json:"events"`
		} `json:"ranges"`
	} `json:"affected"`
}

type vuln struct {
	ID       string   `json:"id"`
	Modified string   `json:"modified"`
	Fixed    string   `json:"fixed,omitempty"`
	Aliases  []string `json:"aliases,omitempty"`
}

type module struct {
	Path  string `json:"path"`
	Vulns []vuln `json:"vulns"`
}

func main() {
	if len(os.Args) != 3 {
		fmt.Fprintln(os.Stderr, "usage: vulndb MODULE_FOLDER OUT")
		os.Exit(2)
	}
	if err := lay(os.Args[1], os.Args[2]); err != nil {
		fmt.Fprintln(os.Stderr, "vulndb:", err)
		os.Exit(1)
	}
}

func lay(from, out string) error {
	files, err := filepath.Glob(filepath.Join(from, "data", "osv", "*.json"))
	if err != nil || len(files) == 0 {
		return fmt.Errorf("%s holds no reports: %v", from, err)
	}
	for _, dir := range []string{"ID", "index"} {
		if err := os.MkdirAll(filepath.Join(out, dir), 0o755); err != nil {
			return err
		}
	}
	modules := map[string]*module{}
	var all []vuln
	newest := ""
	for _, f := range files {
		text, err := os.ReadFile(f)
		if err != nil {
			return err
		}
		var r report
		if err := json.Unmarshal(text, &r); err != nil {
			return fmt.Errorf("%s: %w", f, err)
		}
		if err := os.WriteFile(filepath.Join(out, "ID", r.ID+".json"), text, 0o644); err != nil {
			return err
		}
		newest = max(newest, r.Modified)
		all = append(all, vuln{ID: r.ID, Modified: r.Modified, Aliases: r.Aliases})
		for _, a := range r.Affected {
			m := modules[a.Package.Name]
			if m == nil {
				m = &module{Path: a.Package.Name}
				modules[m.Path] = m
			}
			v := vuln{ID: r.ID, Modified: r.Modified}
			for _, rg := range a.Ranges {
				for _, e := range rg.Events {
					v.Fixed = max(v.Fixed, e.Fixed)
				}
			}
			if n := len(m.Vulns); n == 0 || m.Vulns[n-1].ID != v.ID {
				m.Vulns = append(m.Vulns, v)
			}
		}
	}
	list := make([]*module, 0, len(modules))
	for _, m := range modules {
		list = append(list, m)
	}
	sort.Slice(list, func(i, j int) bool { return list[i].Path < list[j].Path })
	for name, v := range map[string]any{
		"db": map[string]string{"modified": newest}, "modules": list, "vulns": all,
	} {
		text, err := json.Marshal(v)
		if err != nil {
			return err
		}
		if err := os.WriteFile(filepath.Join(out, "index", name+".json"), text, 0o644); err != nil {
			return err
		}
	}
	return nil
}
