package main

import (
	"fmt"
	"os"
	"path/filepath"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"barline/logbook"
)

func newLogList() *cobra.Command {
	var asJSON bool
	cmd := &cobra.Command{
		Use:   "list DIR",
		Short: "List the logbooks in a folder, or what one logbook holds",
		Args:  oneFolder,
		RunE: func(cmd *cobra.Command, args []string) error {
			dirs, err := logbooksIn(args[0])
			if err != nil {
				return err
			}
			if len(dirs) == 0 {
				return fmt.Errorf("%s holds no logbook", args[0])
			}
			var books []listedBook
			for _, dir := range dirs {
				s, err := logbook.Summarise(dir)
				if err != nil {
					return err
				}
				books = append(books, bookOf(s))
			}
			if asJSON {
				return printJSON(cmd.OutOrStdout(), books)
			}
			return printBooks(cmd, books)
		},
	}
	cmd.Flags().BoolVar(&asJSON, "json", false, "print one JSON array")
	return cmd
}

// logbooksIn returns dir where it is a logbook, else the folders in it that
// are.
func logbooksIn(dir string) ([]string, error) {
	n, err := logbook.Segments(dir)
	if err != nil {
		return nil, err
	}
	if n > 0 {
		return []string{dir}, nil
	}
	entries, err := os.ReadDir(dir)
	if err != nil {
		return nil, err
	}
	var dirs []string
	for _, e := range entries {
		below := filepath.Join(dir, e.Name())
		if !e.IsDir() {
			continue
		}
		if n, err := logbook.Segments(below); err == nil && n > 0 {
			dirs = append(dirs, below)
		}
	}
	return dirs, nil
}

// listedBook is a logbook as list prints it.
type listedBook struct {
	Folder   string          `json:"folder"`
	Segments int             `json:"segments"`
	Records  uint64          `json:"records"`
	Bytes    int64           `json:"bytes_on_disk"`
	From     string          `json:"from"`
	To       string          `json:"to"`
	Kinds    []string        `json:"kinds"`
	Parts    []listedSegment `json:"parts"`
	Damage   int             `json:"damaged_segments"`
}

type listedSegment struct {
	Name    string `json:"name"`
	Records uint64 `json:"records"`
	Bytes   int64  `json:"bytes_on_disk"`
	From    string `json:"from"`
	To      string `json:"to"`
	State   string `json:"state"`
}

func bookOf(s logbook.Summary) listedBook {
	b := listedBook{Folder: s.Folder, Segments: len(s.Segments), Kinds: s.Kinds}
	for _, part := range s.Segments {
		b.Records += part.Records
		b.Bytes += part.FileBytes
		if part.From != "" && (b.From == "" || part.From < b.From) {
			b.From = part.From
		}
		b.To = max(b.To, part.To)
		if part.State == logbook.Damaged {
			b.Damage++
		}
		b.Parts = append(b.Parts, listedSegment{part.Name, part.Records, part.FileBytes, part.From, part.To, string(part.State)})
	}
	return b
}

func printBooks(cmd *cobra.Command, books []listedBook) error {
	table := tabwriter.NewWriter(cmd.OutOrStdout(), 0, 0, 2, ' ', 0)
	if len(books) == 1 {
		for _, p := range books[0].Parts {
			fmt.Fprintf(table, "%s\t%d records\t%.1f MB\t%s\t%s\n", p.Name, p.Records, float64(p.Bytes)/1e6, span(p.From, p.To), p.State)
		}
	}
	for _, b := range books {
		fmt.Fprintf(table, "%s\t%d records\t%.1f MB\t%s\n", b.Folder, b.Records, float64(b.Bytes)/1e6, span(b.From, b.To))
	}
	return table.Flush()
}
