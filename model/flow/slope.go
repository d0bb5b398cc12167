package flow

import (
	"fmt"
	"math"
	"time"

	"barline/model/unit"
)

const slopeBins = 24

// Slope is how fast a pressure has been changing of late: a straight line by
// least squares through means of its readings. It is a value; the zero value
// looks back over ten seconds.
type Slope struct {
	Window time.Duration // how far it looks back, to a few per cent

	seconds, pascal [slopeBins]float64 // of each full bin
	bins, next      int
	sumT, sumP      float64 // of the bin that is filling, from its start
	count           int
	start, last     time.Duration
	started         bool
}

func (s *Slope) window() time.Duration {
	if s.Window > 0 {
		return s.Window
	}
	return 10 * time.Second
}

// See takes a reading. One that is not after the last, not a number or
// infinite changes nothing and is refused. After a gap longer than the window
// it starts anew.
func (s *Slope) See(at time.Duration, p unit.Pascal) error {
	if math.IsNaN(float64(p)) || math.IsInf(float64(p), 0) {
		return fmt.Errorf("reading %v Pa: %w", float64(p), ErrRange)
	}
	if s.started && at <= s.last {
		return fmt.Errorf("reading at %v: %w: not after the one before, at %v", at, ErrRange, s.last)
	}
	if !s.started || at-s.last > s.window() {
		*s = Slope{Window: s.Window, started: true, start: at, last: at}
	}
	if width := s.window() / slopeBins; at >= s.start+width && s.count > 0 {
		s.seconds[s.next] = s.start.Seconds() + s.sumT/float64(s.count)
		s.pascal[s.next] = s.sumP / float64(s.count)
		s.next = (s.next + 1) % slopeBins
		s.bins = min(s.bins+1, slopeBins)
		// Bins follow each other without gaps, whatever the readings' rhythm.
		s.start += width
		if at >= s.start+width {
			s.start = at
		}
		s.sumT, s.sumP, s.count = 0, 0, 0
	}
	s.sumT += (at - s.start).Seconds()
	s.sumP += float64(p)
	s.count++
	s.last = at
	return nil
}

// Estimate returns the slope in Pa/s with its standard uncertainty from the
// scatter about the line. ok is false until the readings span half the window.
func (s *Slope) Estimate() (e Estimate, ok bool) {
	n := s.bins
	if n < 4 {
		return Estimate{}, false
	}
	order := func(i int) int { return (s.next - n + i + 2*slopeBins) % slopeBins }
	t0, p0 := s.seconds[order(0)], s.pascal[order(0)]
	if span := s.seconds[order(n-1)] - t0; span < 0.45*s.window().Seconds() {
		return Estimate{}, false
	}
	var st, sp, stt, stp, spp float64
	for i := range n {
		t, p := s.seconds[order(i)]-t0, s.pascal[order(i)]-p0
		st, sp, stt, stp, spp = st+t, sp+p, stt+t*t, stp+t*p, spp+p*p
	}
	k := float64(n)
	dtt, dtp, dpp := stt-st*st/k, stp-st*sp/k, spp-sp*sp/k
	e.Value = dtp / dtt
	e.Sigma = math.Sqrt(max(0, dpp-dtp*dtp/dtt) / (k - 2) / dtt)
	return e, true
}

// Settled says when the gas counts as settled. Zero fields are not asked for,
// except in Judge's text.
type Settled struct {
	Slope  unit.PascalPerSecond  // of the cells, sigma included
	Lag    unit.Pascal           // of the core behind the cells, either way
	Excess unit.KelvinDifference // of the gas over the walls in a shut cell, either way
}

// Condition is what is known of the gas at one instant.
type Condition struct {
	Slope      Estimate // Pa/s
	SlopeKnown bool
	Lag        unit.Pascal
	LagKnown   bool
	// Shut says that nothing holds the pressure of the cells: gas that is
	// warmer than the walls then shows as a pressure to come.
	Shut   bool
	Excess unit.KelvinDifference // where ExcessKnown
	// ExcessKnown: the gas itself is measured. Otherwise five time constants
	// of the wall must have passed since gas last moved: common practice, no
	// source.
	ExcessKnown bool
	Still       time.Duration // since gas last moved
	WallTime    time.Duration
}

// Judge reports whether the gas has settled and, where it has not, the first
// thing that it waits for, as a person would be told.
func (s Settled) Judge(c Condition) (settled bool, waitsFor string) {
	switch {
	case !c.SlopeKnown || math.IsNaN(c.Slope.Value+c.Slope.Sigma):
		return false, "waiting for enough readings to see the slope"
	case !(math.Abs(c.Slope.Value)+c.Slope.Sigma <= float64(s.Slope)):
		verb := "rising"
		if c.Slope.Value < 0 {
			verb = "falling"
		}
		return false, fmt.Sprintf("pressure %s at %.2g ± %.1g mbar/s, settled below %.2g mbar/s",
			verb, math.Abs(c.Slope.Value)/100, c.Slope.Sigma/100, float64(s.Slope)/100)
	case !c.LagKnown || math.IsNaN(float64(c.Lag)):
		return false, "pressure in the core is not known"
	case !(math.Abs(float64(c.Lag)) <= float64(s.Lag)):
		side := "below"
		if c.Lag < 0 {
			side = "above"
		}
		return false, fmt.Sprintf("core still %v %s where it will settle, settled within %v",
			unit.Pascal(math.Abs(float64(c.Lag))), side, s.Lag)
	case c.Shut && c.ExcessKnown && !(math.Abs(float64(c.Excess)) <= float64(s.Excess)):
		side := "warmer"
		if c.Excess < 0 {
			side = "colder"
		}
		return false, fmt.Sprintf("gas in the shut cell %.2g K %s than its walls, settled within %.2g K",
			math.Abs(float64(c.Excess)), side, float64(s.Excess))
	case c.Shut && !c.ExcessKnown && c.Still < 5*c.WallTime:
		return false, fmt.Sprintf("gas in the shut cell takes the walls' temperature for another %v",
			(5*c.WallTime - c.Still).Round(time.Second))
	}
	return true, ""
}
