package tui

import (
	"time"

	"barline/model/live"
	"barline/model/trend"
	"barline/tui/chart"
	"barline/tui/frame"
)

// timeAxis is the stretch of bench time that charts show.
type timeAxis struct {
	end, span time.Duration
	ticks     []chart.Tick
	cursor    time.Duration // 0: none
}

// end is where the time axes end, in bench Mono.
func (v view) end(s *live.Snapshot) time.Duration {
	end := s.Now.Mono
	if v.frozen != nil {
		end = v.frozen.at
	}
	return end - v.back
}

// axis returns the time axis of a chart that fills a. It moves on by whole
// dots, so that a curve that has not changed is not drawn anew.
func (v view) axis(s *live.Snapshot, a frame.Area) timeAxis {
	end, span := v.end(s), v.span()
	if dots := time.Duration(2*(a.W-yLabel-1) - 1); dots > 0 {
		dot := span / dots
		end = (end + dot - 1) / dot * dot
	}
	clock := s.Now.UTC.Add(end - s.Now.Mono).In(a.Style().Location())
	ticks := chart.TimeTicks(end, span, v.back == 0, clock, max(1, (a.W-yLabel)/9))
	return timeAxis{end: end, span: span, ticks: ticks, cursor: v.cursor}
}

func (t timeAxis) start() time.Duration { return t.end - t.span }

func (t timeAxis) x() chart.Range { return chart.Between(t.start().Seconds(), t.end.Seconds()) }

// include widens y to the part of a history that the axis shows.
func (t timeAxis) include(y *chart.Range, view *trend.View, to func(float64) float64) {
	l := view.Since(t.start())
	for _, b := range l.Buckets {
		if b.Count > 0 && b.Start+l.Width > t.start() && b.Start <= t.end {
			y.Include(to(b.Min))
			y.Include(to(b.Max))
		}
	}
}

// drawCursor draws the upright line that is read out.
func (t timeAxis) drawCursor(p *chart.Plot) {
	p.Pane().Name(timePlace)
	if t.cursor != 0 {
		p.Upright(t.cursor.Seconds(), frame.Strong)
	}
}

// drawMarks puts a sign at the top of a chart for what happened meanwhile.
// Where several fall together the most urgent is drawn last and stays.
func (t timeAxis) drawMarks(p *chart.Plot, s *live.Snapshot, top float64) {
	for _, want := range []struct {
		kind live.Kind
		mark rune
		ink  frame.Ink
	}{
		{live.KindStep, '╷', frame.Rule}, {live.KindIntent, 'c', frame.Target},
		{live.KindNote, 'n', frame.Strong}, {live.KindAlarm, '!', frame.Alarm},
	} {
		for _, m := range s.Marks {
			if m.Kind == want.kind {
				p.Mark(chart.Point{X: m.At.Seconds(), Y: top}, want.mark, want.ink)
			}
		}
	}
}

// at returns the mean of a history at the cursor; ok is false in a gap.
func (t timeAxis) at(view *trend.View) (v float64, ok bool) {
	l := view.Since(t.start())
	for _, b := range l.Buckets {
		if b.Count > 0 && t.cursor < b.Start+l.Width+l.Width/2 && t.cursor >= b.Start-l.Width/2 {
			return b.Mean, true
		}
	}
	return 0, false
}

// clock writes the cursor's time.
func (t timeAxis) clock(s *live.Snapshot, a frame.Area) string {
	return s.Now.UTC.Add(t.cursor - s.Now.Mono).In(a.Style().Location()).Format("15:04:05")
}

// change returns how much a history moved over the axis: the mean of its last
// tenth less that of its first. ok is false where either is a gap.
func (t timeAxis) change(view *trend.View) (mean, change float64, ok bool) {
	l := view.Since(t.start())
	var sum, head, tail float64
	var n, heads, tails int
	for _, b := range l.Buckets {
		if b.Count == 0 || b.Start < t.start() || b.Start > t.end {
			continue
		}
		sum, n = sum+b.Mean, n+1
		if b.Start < t.start()+t.span/10 {
			head, heads = head+b.Mean, heads+1
		}
		if b.Start >= t.end-t.span/10 {
			tail, tails = tail+b.Mean, tails+1
		}
	}
	if n == 0 {
		return 0, 0, false
	}
	if heads == 0 || tails == 0 {
		return sum / float64(n), 0, false
	}
	return sum / float64(n), tail/float64(tails) - head/float64(heads), true
}

// rowTicks is how many labelled places suit an upright axis of h rows: close
// in a small chart, and not a ladder in a large one.
func rowTicks(h int) int { return max(2, min(h/2, 4+h/8)) }
