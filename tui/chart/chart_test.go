package chart

import (
	"math"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"barline/model/trend"
	"barline/tui/frame"
)

func same(v float64) float64 { return v }

func labels(ticks []Tick) string {
	var l []string
	for _, t := range ticks {
		l = append(l, t.Label)
	}
	return strings.Join(l, " ")
}

func TestTicksAreRound(t *testing.T) {
	for _, c := range []struct {
		lo, hi float64
		most   int
		want   string
	}{
		{0, 10, 5, "0 5 10"}, // steps of 2 would be six
		{0, 10, 6, "0 2 4 6 8 10"},
		{8.97, 9.04, 4, "8.98 9.00 9.02 9.04"},
		{-1.3, 0.4, 4, "−1.0 −0.5 0.0"},
		{236, 301, 7, "240 250 260 270 280 290 300"},
		{9.0001, 9.0002, 3, "9.00010 9.00015 9.00020"},
	} {
		got := Ticks(Between(c.lo, c.hi), c.most)
		if len(got) > c.most {
			t.Errorf("%g to %g: %d ticks, at most %d wanted", c.lo, c.hi, len(got), c.most)
		}
		if labels(got) != c.want {
			t.Errorf("%g to %g: ticks %q, want %q", c.lo, c.hi, labels(got), c.want)
		}
	}
}

func TestRoundedHoldsAndStandsStill(t *testing.T) {
	if a, b := Between(8.9712, 9.0433).Rounded(), Between(8.9718, 9.0431).Rounded(); a != b {
		t.Errorf("two ranges a hair apart are rounded to %v and %v", a, b)
	}
	rapid.Check(t, func(t *rapid.T) {
		r := Between(rapid.Float64().Draw(t, "lo"), rapid.Float64().Draw(t, "hi"))
		got := r.Rounded()
		if got.Empty() != r.Empty() {
			t.Fatalf("%v is rounded to %v", r, got)
		}
		span := r.Hi - r.Lo
		if hair := 1e-9 * span; got.Lo > r.Lo+hair || got.Hi < r.Hi-hair {
			t.Fatalf("%v is rounded to %v, which does not hold it", r, got)
		}
		if got.Hi-got.Lo > 1.3*span && span > 1e-12*math.Abs(r.Hi) {
			t.Fatalf("%v is rounded to %v, which is much wider", r, got)
		}
	})
}

func TestTicksHoldForAnyRange(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		r := Between(rapid.Float64().Draw(t, "lo"), rapid.Float64().Draw(t, "hi"))
		most := rapid.IntRange(0, 50).Draw(t, "most")
		ticks := Ticks(r, most)
		if len(ticks) > most {
			t.Fatalf("%d ticks, at most %d wanted", len(ticks), most)
		}
		for i, k := range ticks {
			if hair := 1e-6 * (r.Hi - r.Lo); !(k.At >= r.Lo-hair && k.At <= r.Hi+hair) {
				t.Fatalf("tick at %g outside %g to %g", k.At, r.Lo, r.Hi)
			}
			if i > 0 && !(k.At > ticks[i-1].At) {
				t.Fatalf("ticks do not ascend: %v", ticks)
			}
		}
	})
}

// Every label of a time axis finds its place below the axis.
func TestTimeTicksAreAllDrawn(t *testing.T) {
	clock := time.Date(2026, 12, 1, 16, 12, 0, 0, time.UTC)
	for _, span := range []time.Duration{time.Minute, 5 * time.Minute, 30 * time.Minute, 6 * time.Hour, 3 * 24 * time.Hour, 30 * 24 * time.Hour} {
		end := 40 * 24 * time.Hour
		ticks := TimeTicks(end, span, true, clock, 8)
		f := frame.New(80, 6, frame.Style{})
		New(f.Area(), Axes{X: Between((end - span).Seconds(), end.Seconds()), Y: Between(0, 1), XTicks: ticks, LabelWidth: 4}).Done()
		drawn := 0
		for _, k := range ticks {
			if strings.Contains(f.String(), k.Label) {
				drawn++
			}
		}
		if len(ticks) < 3 || drawn < len(ticks)-1 { // one may lie across the end
			t.Errorf("%v: %d of the labels %q are drawn:\n%s", span, drawn, labels(ticks), f)
		}
	}
}

