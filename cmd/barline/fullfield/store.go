package fullfield

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"hash/crc32"
	"io/fs"
	"os"
	"path/filepath"
	"sort"

	"barline/model/anchor"
)

// mostStored bounds the size of a cache folder in bytes; the files used
// longest ago go first.
const mostStored = 16 << 20

const suffix = ".nodes.jsonl"

// Store keeps the nodes of one digest in a file of the cache folder.
//
// The file is lines of JSON, each a node with the CRC-32C of its text. A line
// is appended by one write, so that several processes may share the file; a
// torn or foreign line is skipped.
type Store struct {
	path string
}

// line is one line of the file.
type line struct {
	Node json.RawMessage `json:"node"`
	CRC  string          `json:"crc"`
}

var castagnoli = crc32.MakeTable(crc32.Castagnoli)

func checksum(text []byte) string { return fmt.Sprintf("%08x", crc32.Checksum(text, castagnoli)) }

// OpenStore makes the folder where it is missing, keeps it below its size, and
// returns the store of a digest.
func OpenStore(folder, digest string) (*Store, error) {
	if err := os.MkdirAll(folder, 0o755); err != nil {
		return nil, fmt.Errorf("cache of full-field nodes: %w", err)
	}
	s := &Store{path: filepath.Join(folder, digest+suffix)}
	return s, prune(folder, s.path)
}

// Path returns the file.
func (s *Store) Path() string { return s.path }

// Load returns the nodes of the file and how many of its lines were no nodes.
func (s *Store) Load() (nodes []anchor.Node, skipped int, err error) {
	text, err := os.ReadFile(s.path)
	if errors.Is(err, fs.ErrNotExist) {
		return nil, 0, nil
	}
	if err != nil {
		return nil, 0, fmt.Errorf("cache of full-field nodes: %w", err)
	}
	for _, l := range bytes.Split(text, []byte("\n")) {
		if len(l) == 0 {
			continue
		}
		n, ok := decode(l)
		if !ok {
			skipped++
			continue
		}
		nodes = append(nodes, n)
	}
	return nodes, skipped, nil
}

func decode(text []byte) (n anchor.Node, ok bool) {
	var l line
	if json.Unmarshal(text, &l) != nil || checksum(l.Node) != l.CRC {
		return n, false
	}
	return n, json.Unmarshal(l.Node, &n) == nil
}

// Add appends a node.
func (s *Store) Add(n anchor.Node) error {
	node, err := json.Marshal(n)
	if err != nil {
		return fmt.Errorf("cache of full-field nodes: %w", err)
	}
	text, err := json.Marshal(line{node, checksum(node)})
	if err != nil {
		return fmt.Errorf("cache of full-field nodes: %w", err)
	}
	f, err := os.OpenFile(s.path, os.O_CREATE|os.O_APPEND|os.O_WRONLY, 0o644)
	if err != nil {
		return fmt.Errorf("cache of full-field nodes: %w", err)
	}
	// The line feed in front ends a line that another process left torn.
	_, err = f.Write(append(append([]byte{'\n'}, text...), '\n'))
	if err = errors.Join(err, f.Close()); err != nil {
		return fmt.Errorf("cache of full-field nodes: %w", err)
	}
	return nil
}

// prune removes the files used longest ago until the folder is below its size.
// A file that another process removed first is no error.
func prune(folder, keep string) error {
	paths, err := filepath.Glob(filepath.Join(folder, "*"+suffix))
	if err != nil {
		return fmt.Errorf("cache of full-field nodes: %w", err)
	}
	type file struct {
		path string
		info fs.FileInfo
	}
	var files []file
	total := int64(0)
	for _, p := range paths {
		if info, err := os.Stat(p); err == nil {
			files = append(files, file{p, info})
			total += info.Size()
		}
	}
	sort.Slice(files, func(i, j int) bool { return files[i].info.ModTime().Before(files[j].info.ModTime()) })
	for _, f := range files {
		if total <= mostStored {
			break
		}
		if f.path == keep {
			continue
		}
		if err := os.Remove(f.path); err != nil && !errors.Is(err, fs.ErrNotExist) {
			return fmt.Errorf("cache of full-field nodes: %w", err)
		}
		total -= f.info.Size()
	}
	return nil
}
