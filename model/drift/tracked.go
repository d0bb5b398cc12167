package drift

import (
	"math"
	"time"
)

// quiet returns what an observable counts from in the present place.
func (m *Monitor) quiet(o Observable) Quiet {
	if t := &m.places[0].track[o]; t.charted {
		return t.chart.Quiet()
	} else if t.begun {
		return t.origin
	}
	return Quiet{}
}

// lookBack is how long the newest means that a shift is taken from reach back,
// at least; two groups where those are longer.
const lookBack = time.Minute

// shift returns how far the newest means stand from where the place was quiet,
// in the unit of the observable.
func (m *Monitor) shift(o Observable) float64 {
	v, _, _ := m.shifted(o)
	return v
}

func (m *Monitor) shifted(o Observable) (shift, sigma float64, ok bool) {
	if m.n == 0 || m.count == 0 {
		return 0, 0, false
	}
	q := m.quiet(o)
	if q.Spacing == 0 {
		return 0, 0, false
	}
	reach := max(2*q.Group, lookBack)
	s := m.samples(o, int((reach+q.Spacing-1)/q.Spacing), m.bins[m.n-1].At-2*reach)
	if len(s) == 0 {
		return 0, 0, false
	}
	for _, v := range s {
		shift += v.Value / float64(len(s))
	}
	groups := math.Max(float64(len(s))*float64(q.Spacing)/float64(q.Group), 1)
	return shift - q.Mean, math.Hypot(q.GroupSigma/math.Sqrt(groups), q.MeanSigma), true
}

// Observation returns how far each observable stands from where it was quiet,
// relative for strength, width and pulse energy.
func (m *Monitor) Observation() Observation {
	var o Observation
	for k := range Decay {
		shift, sigma, ok := m.shifted(k)
		if scale := scaleOf(k, m.quiet(k).Mean); ok && sigma > 0 && scale > 0 {
			o.Shift[k], o.Sigma[k] = shift/scale, sigma/scale
		}
	}
	if m.line.SlopeSigma > 0 {
		o.Shift[Decay], o.Sigma[Decay] = m.line.Slope, m.line.SlopeSigma
	}
	return o
}

// Track is one observable as a screen shows it, in the unit in which it was
// read.
type Track struct {
	Charted      bool // against a quiet stretch; else from where the bench came to rest
	Ringing      bool
	Quiet        Quiet
	Last         Point   // of the chart, zero before the first group
	Lower, Upper float64 // limits of the moving average in the long run
	Shift, Sigma float64 // now, from Quiet.Mean
}

// Track returns an observable of the present place; ok is false where nothing
// is known of it.
func (m *Monitor) Track(o Observable) (t Track, ok bool) {
	if o >= Decay || m.count == 0 {
		return t, false
	}
	k := &m.places[0].track[o]
	if !k.charted && !k.begun {
		return t, false
	}
	t = Track{Charted: k.charted, Ringing: k.ringing, Quiet: m.quiet(o)}
	if k.charted {
		t.Last = k.chart.Last()
		t.Lower, t.Upper = k.chart.Limits()
	}
	t.Shift, t.Sigma, _ = m.shifted(o)
	return t, true
}

// Learnt reports whether the present place has its quiet stretch.
func (m *Monitor) Learnt() bool { return m.count > 0 && m.places[0].learnt }

// Known reports whether a quiet stretch holds at the present place or the
// bench has at least rested there; why says what keeps it from being learnt.
func (m *Monitor) Known() (since time.Duration, why string, ok bool) {
	if m.count == 0 {
		return 0, "", false
	}
	return m.places[0].began, m.places[0].why, true
}

// Standing returns what moved most, and since when; ok is false while nothing
// stands out.
func (m *Monitor) Standing() (by Observable, since time.Duration, ok bool) {
	return m.by, m.since, m.standing
}

// Here reports whether what stands is seen at the present place, and not only
// remembered of another.
func (m *Monitor) Here() bool {
	if !m.standing || m.count == 0 {
		return false
	}
	for o := range m.places[0].track {
		if m.places[0].track[o].ringing {
			return true
		}
	}
	return m.leaks
}

// RunsAway reports whether what stands is a stretch that never stood still.
func (m *Monitor) RunsAway() bool { return m.count > 0 && m.places[0].runs && !m.places[0].learnt }

// Decay returns the line through the pressure of a shut volume, Pa and Pa/s;
// ok is false before there are enough means.
func (m *Monitor) Decay() (l Line, ok bool) { return m.line, m.line.SlopeSigma > 0 }

// Rebase moves what residuals count from, where the prediction itself has
// moved by so much in the opposite direction. It is known for the present
// place only; the others are forgotten.
func (m *Monitor) Rebase(by float64) {
	m.count = min(m.count, 1)
	if m.count == 0 {
		return
	}
	t := &m.places[0].track[Wavelength]
	t.origin.Mean += by
	if t.charted {
		t.chart.Rebase(by)
	}
	for i := range m.n {
		m.bins[i].Value[Wavelength] += by
	}
}

// Forget begins anew: what is now is taken as good.
func (m *Monitor) Forget() { *m = Monitor{} }