func TestTimeTicksFollowTheClockOnTheWall(t *testing.T) {
	zone := time.FixedZone("half", 5*3600+1800)
	clock := time.Date(2026, 12, 1, 16, 12, 0, 0, zone)
	if got := labels(TimeTicks(time.Hour, 30*time.Minute, true, clock, 4)); got != "15:50 16:00 16:10" {
		t.Errorf("ticks of half an hour are %q", got)
	}
	if got := labels(TimeTicks(time.Hour, 2*time.Minute, true, clock, 4)); got != "−90 s −60 s −30 s" {
		t.Errorf("ticks of two minutes are %q", got)
	}
	if got := labels(TimeTicks(time.Hour, 2*time.Minute, false, clock, 4)); got != "16:10:00 16:10:30 16:11:00 16:11:30 16:12:00" {
		t.Errorf("ticks of two minutes in the past are %q", got)
	}
}

// A spike of one value among ten thousand is in the picture, however narrow.
func TestSpikeIsNeverLost(t *testing.T) {
	for spike := range 100 {
		l := trend.Level{Width: 100 * time.Millisecond}
		for i := range 10_000 {
			v := 1.0
			if i == spike*97 {
				v = 9
			}
			l.Buckets = append(l.Buckets, trend.Bucket{Start: time.Duration(i) * l.Width, Min: 1, Max: v, Mean: 1, Count: 1})
		}
		f := frame.New(30, 10, frame.Style{})
		p := New(f.Area(), Axes{X: Between(0, 1000), Y: Between(0, 10)})
		p.HistoryOf(l, same, time.Second, frame.Measured)
		p.Done()
		found := false
		for x := range 30 {
			found = found || f.At(x, 1).Rune > 0x2800 && f.At(x, 1).Rune < 0x2900
		}
		if !found {
			t.Fatalf("a spike at %d of 10000 is not drawn:\n%s", spike*97, f)
		}
	}
}

func TestGapStaysOpen(t *testing.T) {
	l := trend.Level{Width: time.Second}
	for i := range 100 {
		b := trend.Bucket{Start: time.Duration(i) * time.Second}
		if i < 40 || i >= 60 {
			b.Min, b.Max, b.Mean, b.Count = 5, 5, 5, 1
		}
		l.Buckets = append(l.Buckets, b)
	}
	f := frame.New(51, 10, frame.Style{})
	p := New(f.Area(), Axes{X: Between(0, 100), Y: Between(0, 10)})
	p.HistoryOf(l, same, 2*time.Second, frame.Measured)
	p.Done()
	for x := range 51 {
		drawn := false
		for y := range 10 {
			drawn = drawn || f.At(x, y).Rune > 0x2800 && f.At(x, y).Rune < 0x2900
		}
		if seconds := float64(x-1) * 2; seconds > 42 && seconds < 56 && drawn {
			t.Fatalf("column %d lies in the gap and is drawn:\n%s", x, f)
		}
	}
	if !strings.Contains(f.String(), string(rune(0x2800+0x09))) && !strings.ContainsRune(f.String(), '⠤') && !strings.ContainsRune(f.String(), '⠒') {
		t.Fatalf("nothing is drawn beside the gap:\n%s", f)
	}
}

