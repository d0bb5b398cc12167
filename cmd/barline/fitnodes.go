package main

import (
	"context"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"sync"
	"time"

	"barline/cmd/barline/fullfield"
	"barline/model/anchor"
	"barline/model/calibration"
	"barline/model/emission"
	"barline/model/unit"
)

// model returns the anchored prediction over the range of the points. Nodes
// come from the cache; those that are missing are computed, and kept.
func (f *fitFlags) model(ctx context.Context, s emission.Setup, points []calibration.Point, progress io.Writer) (*calibration.Model, error) {
	spec, err := specOf(s, points)
	if err != nil {
		return nil, err
	}
	b, err := anchor.New(spec)
	if err != nil {
		return nil, err
	}
	cache, err := os.UserCacheDir()
	if err != nil {
		return nil, fmt.Errorf("no folder for the full-field nodes: %w", err)
	}
	store, err := fullfield.OpenStore(filepath.Join(cache, "barline"), spec.Digest())
	if err != nil {
		return nil, err
	}
	nodes, _, err := store.Load()
	if err != nil {
		return nil, err
	}
	fresh, err := compute(ctx, b, b.Plan(nodes), store, progress)
	if err != nil {
		return nil, err
	}
	return calibration.NewModel(b.Build(append(nodes, fresh...)))
}

// Ranges are widened to these marks, so that another scan of the same bench
// finds its nodes in the cache.
const (
	nodeTemperature = 22 // degC
	nodePressure    = 0.5 * unit.Bar
)

// specOf is the bench over the range of the usable points and a little more,
// so that corrections have room.
func specOf(s emission.Setup, points []calibration.Point) (anchor.Spec, error) {
	low, high, n := math.Inf(1), math.Inf(-1), 0.0
	least, most := float64(s.Pulse.Energy)*0.8, float64(s.Pulse.Energy)*1.2
	for _, p := range points {
		if !p.Status.Usable() || !(p.Input.Pressure > 0) || !(p.Input.Temperature > 0) {
			continue
		}
		low, high, n = math.Min(low, float64(p.Input.Pressure)), math.Max(high, float64(p.Input.Pressure)), n+1
		if e := float64(p.Input.Energy); e > 0 {
			least, most = math.Min(least, e*0.9), math.Max(most, e*1.1)
		}
	}
	if n < 2 || !(high > low) {
		return anchor.Spec{}, fmt.Errorf("%.0f usable points between %v and %v: expected at least two pressures: %w", n, unit.Pascal(low), unit.Pascal(high), calibration.ErrPoints)
	}
	step := float64(nodePressure)
	from, to := math.Floor(0.98*low/step)*step, math.Ceil(1.02*high/step)*step
	return anchor.Spec{
		Gas: s.Gas, Fibre: s.Fibre, Pulse: s.Pulse, Plasma: s.Plasma, Temperature: unit.Celsius(nodeTemperature),
		Pressure: [2]unit.Pascal{unit.Pascal(math.Max(from, low/2)), unit.Pascal(to)},
		Energy:   [2]unit.Joule{unit.Joule(least), unit.Joule(most)},
	}, nil
}

// compute carries out full-field runs on all cores and keeps each as it comes.
func compute(ctx context.Context, b *anchor.Bench, tasks []anchor.Task, store *fullfield.Store, progress io.Writer) ([]anchor.Node, error) {
	if len(tasks) == 0 {
		return nil, nil
	}
	ctx, cancel := context.WithCancel(ctx)
	defer cancel()
	var (
		work  = make(chan anchor.Task)
		mu    sync.Mutex
		nodes []anchor.Node
		errs  []error
		wait  sync.WaitGroup
		start = time.Now()
	)
	for range min(runtime.GOMAXPROCS(0), len(tasks)) {
		wait.Add(1)
		go func() {
			defer wait.Done()
			for t := range work {
				n, err := b.Compute(ctx, t, nil)
				mu.Lock()
				if err == nil {
					err = store.Add(n)
					nodes = append(nodes, n)
				}
				if err != nil {
					errs = append(errs, err)
					cancel()
				} else if done := len(nodes); done%5 == 0 || done == len(tasks) {
					left := time.Since(start) / time.Duration(done) * time.Duration(len(tasks)-done)
					fmt.Fprintf(progress, "full-field run %d of %d, about %v left\n", done, len(tasks), left.Round(time.Second))
				}
				mu.Unlock()
			}
		}()
	}
	for _, t := range tasks {
		select {
		case work <- t:
		case <-ctx.Done():
		}
	}
	close(work)
	wait.Wait()
	if len(errs) > 0 {
		return nil, errs[0]
	}
	return nodes, ctx.Err()
}
