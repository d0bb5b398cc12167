package main

import (
	"bufio"
	"encoding/json"
	"os"
	"sync/atomic"
	"testing"
	"time"

	"barline/cmd/barline/fullfield"
	"barline/cmd/barline/loop"
	"barline/logbook"
	"barline/model/anchor"
	"barline/model/bench"
	"barline/model/clock"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// heronRuns are full-field runs of the demo bench.
func heronRuns(t *testing.T) []anchor.Node {
	t.Helper()
	f, err := os.Open("../../model/emission/testdata/heron-nodes.jsonl")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	var nodes []anchor.Node
	for s := bufio.NewScanner(f); s.Scan(); {
		var n anchor.Node
		if err := json.Unmarshal(s.Bytes(), &n); err != nil {
			t.Fatal(err)
		}
		nodes = append(nodes, n)
	}
	return nodes
}

// anchoredRecord writes the logbook of a bench whose pressure rises while
// full-field runs come in, the first many at once and then one by one. What
// passes through spoil instead of the node records it was given.
func anchoredRecord(t *testing.T, spoil func(live.NodeData) live.NodeData) string {
	t.Helper()
	dir := t.TempDir()
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	s, err := newSession(b, bench.Sample())
	if err != nil {
		t.Fatal(err)
	}
	clk := clock.NewFake(time.Date(2026, 12, 1, 11, 0, 0, 0, time.UTC))
	clk.Advance(time.Second)
	s.clock, s.folder = clk, dir
	book, err := logbook.Open(dir, logbook.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if err := s.open(book); err != nil {
		t.Fatal(err)
	}
	w := &wire{now: clk.Now}
	l := loop.New(loop.Options{Bench: b, Core: s.core, State: s.state, Clock: clk, Book: spoilt{lent{book}, spoil}, Wire: w, Folder: dir})
	w.answer = l.Answer
	// The worker's own way of telling, without the worker.
	var newest atomic.Pointer[guided]
	a := &anchoring{session: s, base: s.predictor.Clone(), loop: l, newest: &newest}
	runs, err := a.base.Setup().AnchorBench()
	if err != nil {
		t.Fatal(err)
	}
	nodes := heronRuns(t)
	known := 6
	for i := range 60 {
		for _, role := range []reading.Role{reading.CellAPressure, reading.CellBPressure} {
			l.Reading(reading.Reading{Channel: role.String(), Role: role, Value: 7e5 + 8e3*float64(i), Taken: clk.Now(), Status: reading.Good})
		}
		if i >= 5 && i%3 == 0 && known < len(nodes) {
			known++
			a.tell(fullfield.Anchored{Map: runs.Build(nodes[:known]), Nodes: nodes[:known], Done: known, Planned: len(nodes)})
		}
		for range 10 {
			clk.Advance(100 * time.Millisecond)
			l.Turn()
		}
	}
	if err := book.Close(); err != nil {
		t.Fatal(err)
	}
	return dir
}

// spoilt is a logbook into which node records go changed.
type spoilt struct {
	lent
	spoil func(live.NodeData) live.NodeData
}

func (b spoilt) Append(at reading.Stamp, kind string, data any) (uint64, error) {
	if d, ok := data.(live.NodeData); ok && b.spoil != nil {
		data = b.spoil(d)
	}
	return b.lent.Append(at, kind, data)
}

func replayed(t *testing.T, dir string) (code int, found rederived) {
	t.Helper()
	code, out, stderr := command("replay", "--check", "--json", dir)
	if err := json.Unmarshal([]byte(out), &found); err != nil {
		t.Fatalf("%v: %q %q", err, out, stderr)
	}
	return code, found
}

// Predictions that leaned on full-field runs are found again from the record
// alone, to the bit.
func TestAnchoredPredictionsAreDerivedAgain(t *testing.T) {
	dir := anchoredRecord(t, nil)
	byAnswer := map[string]int{}
	for r, err := range logbook.Records(dir, logbook.Filter{Kinds: []string{string(live.KindPrediction)}}) {
		if err != nil {
			t.Fatal(err)
		}
		var d live.PredictionData
		if err := r.Decode(&d); err != nil {
			t.Fatal(err)
		}
		byAnswer[d.Answer]++
	}
	if byAnswer[emission.Anchored.String()] < 20 || byAnswer[emission.Estimate.String()] < 3 {
		t.Fatalf("predictions by answer: %v, want many anchored ones and some before them", byAnswer)
	}
	code, found := replayed(t, dir)
	if code != 0 || found.NotDerived != 0 || found.Differ != 0 || found.Exact != found.Predictions || found.Predictions < 23 {
		t.Errorf("exit code %d, %+v; want every prediction to the bit", code, found)
	}
}

// A record whose runs were left out, as older ones are, is not taken for
// wrong; one whose runs were changed is.
func TestRunsThatAreNotInTheRecord(t *testing.T) {
	code, found := replayed(t, anchoredRecord(t, func(d live.NodeData) live.NodeData { d.Runs = nil; return d }))
	if code != 0 || found.NotDerived < 20 || found.Differ != 0 {
		t.Errorf("without runs: exit code %d, %+v; want the anchored ones not derived", code, found)
	}
	moved := func(d live.NodeData) live.NodeData {
		d.Runs = append([]anchor.Node(nil), d.Runs...)
		for i := range d.Runs {
			if len(d.Runs[i].Lobes) > 0 {
				d.Runs[i].Lobes = append([]anchor.Lobe(nil), d.Runs[i].Lobes...)
				d.Runs[i].Lobes[0].Centroid += 0.1 * unit.Nanometre
			}
		}
		return d
	}
	if code, found := replayed(t, anchoredRecord(t, moved)); code != exitFailed || found.Differ < 20 {
		t.Errorf("with changed runs: exit code %d, %+v; want them found", code, found)
	}
}