// The dots of a straight line lie where the straight line does.
func TestLineGoesWhereItShould(t *testing.T) {
	f := frame.New(20, 10, frame.Style{})
	d := newDots(f.Area())
	d.line(0, 0, 39, 39, frame.Plain)
	for i := range 40 {
		if d.bits[i/4*20+i/2]&bit[i%4][i%2] == 0 {
			t.Errorf("dot %d of the diagonal is missing", i)
		}
	}
	n := 0
	for _, b := range d.bits {
		for ; b != 0; b &= b - 1 {
			n++
		}
	}
	if n != 40 {
		t.Errorf("%d dots, want 40", n)
	}
}

func anything(t *rapid.T, name string) float64 {
	return rapid.OneOf(
		rapid.Float64(), rapid.Float64Range(-20, 20),
		rapid.SampledFrom([]float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, math.MaxFloat64, -math.MaxFloat64, math.SmallestNonzeroFloat64}),
	).Draw(t, name)
}

// Whatever it is given, a chart draws within its area and comes back.
func TestChartStandsAnything(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		w, h := rapid.IntRange(0, 60).Draw(t, "w"), rapid.IntRange(0, 20).Draw(t, "h")
		f := frame.New(w+4, h+4, frame.Style{})
		f.Area().Fill('#', frame.Plain)
		var x, y Range
		for range 3 {
			x.Include(anything(t, "x"))
			y.Include(anything(t, "y"))
		}
		if rapid.Bool().Draw(t, "pad") {
			x, y = x.Padded(0.1, 1), y.Padded(0.1, 1)
		}
		p := New(f.Area().Sub(2, 2, w, h), Axes{
			X: x, Y: y, XTicks: Ticks(x, w/8), YTicks: Ticks(y, h/2), LabelWidth: rapid.IntRange(0, 9).Draw(t, "label"),
		})
		var a, b []Point
		l := trend.Level{Width: time.Duration(rapid.Int64().Draw(t, "width"))}
		for range rapid.IntRange(0, 20).Draw(t, "n") {
			a = append(a, Point{anything(t, "ax"), anything(t, "ay")})
			b = append(b, Point{anything(t, "bx"), anything(t, "by")})
			l.Buckets = append(l.Buckets, trend.Bucket{
				Start: time.Duration(rapid.Int64().Draw(t, "start")), Min: anything(t, "min"), Max: anything(t, "max"),
				Mean: anything(t, "mean"), Count: rapid.IntRange(-1, 3).Draw(t, "count"),
			})
		}
		p.Band(a, b, frame.Band)
		p.Curve(a, frame.Predicted)
		p.Dots(b, frame.Band)
		p.Stripe(anything(t, "stripe lo"), anything(t, "stripe hi"), frame.Rule)
		p.Reach(anything(t, "reach lo"), anything(t, "reach hi"), frame.Good)
		p.Dashes(b, frame.Predicted)
		p.Level(anything(t, "level"), frame.Target)
		p.Upright(anything(t, "upright"), frame.Target)
		p.HistoryOf(l, same, time.Second, frame.Measured)
		p.Dotted(l, same, time.Second, frame.Measured)
		p.Label(anything(t, "label y"), "label", frame.Plain)
		p.Mark(Point{anything(t, "mx"), anything(t, "my")}, '●', frame.Plain)
		p.Done()
		for yy := range h + 4 {
			for xx := range w + 4 {
				outside := xx < 2 || yy < 2 || xx >= w+2 || yy >= h+2
				if outside && f.At(xx, yy).Rune != '#' {
					t.Fatalf("drawn outside the area at %d, %d", xx, yy)
				}
			}
		}
	})
}

func BenchmarkHistory(b *testing.B) {
	r := trend.NewRing()
	for i := range 10_000 {
		r.Add(time.Duration(i)*10*time.Millisecond, math.Sin(float64(i)/100))
	}
	l := r.View().Since(0)
	b.ReportAllocs()
	for b.Loop() {
		f := frame.New(78, 21, frame.Style{})
		p := New(f.Area(), Axes{X: Between(0, 100), Y: Between(-1.1, 1.1)})
		p.HistoryOf(l, same, time.Second, frame.Measured)
		p.Done()
	}
}
