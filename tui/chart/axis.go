package chart

import (
	"math"
	"slices"
	"strconv"
	"time"
)

// Range is a stretch of one axis. The zero value is empty.
type Range struct {
	Lo, Hi float64
	some   bool
}

// Between returns the range from lo to hi, empty unless lo < hi.
func Between(lo, hi float64) Range {
	if !(lo < hi) || math.IsInf(lo, 0) || math.IsInf(hi, 0) {
		return Range{}
	}
	return Range{lo, hi, true}
}

// Include widens r to hold v; NaN and infinities are ignored.
func (r *Range) Include(v float64) {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return
	}
	if !r.some {
		r.Lo, r.Hi, r.some = v, v, true
		return
	}
	r.Lo, r.Hi = min(r.Lo, v), max(r.Hi, v)
}

// Empty reports whether nothing was included.
func (r Range) Empty() bool { return !r.some }

// Padded returns r widened by a share of its span on both sides, and to a
// span of at least least: noise must not fill a chart.
func (r Range) Padded(share, least float64) Range {
	if !r.some {
		return r
	}
	pad := (r.Hi - r.Lo) * share
	if short := least - (r.Hi - r.Lo) - 2*pad; short > 0 {
		pad += short / 2
	}
	return Range{r.Lo - pad, r.Hi + pad, true}
}

// Rounded returns r with its ends moved outwards to round places, some twenty
// to its span: a chart stands still while its values move a little.
func (r Range) Rounded() Range {
	span := r.Hi - r.Lo
	if !r.some || !(span > 0) || math.IsInf(span, 0) {
		return r
	}
	step := roundStep(span / 20)
	lo, hi := math.Floor(r.Lo/step)*step, math.Ceil(r.Hi/step)*step
	if !(lo < hi) || math.IsInf(lo, 0) || math.IsInf(hi, 0) {
		return r
	}
	return Range{lo, hi, true}
}

// Tick is one labelled place of an axis.
type Tick struct {
	At    float64
	Label string
}

// Ticks returns at most most round places inside r, all with the same number
// of decimals. The steps are 1, 2 and 5 times a power of ten.
func Ticks(r Range, most int) []Tick {
	span := r.Hi - r.Lo
	if r.Empty() || !(span > 0) || math.IsInf(span, 0) || most < 1 {
		return nil
	}
	step := roundStep(span / float64(most))
	for last(r, step)-first(r, step)+1 > float64(most) {
		step = roundStep(step * 1.01)
	}
	// Where the range is a few steps of the last binary digit wide, a step
	// would not move the number.
	if !(step > 0) || math.IsInf(step, 0) || r.Lo+step == r.Lo || r.Hi+step == r.Hi {
		return nil
	}
	decimals := max(0, -int(math.Floor(math.Log10(step)+1e-9)))
	var ticks []Tick
	for i := first(r, step); i <= last(r, step) && len(ticks) < most; i++ {
		v := i * step
		if v == 0 {
			v = 0 // no minus sign
		}
		ticks = append(ticks, Tick{v, label(v, decimals)})
	}
	return ticks
}

// first and last count the steps at the ends of r; a hair outside still
// counts, since 9.0002 is not a binary number.
func first(r Range, step float64) float64 { return math.Ceil(r.Lo/step - 1e-9) }
func last(r Range, step float64) float64  { return math.Floor(r.Hi/step + 1e-9) }

func label(v float64, decimals int) string {
	if decimals > 9 || math.Abs(v) >= 1e7 {
		return strconv.FormatFloat(v, 'g', 3, 64)
	}
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if s[0] == '-' {
		return "\u2212" + s[1:]
	}
	return s
}

// roundStep returns the smallest of 1, 2, 5 times a power of ten not below v.
func roundStep(v float64) float64 {
	power := math.Pow(10, math.Floor(math.Log10(v)))
	for _, m := range []float64{1, 2, 5} {
		if m*power >= v*(1-1e-12) {
			return m * power
		}
	}
	return 10 * power
}

var spans = []time.Duration{
	time.Second, 2 * time.Second, 5 * time.Second, 10 * time.Second, 20 * time.Second, 30 * time.Second,
	time.Minute, 2 * time.Minute, 5 * time.Minute, 10 * time.Minute, 20 * time.Minute, 30 * time.Minute,
	time.Hour, 2 * time.Hour, 3 * time.Hour, 6 * time.Hour, 12 * time.Hour,
	24 * time.Hour, 48 * time.Hour, 7 * 24 * time.Hour, 14 * 24 * time.Hour,
}

// TimeTicks returns about most places, ascending, of an axis of seconds of bench Mono that
// covers the span before end. Where the axis ends at the present and is
// shorter than ten minutes, labels count back from it; otherwise they show the
// clock, which reads clock at end.
func TimeTicks(end, span time.Duration, present bool, clock time.Time, most int) []Tick {
	if span <= 0 || most < 1 {
		return nil
	}
	step := spans[len(spans)-1]
	for _, s := range spans {
		if int(span/s) <= most {
			step = s
			break
		}
	}
	var ticks []Tick
	add := func(back time.Duration, text string) {
		ticks = append(ticks, Tick{(end - back).Seconds(), text})
	}
	if present && span < 10*time.Minute {
		for back := step * ((span - 1) / step); back > 0; back -= step {
			if step >= time.Minute {
				add(back, "\u2212"+strconv.Itoa(int(back/time.Minute))+" min")
			} else {
				add(back, "\u2212"+strconv.Itoa(int(back/time.Second))+" s")
			}
		}
		return ticks
	}
	format := "15:04"
	if step < time.Minute {
		format = "15:04:05"
	}
	if step >= 24*time.Hour {
		format = "2 Jan"
	}
	// Round in the time of the clock on the wall, not in UTC.
	_, offset := clock.Zone()
	local := time.Duration(clock.Unix()+int64(offset))*time.Second + time.Duration(clock.Nanosecond())
	for back := local % step; back <= span && len(ticks) < most+1; back += step {
		add(back, clock.Add(-back).Format(format))
	}
	slices.Reverse(ticks) // ascending, as a plot wants them
	return ticks
}
