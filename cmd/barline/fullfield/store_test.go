package fullfield

import (
	"os"
	"path/filepath"
	"reflect"
	"testing"
	"time"

	"barline/model/anchor"
	"barline/model/unit"
)

func node(density float64) anchor.Node {
	return anchor.Node{Density: density, Energy: 1.3 * unit.Microjoule, Ionised: 1e-4,
		Lobes: []anchor.Lobe{{Centroid: 265.25e-9, Peak: 264e-9, Width: 20e-9, Conversion: 0.08}}}
}

func open(t *testing.T, folder, digest string) *Store {
	t.Helper()
	s, err := OpenStore(folder, digest)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func load(t *testing.T, s *Store) ([]anchor.Node, int) {
	t.Helper()
	nodes, skipped, err := s.Load()
	if err != nil {
		t.Fatal(err)
	}
	return nodes, skipped
}

func add(t *testing.T, s *Store, n anchor.Node) {
	t.Helper()
	if err := s.Add(n); err != nil {
		t.Fatal(err)
	}
}

func TestNodesComeBack(t *testing.T) {
	folder := filepath.Join(t.TempDir(), "deep", "cache")
	s := open(t, folder, "abc")
	if nodes, skipped := load(t, s); len(nodes) != 0 || skipped != 0 {
		t.Errorf("a new store holds %d nodes and %d bad lines", len(nodes), skipped)
	}
	// Two processes at once: two stores of the same file.
	other := open(t, folder, "abc")
	add(t, s, node(300))
	add(t, other, node(400))
	nodes, skipped := load(t, open(t, folder, "abc"))
	if want := []anchor.Node{node(300), node(400)}; !reflect.DeepEqual(nodes, want) || skipped != 0 {
		t.Errorf("got %+v and %d bad lines, want %+v", nodes, skipped, want)
	}
	if nodes, _ := load(t, open(t, folder, "def")); len(nodes) != 0 {
		t.Error("another digest shares the nodes")
	}
}

// Cut at every byte: whole lines before the cut are there, the torn one is
// not, and a node added behind it is.
func TestTornFile(t *testing.T) {
	folder := t.TempDir()
	s := open(t, folder, "abc")
	add(t, s, node(300))
	whole, err := os.ReadFile(s.Path())
	if err != nil {
		t.Fatal(err)
	}
	add(t, s, node(400))
	both, err := os.ReadFile(s.Path())
	if err != nil {
		t.Fatal(err)
	}
	for cut := range both {
		if err := os.WriteFile(s.Path(), both[:cut], 0o644); err != nil {
			t.Fatal(err)
		}
		want := 0
		if cut >= len(whole)-1 {
			want = 1
		}
		if cut >= len(both)-1 {
			want = 2
		}
		if nodes, _ := load(t, s); len(nodes) != want {
			t.Fatalf("cut at byte %d: %d nodes, want %d", cut, len(nodes), want)
		}
		add(t, s, node(500))
		if nodes, _ := load(t, s); len(nodes) != want+1 || nodes[want].Density != 500 {
			t.Fatalf("cut at byte %d, then added: %d nodes, want %d", cut, len(nodes), want+1)
		}
	}
}

func TestFlippedBitIsNoNode(t *testing.T) {
	s := open(t, t.TempDir(), "abc")
	add(t, s, node(300))
	text, err := os.ReadFile(s.Path())
	if err != nil {
		t.Fatal(err)
	}
	for i := range text {
		bad := append([]byte(nil), text...)
		bad[i] ^= 1
		if err := os.WriteFile(s.Path(), bad, 0o644); err != nil {
			t.Fatal(err)
		}
		if nodes, _ := load(t, s); len(nodes) == 1 && !reflect.DeepEqual(nodes[0], node(300)) {
			t.Fatalf("bit 0 of byte %d flipped: read as %+v", i, nodes[0])
		}
	}
}

func TestFolderStaysBelowItsSize(t *testing.T) {
	folder := t.TempDir()
	now := time.Now()
	for i, name := range []string{"old", "middle", "new"} {
		path := filepath.Join(folder, name+suffix)
		if err := os.WriteFile(path, make([]byte, mostStored/2), 0o644); err != nil {
			t.Fatal(err)
		}
		at := now.Add(time.Duration(i-3) * time.Hour)
		if err := os.Chtimes(path, at, at); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.WriteFile(filepath.Join(folder, "not ours"), nil, 0o644); err != nil {
		t.Fatal(err)
	}
	open(t, folder, "abc")
	for name, want := range map[string]bool{"old" + suffix: false, "middle" + suffix: true, "new" + suffix: true, "not ours": true} {
		if _, err := os.Stat(filepath.Join(folder, name)); (err == nil) != want {
			t.Errorf("%s is there: %v, want %v", name, err == nil, want)
		}
	}
}
