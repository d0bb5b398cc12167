package pulse

import (
	"math"
	"strconv"
	"testing"
	"time"

	"barline/model/unit"
)

// BenchmarkEvaluation times one evaluation of the slope, two transforms and
// the plasma among it, on a field that ionises; the shortest time of many is
// reported beside the mean, since other work on the machine only lengthens it.
func BenchmarkEvaluation(b *testing.B) {
	for _, points := range []int{1 << 12, 1 << 13, 1 << 14} {
		b.Run(strconv.Itoa(points), func(b *testing.B) {
			g, err := NewGrid(points, 0.15*unit.Femtosecond, 180*unit.Nanometre, 4*unit.Micrometre)
			if err != nil {
				b.Fatal(err)
			}
			rate, err := NewRateTable(1e10, 2e11, steep)
			if err != nil {
				b.Fatal(err)
			}
			m := Medium{Area: 4.3e-10, Chi3: Chi3FromN2(8e-23), Length: 0.1, Slowness: 1 / lightSpeed,
				Atoms: []Atoms{{rate, 2.2e26, 15.76 * elementaryCharge}}}
			for _, w := range g.Frequencies() {
				m.Beta[0] = append(m.Beta[0], w/lightSpeed)
			}
			in, err := Launch(g, m, Pulse{Wavelength: benchWavelength, Duration: 35 * unit.Femtosecond, Energy: 9 * unit.Microjoule})
			if err != nil {
				b.Fatal(err)
			}
			s, err := NewSolver(g, m, in, 1e-4)
			if err != nil {
				b.Fatal(err)
			}
			s.prepare(1e-4)
			shortest := math.Inf(1)
			for b.Loop() {
				start := time.Now()
				s.stage(3, 1e-4)
				shortest = min(shortest, time.Since(start).Seconds())
			}
			b.ReportMetric(shortest*1e6, "best-µs")
		})
	}
}
