package calibration_test

import (
	"bufio"
	"context"
	"encoding/json"
	"errors"
	"os"
	"runtime"
	"sync"
	"testing"

	"barline/model/anchor"
	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/emission"
	"barline/model/unit"
)

// heronRange holds the densities from 7.3 to 12.7 bar.
var heronRange = anchor.Range{From: 299, To: 522}

func heronBench(t testing.TB) *anchor.Bench {
	t.Helper()
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	setup, err := emission.SetupFromBench(b)
	if err != nil {
		t.Fatal(err)
	}
	a, err := setup.AnchorBench()
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// heronModel returns what a program at Heron knows: its bench file and the
// full-field runs made from it, stored by TestWriteNodes.
func heronModel(t testing.TB) *calibration.Model {
	t.Helper()
	m, err := calibration.NewModel(heronBench(t).Build(storedNodes(t, "testdata/heron-nodes.jsonl")))
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// storedNodes reads nodes, one a line; none where there is no such file.
func storedNodes(t testing.TB, name string) (nodes []anchor.Node) {
	t.Helper()
	f, err := os.Open(name)
	if errors.Is(err, os.ErrNotExist) {
		return nil
	}
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	for s := bufio.NewScanner(f); s.Scan(); {
		var n anchor.Node
		if err := json.Unmarshal(s.Bytes(), &n); err != nil {
			t.Fatal(err)
		}
		nodes = append(nodes, n)
	}
	return nodes
}

// TestWriteNodes adds to the file what it lacks of the nodes of Heron, half a
// minute of one core for all:
//
//	BARLINE_NODES=$PWD/model/calibration/testdata/heron-nodes.jsonl go test ./model/calibration -run TestWriteNodes -timeout 1h
func TestWriteNodes(t *testing.T) {
	name := os.Getenv("BARLINE_NODES")
	if name == "" {
		t.Skip("BARLINE_NODES names no file")
	}
	b := heronBench(t)
	have := storedNodes(t, name)
	tasks := b.Plan(have, heronRange)
	nodes := make([]anchor.Node, len(tasks))
	var wait sync.WaitGroup
	next := make(chan int)
	for range runtime.GOMAXPROCS(0) {
		wait.Go(func() {
			for i := range next {
				n, err := b.Compute(context.Background(), tasks[i], nil)
				if err != nil {
					t.Error(err)
				}
				nodes[i] = n
			}
		})
	}
	for i := range tasks {
		next <- i
	}
	close(next)
	wait.Wait()
	f, err := os.Create(name)
	if err != nil {
		t.Fatal(err)
	}
	encoder := json.NewEncoder(f)
	nodes = append(have, nodes...)
	for _, n := range nodes {
		if err := encoder.Encode(n); err != nil {
			t.Fatal(err)
		}
	}
	if err := f.Close(); err != nil {
		t.Fatal(err)
	}
	t.Logf("%d nodes", len(nodes))
}

func input(bar, energy float64) emission.Input {
	return emission.Input{Pressure: unit.Pascal(bar) * unit.Bar, Temperature: 295.15, Energy: unit.Joule(energy)}
}
