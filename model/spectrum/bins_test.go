package spectrum

import (
	"math"
	"testing"

	"barline/model/unit"
)

// Bins lose no energy and leave the emission where it is, however coarse.
func TestBinsKeepTheEnergy(t *testing.T) {
	d := hills(0.01, hill{1.829, 0.05, 90}, hill{7, 0.15, 10})
	for _, count := range []int{40, 160, 640, 5000} {
		b, err := NewBins(150*unit.Nanometre, 4*unit.Micrometre, count)
		if err != nil {
			t.Fatal(err)
		}
		of, middles := b.Of(d), b.Middles()
		sum, moment, ultraviolet := 0.0, 0.0, 0.0
		for i, e := range of {
			width := float64(b.edges[i+1] - b.edges[i])
			sum += e * width
			if middles[i] < 500*unit.Nanometre {
				ultraviolet += e * width
				moment += e * width * float64(middles[i])
			}
		}
		if math.Abs(sum-100) > 0.1 || math.Abs(ultraviolet-10) > 0.02 {
			t.Errorf("%d bins hold %v, of it %v in the ultraviolet; want 100 and 10", count, sum, ultraviolet)
		}
		// Mean wavelength of a Gaussian in ω: 2πc/ω (1 + σ²/ω²) to first order.
		want := nm(7) * (1 + 0.15*0.15/49)
		if got := moment / ultraviolet * 1e9; count > 100 && math.Abs(got-want) > 0.6 {
			t.Errorf("%d bins: mean wavelength %.2f nm, want %.2f nm", count, got, want)
		}
	}
}

func TestBinsRefuse(t *testing.T) {
	for _, c := range []struct {
		from, to unit.Metre
		count    int
	}{{0, 1, 4}, {1, 1, 4}, {1, 2, 0}, {unit.Metre(math.NaN()), 1, 4}, {1, unit.Metre(math.Inf(1)), 4}} {
		if _, err := NewBins(c.from, c.to, c.count); err == nil {
			t.Errorf("%+v was taken", c)
		}
	}
	b, err := NewBins(200*unit.Nanometre, 300*unit.Nanometre, 4)
	if err != nil {
		t.Fatal(err)
	}
	for _, d := range []Density{{}, {First: 1e15, Spacing: 1e12, Energy: []float64{1}}, {First: 1e10, Spacing: 1e9, Energy: []float64{1, 1, 1}}} {
		for i, e := range b.Of(d) {
			if e != 0 {
				t.Errorf("bin %d of %+v holds %v", i, d, e)
			}
		}
	}
}
