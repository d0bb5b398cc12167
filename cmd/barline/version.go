package main

import (
	"embed"
	"fmt"
	"io"
	"io/fs"
	"path"
	"runtime"
	"runtime/debug"
	"strings"

	"github.com/spf13/cobra"
)

//go:generate go run notices_generate.go

// licences holds the notices of every module that go.mod requires, one folder
// a module; version --licences prints those that are linked in.
//
//go:embed licences
var licences embed.FS

// build is what version prints.
type build struct {
	Version  string   `json:"version"`
	Revision string   `json:"revision,omitempty"`
	Time     string   `json:"revision_time,omitempty"` // RFC 3339, UTC
	Modified bool     `json:"modified"`
	Go       string   `json:"go"`
	System   string   `json:"system"`
	Modules  []string `json:"modules"` // path@version of what is linked in
}

func newVersion() *cobra.Command {
	var asJSON, notices bool
	cmd := &cobra.Command{
		Use:   "version",
		Short: "Build information, and the notices of the libraries inside",
		Args:  noArgs,
		RunE: func(cmd *cobra.Command, args []string) error {
			info, ok := debug.ReadBuildInfo()
			if !ok {
				return fmt.Errorf("this program was built without module information")
			}
			out := cmd.OutOrStdout()
			if notices {
				return writeNotices(out, licences, linked(info))
			}
			b := describe(info)
			if asJSON {
				return writeObject(out, b)
			}
			fmt.Fprintf(out, "barline %s\n", b.Version)
			if b.Revision != "" {
				state := ""
				if b.Modified {
					state = ", with changes"
				}
				fmt.Fprintf(out, "revision %s of %s%s\n", b.Revision, b.Time, state)
			}
			fmt.Fprintf(out, "%s on %s, %s inside\n", b.Go, b.System, counted(len(b.Modules), "library module"))
			return nil
		},
	}
	cmd.Flags().BoolVar(&asJSON, "json", false, "print the result as one JSON object")
	cmd.Flags().BoolVar(&notices, "licences", false, "print the licence notices of the libraries inside")
	cmd.MarkFlagsMutuallyExclusive("json", "licences")
	return cmd
}

// buildVersion returns the version that records name.
func buildVersion() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "(unversioned)"
	}
	b := describe(info)
	if b.Revision != "" {
		return b.Version + " " + b.Revision
	}
	return b.Version
}

func describe(info *debug.BuildInfo) build {
	b := build{Version: info.Main.Version, Go: info.GoVersion, System: runtime.GOOS + "/" + runtime.GOARCH, Modules: []string{}}
	if b.Version == "" {
		b.Version = "(unversioned)"
	}
	for _, s := range info.Settings {
		switch s.Key {
		case "vcs.revision":
			b.Revision = s.Value
		case "vcs.time":
			b.Time = s.Value
		case "vcs.modified":
			b.Modified = s.Value == "true"
		}
	}
	for _, m := range info.Deps {
		b.Modules = append(b.Modules, m.Path+"@"+m.Version)
	}
	return b
}

// linked returns the module paths inside the program; std is Go's own library.
func linked(info *debug.BuildInfo) []string {
	paths := []string{"std"}
	for _, m := range info.Deps {
		paths = append(paths, m.Path)
	}
	return paths
}

// writeNotices prints the notices of the modules, and fails where one has
// none: a notice left out is a promise broken.
func writeNotices(w io.Writer, from fs.FS, modules []string) error {
	for _, m := range modules {
		folder := path.Join("licences", m)
		files, err := fs.ReadDir(from, folder)
		if err != nil {
			return fmt.Errorf("no notice of module %s is inside: run go generate and build again", m)
		}
		printed := 0
		for _, f := range files {
			if f.IsDir() { // the folder of a module whose path goes on
				continue
			}
			text, err := fs.ReadFile(from, path.Join(folder, f.Name()))
			if err != nil {
				return err
			}
			printed++
			fmt.Fprintf(w, "%s — %s\n%s\n\n%s\n\n", title(m), f.Name(), strings.Repeat("─", 72), strings.TrimSpace(string(text)))
		}
		if printed == 0 {
			return fmt.Errorf("no notice of module %s is inside: run go generate and build again", m)
		}
	}
	return nil
}

func title(module string) string {
	if module == "std" {
		return "the Go standard library"
	}
	return module
}
