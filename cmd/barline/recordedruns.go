package main

import (
	"barline/model/anchor"
	"barline/model/emission"
	"barline/model/live"
)

// recordedRuns is what a record says of the full-field runs that anchored its
// predictions: each node record brings those that came since the one before.
type recordedRuns struct {
	base  *emission.Predictor
	bench *anchor.Bench // made when it is needed: it takes a tenth of a second
	nodes []anchor.Node
	wants int // nodes that the last record stood on
	built *emission.Predictor
	stale bool // built stands on fewer nodes
}

// take takes a node record.
func (r *recordedRuns) take(d live.NodeData) {
	r.nodes = append(r.nodes, d.Runs...)
	r.wants, r.stale = d.Nodes, true
}

// predictor returns the predictor that stood on the runs; nil where the record
// does not hold them all, or where they are not of its bench.
func (r *recordedRuns) predictor() *emission.Predictor {
	if !r.stale {
		return r.built
	}
	r.stale, r.built = false, nil
	if len(r.nodes) != r.wants || r.wants == 0 {
		return nil
	}
	if r.bench == nil {
		bench, err := r.base.Setup().AnchorBench()
		if err != nil {
			return nil
		}
		r.bench = bench
	}
	r.built, _ = r.base.Anchored(r.bench.Build(r.nodes))
	return r.built
}
