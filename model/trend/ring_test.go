package trend

import (
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"
)

func TestEmptyRingHasNoView(t *testing.T) {
	if v := NewRing().View(); v != nil {
		t.Fatalf("view of an empty ring is %v, want nil", v)
	}
	var v *View
	if l := v.Since(0); l.Buckets != nil {
		t.Fatalf("level of no view is %v, want the zero level", l)
	}
}

func TestNaNAndInfinityNeverEnter(t *testing.T) {
	r := NewRing()
	r.Add(time.Second, math.NaN())
	r.Add(time.Second, math.Inf(1))
	if r.View() != nil {
		t.Fatal("NaN or infinity entered the ring")
	}
	r.Add(time.Second, 3)
	r.Add(time.Second, math.NaN())
	b := r.View().Levels[0].Buckets[0]
	if b.Count != 1 || b.Mean != 3 {
		t.Fatalf("bucket %+v, want one value of 3", b)
	}
}

func TestGapIsBucketsWithoutCount(t *testing.T) {
	r := NewRing()
	r.Add(0, 1)
	r.Add(time.Second, 2)
	got := r.View().Levels[0].Buckets
	if len(got) != 6 {
		t.Fatalf("%d buckets of 200 ms from 0 s to 1 s, want 6", len(got))
	}
	for i, b := range got[1:5] {
		if b.Count != 0 {
			t.Errorf("bucket %d holds %d values, want a gap", i+1, b.Count)
		}
	}
}

// The slower and plainer way: keep every value and fold those of one bucket.
func TestAgainstKeepingEverything(t *testing.T) {
	type value struct {
		t time.Duration
		v float64
	}
	rapid.Check(t, func(t *rapid.T) {
		r := NewRing()
		var all []value
		now := time.Duration(0)
		for range rapid.IntRange(1, 400).Draw(t, "n") {
			step := rapid.SampledFrom([]time.Duration{
				0, 7 * time.Millisecond, 210 * time.Millisecond, 11 * time.Second, 4 * time.Hour, 50 * 24 * time.Hour, -time.Second,
			}).Draw(t, "step")
			now = max(0, now+step)
			v := rapid.Float64Range(-1e7, 1e7).Draw(t, "v")
			r.Add(now, v)
			all = append(all, value{now, v})
			if rapid.Bool().Draw(t, "look") {
				r.View() // must not disturb later ones
			}
		}
		newest := time.Duration(0)
		for _, x := range all {
			newest = max(newest, x.t)
		}
		// One more refresh interval of the coarsest level, so that no bucket lags.
		for i := range r.levels {
			r.levels[i].copy = nil
		}
		for i, l := range r.View().Levels {
			if want := int64(extents[i].count); int64(len(l.Buckets)) > want {
				t.Fatalf("level %v has %d buckets, more than %d", l.Width, len(l.Buckets), want)
			}
			if last := l.Buckets[len(l.Buckets)-1]; newest < last.Start || newest >= last.Start+l.Width {
				t.Fatalf("level %v ends at %v, newest value is of %v", l.Width, last.Start, newest)
			}
			for k, b := range l.Buckets {
				if k > 0 && b.Start != l.Buckets[k-1].Start+l.Width {
					t.Fatalf("level %v: bucket %d starts at %v after %v", l.Width, k, b.Start, l.Buckets[k-1].Start)
				}
				// Values that came too late for the ring may be missing: they
				// can only lie in buckets that had already been dropped.
				n, low, high, sum := 0, math.Inf(1), math.Inf(-1), 0.0
				for _, x := range all {
					if x.t >= b.Start && x.t < b.Start+l.Width {
						n, low, high, sum = n+1, min(low, x.v), max(high, x.v), sum+x.v
					}
				}
				if b.Count != n {
					t.Fatalf("level %v, bucket of %v: %d values, want %d", l.Width, b.Start, b.Count, n)
				}
				if n > 0 && (b.Min != low || b.Max != high || math.Abs(b.Mean-sum/float64(n)) > 1e-6) {
					t.Fatalf("level %v, bucket of %v: %+v, want %g %g %g", l.Width, b.Start, b, low, high, sum/float64(n))
				}
			}
		}
	})
}

func TestOldViewStaysAsItWas(t *testing.T) {
	r := NewRing()
	r.Add(0, 1)
	old := r.View()
	for i := range 5000 {
		r.Add(time.Duration(i)*100*time.Millisecond, 7)
		if i%10 == 0 {
			r.View()
		}
	}
	for _, l := range old.Levels {
		if len(l.Buckets) != 1 || l.Buckets[0].Max != 1 {
			t.Fatalf("level %v of an old view is now %+v", l.Width, l.Buckets)
		}
	}
}

func TestSincePicksTheFinestThatReachesBack(t *testing.T) {
	r := NewRing()
	for s := range 3 * 3600 {
		r.Add(time.Duration(s)*time.Second, float64(s))
	}
	v, now := r.View(), 3*time.Hour
	for _, c := range []struct{ back, width time.Duration }{
		{time.Minute, 200 * time.Millisecond},
		{2 * time.Minute, 200 * time.Millisecond},
		{10 * time.Minute, 2 * time.Second},
		{2 * time.Hour, 20 * time.Second},
		{100 * time.Hour, 20 * time.Second}, // nothing is older than the first value
	} {
		if got := v.Since(now - c.back).Width; got != c.width {
			t.Errorf("level for %v back is %v, want %v", c.back, got, c.width)
		}
	}
}

func TestAddAllocatesNothing(t *testing.T) {
	r := NewRing()
	now := time.Duration(0)
	if n := testing.AllocsPerRun(1000, func() { now += 10 * time.Millisecond; r.Add(now, 9) }); n != 0 {
		t.Fatalf("Add allocates %v times", n)
	}
}

func BenchmarkAdd(b *testing.B) {
	r := NewRing()
	b.ReportAllocs()
	for i := range b.N {
		r.Add(time.Duration(i)*time.Millisecond, 9e5)
	}
}

// A day at 1 Hz, then a view every 50 ms of bench time.
func BenchmarkView(b *testing.B) {
	r := NewRing()
	now := time.Duration(0)
	for range 86400 {
		now += time.Second
		r.Add(now, 9e5)
	}
	b.ReportAllocs()
	b.ResetTimer()
	for range b.N {
		now += 50 * time.Millisecond
		r.Add(now, 9e5)
		r.View()
	}
}
