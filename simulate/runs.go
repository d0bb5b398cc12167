package simulate

import (
	_ "embed"
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// runsText is what full-field propagation finds for the stated bench on a grid
// of pressure and pulse energy, and at four pressures with each input moved to
// either side: density, the place of compression, and the emission's centroid,
// width and share of the light, zero where there is none. TestWriteRuns
// computes it anew.
//
//go:embed runs.csv
var runsText string

// moved is an input, other than density and energy, that was not as stated.
type moved uint8

const (
	asStated moved = iota
	duration       // of the pulse, relative
	kerr           // nonlinear index, relative
	coreSize       // radius, relative
	wallSize       // thickness, relative
	index          // refractivity at the same density of atoms, relative
	movedCount
)

var movedText = [movedCount]string{"", "duration", "n2", "core", "wall", "index"}

// run is one of the stored runs. Where nothing was emitted centroid is 0.
type run struct {
	moved            moved
	by               float64 // relative
	pressure, energy float64 // Pa, J
	density          float64 // mol/m³, of the atoms
	compression      float64 // m from the input
	centroid, width  float64 // m
	conversion       float64
}

func readRuns() ([]run, error) {
	lines := strings.Split(strings.TrimSpace(runsText), "\n")
	runs := make([]run, 0, len(lines))
	for i, line := range lines[1:] {
		var v [8]float64
		fields := strings.Split(line, ",")
		if len(fields) != len(v)+1 {
			return nil, fmt.Errorf("stored run %d has %d fields, expected %d", i+1, len(fields), len(v)+1)
		}
		m := slices.Index(movedText[:], fields[0])
		if m < 0 {
			return nil, fmt.Errorf("stored run %d has %q moved, expected one of %q", i+1, fields[0], movedText)
		}
		for k, f := range fields[1:] {
			var err error
			if v[k], err = strconv.ParseFloat(f, 64); err != nil {
				return nil, fmt.Errorf("stored run %d: %w", i+1, err)
			}
		}
		runs = append(runs, run{moved(m), v[0], v[1] * bar, v[2] * 1e-6, v[3], v[4] * 1e-3, v[5] * 1e-9, v[6] * 1e-9, v[7]})
	}
	return runs, nil
}
