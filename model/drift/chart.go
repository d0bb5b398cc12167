package drift

import (
	"fmt"
	"math"
	"time"
)

// Design says what a chart is to find and how seldom it may be wrong.
type Design struct {
	// Shift is the smallest lasting shift that matters, in the unit of the
	// quantity; zero: one standard deviation of a group.
	Shift float64
	// FalseAlarm is the mean time between alarms when nothing happens, for
	// the two charts together; zero: 1000 h.
	FalseAlarm time.Duration
	// Lambda is the weight of the newest group in the moving average; zero:
	// 0.1, which finds slow drifts that the sums find late.
	Lambda float64
}

// Point is the verdict at the end of a group.
type Point struct {
	At           time.Duration // end of the group, bench Mono
	Mean         float64       // of the group
	Values       int           // in the group
	Average      float64       // moving average
	Lower, Upper float64       // its limits
	High, Low    float64       // cumulative sums, as shares of their threshold
	Alarm        bool          // since this group or an earlier one
	// Shift and Changed say by how much the mean has moved and since when,
	// as far as the sums can tell; zero while there is no alarm.
	Shift   float64
	Changed time.Duration
}

// Chart judges one quantity against its quiet stretch: a value that can be
// copied. It keeps its alarm until Restart.
type Chart struct {
	quiet Quiet
	ewma  EWMA
	cusum CUSUM
	start time.Duration // of the group being filled
	open  bool
	sum   float64
	count int
	last  Point
}

// NewChart returns a chart for the quantity that q was learnt from. The slack
// of the sums grows by the uncertainty of the learnt mean, so that a baseline
// a little off does not add up to an alarm.
func NewChart(q Quiet, d Design) (Chart, error) {
	if !(q.GroupSigma > 0) || q.Group <= 0 {
		return Chart{}, fmt.Errorf("nothing was learnt of the quantity: %w", ErrNotQuiet)
	}
	if d.FalseAlarm == 0 {
		d.FalseAlarm = 1000 * time.Hour
	}
	if d.Lambda == 0 {
		d.Lambda = 0.1
	}
	if !(d.Lambda > 0 && d.Lambda <= 1) || d.Shift < 0 || math.IsNaN(d.Shift) || d.FalseAlarm < 20*q.Group {
		return Chart{}, fmt.Errorf("λ %v, shift %v, a false alarm in %v; expected λ from 0 to 1, a shift of 0 or more, and at least %v", d.Lambda, d.Shift, d.FalseAlarm, 20*q.Group)
	}
	slack := 0.5
	if d.Shift > 0 {
		slack = math.Min(math.Max(d.Shift/q.GroupSigma/2, 0.1), 2)
	}
	values := 2 * float64(d.FalseAlarm) / float64(q.Group) // for each of the two
	threshold, limit, err := design(slack, d.Lambda, values)
	if err != nil {
		return Chart{}, err
	}
	s, off := q.GroupSigma, q.MeanSigma
	average := s * math.Sqrt(d.Lambda/(2-d.Lambda)) // asymptotic deviation
	return Chart{
		quiet: q,
		ewma:  EWMA{Target: q.Mean, Sigma: s, Lambda: d.Lambda, Limit: limit * math.Hypot(1, off/average)},
		cusum: CUSUM{Target: q.Mean, Slack: slack*s + off, Threshold: threshold * s},
	}, nil
}

// Quiet returns what the chart judges against.
func (c *Chart) Quiet() Quiet { return c.quiet }

// Last returns the verdict of the newest group, zero before the first.
func (c *Chart) Last() Point { return c.last }

// Restart forgets the alarm and everything since, and judges on against the
// same quiet stretch.
func (c *Chart) Restart() {
	c.ewma.value, c.ewma.steps = 0, 0
	c.cusum.high, c.cusum.low, c.cusum.sinceHigh, c.cusum.sinceLow = 0, 0, 0, 0
	c.open, c.last = false, Point{}
}

// Rebase moves the target by an amount, as where the prediction that a residual
// counts from has moved: what was seen before keeps its distance.
func (c *Chart) Rebase(by float64) {
	c.quiet.Mean += by
	c.ewma.Target += by
	c.cusum.Target += by
	c.sum += by * float64(c.count)
	c.last.Mean, c.last.Average = c.last.Mean+by, c.last.Average+by
	c.last.Lower, c.last.Upper = c.last.Lower+by, c.last.Upper+by
}

// Limits returns the limits of the moving average in the long run.
func (c *Chart) Limits() (lower, upper float64) {
	settled := c.ewma
	settled.steps = 1 << 20
	return settled.Limits()
}

// Add takes a usable value. It returns a verdict where the value is the first
// behind the end of a group; a group with less than half of its values is
// dropped, as across a closed shutter. Values that are no numbers are ignored.
func (c *Chart) Add(s Sample) (p Point, done bool) {
	if math.IsNaN(s.Value) || math.IsInf(s.Value, 0) {
		return Point{}, false
	}
	if c.open && s.At >= c.start+c.quiet.Group {
		if expected := float64(c.quiet.Group) / float64(c.quiet.Spacing); float64(c.count) >= expected/2 {
			p, done = c.judge(), true
		}
		c.open = false
	}
	if !c.open {
		c.open, c.start, c.sum, c.count = true, s.At, 0, 0
	}
	c.sum += s.Value
	c.count++
	return p, done
}

// judge closes the group.
func (c *Chart) judge() Point {
	mean := c.sum / float64(c.count)
	outside := c.ewma.Add(mean)
	signal := c.cusum.Add(mean)
	high, low := c.cusum.Sums()
	p := Point{
		At: c.start + c.quiet.Group, Mean: mean, Values: c.count, Average: c.ewma.Value(),
		High: high / c.cusum.Threshold, Low: low / c.cusum.Threshold,
		Alarm: outside || signal || c.last.Alarm,
	}
	p.Lower, p.Upper = c.ewma.Limits()
	if p.Alarm {
		shift, groups := c.cusum.Change()
		p.Shift, p.Changed = shift, p.At-time.Duration(groups)*c.quiet.Group
		if shift == 0 { // the average alone saw it, or it has gone again
			p.Shift, p.Changed = p.Average-c.quiet.Mean, c.last.Changed
			if p.Changed == 0 {
				p.Changed = p.At
			}
		}
	}
	c.last = p
	return p
}
