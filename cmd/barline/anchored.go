package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"

	"barline/cmd/barline/fullfield"
	"barline/model/anchor"
	"barline/model/emission"
)

// cacheFolder returns where this user's full-field nodes are kept:
// XDG_CACHE_HOME or its equal on the system.
func cacheFolder() (string, error) {
	dir, err := os.UserCacheDir()
	if err != nil {
		return "", fmt.Errorf("no folder for the cache of full-field nodes: %w", err)
	}
	return filepath.Join(dir, "barline", "nodes"), nil
}

// anchored returns p anchored around the inputs. What the cache does not hold
// is computed on all cores, with a progress bar on a terminal.
func anchored(ctx context.Context, stderr io.Writer, p *emission.Predictor, inputs []emission.Input) (*emission.Predictor, error) {
	bench, err := p.Setup().AnchorBench()
	if err != nil {
		return nil, err
	}
	r, err := densities(p, inputs)
	if err != nil {
		return nil, err
	}
	nodes, err := nodesOver(ctx, stderr, bench, r, bench.Quick)
	if err != nil {
		return nil, err
	}
	return p.Anchored(bench.Build(nodes))
}

// nodesOver returns the bench's nodes that the cache holds and those that the
// plan of the range still wants.
func nodesOver(ctx context.Context, stderr io.Writer, b *anchor.Bench, r anchor.Range, plan func([]anchor.Node, anchor.Range) []anchor.Task) ([]anchor.Node, error) {
	folder, err := cacheFolder()
	if err != nil {
		return nil, err
	}
	store, err := fullfield.OpenStore(folder, b.Spec().Digest())
	if err != nil {
		return nil, err
	}
	nodes, _, err := store.Load()
	if err != nil {
		return nil, err
	}
	tasks := plan(nodes, r)
	if len(tasks) == 0 {
		return nodes, nil
	}
	fmt.Fprintf(stderr, "%s, kept in %s\n", counted(len(tasks), "full-field run"), store.Path())
	bar := newBar(stderr)
	defer bar.clear()
	more, err := fullfield.Fill(ctx, b, store, tasks, func(done int) {
		bar.draw(float64(done)/float64(len(tasks)), fmt.Sprintf(", run %d of %d", done, len(tasks)))
	})
	if err != nil && !errors.Is(err, context.Canceled) {
		err = fmt.Errorf("anchoring: %w", err)
	}
	return append(nodes, more...), err
}

// densities returns the range of density of the inputs. Inputs that are no gas
// are left to the prediction, which says why.
func densities(p *emission.Predictor, inputs []emission.Input) (anchor.Range, error) {
	r := anchor.Range{From: math.Inf(1)}
	for _, in := range inputs {
		state, err := p.Medium().At(in.Pressure, in.Temperature, in.Air)
		if err != nil || state.Density == 0 {
			continue
		}
		r.From, r.To = min(r.From, float64(state.Density)), max(r.To, float64(state.Density))
	}
	if r.To == 0 {
		return r, errors.New("anchoring: there is no gas to anchor at")
	}
	const wide = 2.5 // over which the lattice would need too many runs
	if r.To > wide*wide*r.From {
		return r, fmt.Errorf("anchoring: densities from %.4g to %.4g mol/m3, expected a range of at most 1 to %.3g", r.From, r.To, wide*wide)
	}
	return r, nil
}
