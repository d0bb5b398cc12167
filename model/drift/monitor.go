package drift

import (
	"math"
	"time"

	"barline/model/unit"
)

// Means is what was measured over a short stretch at rest, such as ten
// seconds. Of what was not measured the count is zero.
type Means struct {
	At       time.Duration // its end, bench Mono
	Pressure unit.Pascal   // in the core
	// Value holds the residual in m, strength, width in m and pulse energy in
	// J as they were read, cell A minus cell B in Pa, the fibre's temperature
	// in K, and for Decay the pressure in Pa, brought to one temperature, where
	// every valve was shut all the time.
	Value [ObservableCount]float64
	Count [ObservableCount]int
}

// Watch says what a Monitor looks for.
type Watch struct {
	Learn      time.Duration // shortest stretch to learn from; 0: 10 min
	FalseAlarm time.Duration // mean time between false alarms of one chart; 0: 1000 h
	Reach      unit.Pascal   // how far from where it was learnt a stretch holds; 0: 0.1 bar
	// Matters is the smallest shift that somebody must hear of, in the unit of
	// the observable; relative for strength, width and pulse energy. What is
	// zero is not charted.
	Matters [ObservableCount]float64
}

func (w Watch) learn() time.Duration {
	if w.Learn > 0 {
		return w.Learn
	}
	return 10 * time.Minute
}

func (w Watch) reach() float64 {
	if w.Reach > 0 {
		return float64(w.Reach)
	}
	return 0.1 * float64(unit.Bar)
}

// Verdict is what a Monitor has to say of the newest means.
type Verdict uint8

const (
	// NoChange: nothing new.
	NoChange Verdict = iota
	// Learnt: a quiet stretch was learnt here, and charts begin.
	Learnt
	// Drifting: something moved, or never stood still.
	Drifting
	// Returned: all is again where it was, or quiet in its new place.
	Returned
)

var verdictText = [...]string{"no change", "quiet stretch learnt", "drift", "back"}

// String names the verdict as a record does.
func (v Verdict) String() string { return verdictText[v] }

const (
	maxBins   = 180 // half an hour of ten seconds
	maxPlaces = 4
	tryEvery  = 6  // means between two attempts to learn
	originOf  = 12 // means from which a stretch that never stood still counts
	// runsAway is how many standard deviations a slope must be clear of
	// nothing before a stretch counts as one that never stood still: it is
	// looked at again every minute.
	runsAway = 6
	// sureShift is how many standard deviations the newest means must be away
	// before somebody is called: correlation times learnt from half an hour
	// are too short as often as not.
	sureShift = 7
	// Of a shut volume the first minute tells of the gas that cools after the
	// valves closed.
	decayAfter  = 6
	decayFewest = 18
	leakSure    = 12 // standard deviations, for the same reason
)

// Monitor learns what is quiet at each pressure where the bench comes to rest,
// charts it, and says when something moved. It is a value that can be copied,
// and depends on the means it was given alone.
type Monitor struct {
	places [maxPlaces]place // the present one first, then by when they were left
	count  int
	bins   [maxBins]Means // of the present place, newest last
	n      int
	tried  int // bins since learning was last attempted

	shut  int // bins since every valve is shut
	decay [maxBins]Sample
	line  Line // of the decay; zero before there is one
	leaks bool

	standing bool
	since    time.Duration
	by       Observable
}

// place is what is known of one pressure.
type place struct {
	pressure float64
	began    time.Duration
	learnt   bool
	refined  bool // learnt from as much as is kept
	runs     bool // it does not stand still, and never did
	track    [ObservableCount]track
	why      string // why nothing was learnt yet
}

// track is one observable in one place.
type track struct {
	charted bool
	ringing bool
	chart   Chart
	origin  Quiet // from the first means; what a stretch that runs away counts from
	begun   bool
}

// Add takes the next means.
func (m *Monitor) Add(w Watch, x Means) Verdict {
	p := m.settle(w, x)
	if m.n == maxBins {
		copy(m.bins[:], m.bins[maxBins/6:])
		m.n -= maxBins / 6
	}
	m.bins[m.n] = x
	m.n++
	m.tried++
	m.watchDecay(w, x)
	verdict := NoChange
	if !p.learnt {
		if m.learn(w, p) {
			verdict = Learnt
		}
	} else {
		m.judge(w, p, x)
		m.refine(w, p)
	}
	by, since, ringing := m.ringing(w)
	switch {
	case ringing && !m.standing:
		m.standing, m.by, m.since = true, by, since
		return Drifting
	case !ringing && m.standing && p.learnt:
		m.standing = false
		if verdict == NoChange {
			verdict = Returned
		}
	}
	return verdict
}

// settle returns the place that the means belong to, opened anew where the
// bench has not rested there before.
func (m *Monitor) settle(w Watch, x Means) *place {
	at := float64(x.Pressure)
	for i := range m.count {
		if math.Abs(m.places[i].pressure-at) > w.reach() {
			continue
		}
		if i > 0 {
			found := m.places[i]
			copy(m.places[1:], m.places[:i])
			m.places[0] = found
			m.n, m.tried = 0, 0
		}
		return &m.places[0]
	}
	copy(m.places[1:], m.places[:maxPlaces-1])
	m.places[0] = place{pressure: at, began: x.At}
	m.count = min(m.count+1, maxPlaces)
	m.n, m.tried = 0, 0
	return &m.places[0]
}

// samples returns the newest values of an observable, at most most of them,
// none before from.
func (m *Monitor) samples(o Observable, most int, from time.Duration) []Sample {
	s := make([]Sample, 0, min(m.n, most))
	for i := m.n - 1; i >= 0 && len(s) < most; i-- {
		if x := &m.bins[i]; x.Count[o] > 0 && x.At >= from {
			s = append(s, Sample{x.At, x.Value[o]})
		}
	}
	for i, j := 0, len(s)-1; i < j; i, j = i+1, j-1 {
		s[i], s[j] = s[j], s[i]
	}
	return s
}

// learn tries to learn from the stretch, and looks whether it runs away.
func (m *Monitor) learn(w Watch, p *place) (learnt bool) {
	for o := range Decay {
		t := &p.track[o]
		if w.Matters[o] > 0 && !t.begun {
			if s := m.samples(o, maxBins, 0); len(s) >= originOf {
				t.begun, t.origin = true, originOfStretch(s[:originOf])
			}
		}
	}
	if m.tried < tryEvery {
		return false
	}
	m.tried = 0
	if m.bins[m.n-1].At-m.bins[0].At < w.learn()*9/10 {
		m.lookForSlope(w, p)
		return false
	}
	light, any := false, false
	for o := range Decay {
		if w.Matters[o] == 0 {
			continue
		}
		light = light || o == Wavelength && len(m.samples(o, maxBins, 0)) > m.n/2
		c, err := m.chart(w, p, o, o != Wavelength || m.full())
		if err != nil && o == Wavelength {
			p.why = err.Error()
		}
		if p.track[o].charted = err == nil; err == nil {
			p.track[o].chart, any = c, true
		}
	}
	if !any || light && !p.track[Wavelength].charted {
		for o := range p.track {
			p.track[o].charted = false
		}
		m.lookForSlope(w, p)
		return false
	}
	p.learnt, p.refined, p.runs, p.why = true, m.full(), false, ""
	return true
}

// refine learns once more when as much is kept as can be, unless something has
// moved since: ten minutes show neither the mean nor the scatter of what wanders
// over many.
func (m *Monitor) refine(w Watch, p *place) {
	if p.refined || !m.full() || m.tried < tryEvery {
		return
	}
	m.tried = 0
	for o := range p.track {
		t := &p.track[o]
		if t.ringing || t.charted && math.Abs(m.shift(Observable(o))) > w.Matters[o]*scaleOf(Observable(o), t.chart.Quiet().Mean)/2 {
			return
		}
	}
	p.refined = true
	for o := range Decay {
		if w.Matters[o] == 0 || len(m.samples(o, maxBins, 0)) == 0 {
			continue
		}
		if c, err := m.chart(w, p, o, true); err == nil {
			p.track[o].chart, p.track[o].charted = c, true
		} else if !p.track[o].charted {
			p.refined = false // tried again in a minute
		}
	}
}

// chart returns a chart of an observable, learnt from what is kept: roughly
// where it has to be and may.
func (m *Monitor) chart(w Watch, p *place, o Observable, roughly bool) (Chart, error) {
	s := m.samples(o, maxBins, 0)
	q, err := Learn(s)
	if err != nil && roughly {
		q, err = LearnRoughly(s, w.Matters[o]*scaleOf(o, p.track[o].origin.Mean)/2)
	}
	if err != nil {
		return Chart{}, err
	}
	return NewChart(q, Design{FalseAlarm: w.FalseAlarm})
}

// full reports whether nothing more can be waited for: what is kept is as long
// as it gets.
func (m *Monitor) full() bool { return m.n > maxBins*3/4 }

// originOfStretch is what the first values of a stretch say of where it began.
func originOfStretch(s []Sample) Quiet {
	q := Quiet{From: s[0].At, To: s[len(s)-1].At, Values: len(s), Spacing: s[1].At - s[0].At}
	for _, v := range s {
		q.Mean += v.Value / float64(len(s))
	}
	for _, v := range s {
		q.Sigma += (v.Value - q.Mean) * (v.Value - q.Mean) / float64(len(s)-1)
	}
	q.Sigma = math.Sqrt(q.Sigma)
	q.Correlation, q.Group, q.GroupSigma = q.Spacing, q.Spacing, q.Sigma
	q.MeanSigma = q.Sigma / math.Sqrt(float64(len(s))/2)
	return q
}

// lookForSlope finds what never stood still since the bench came here.
func (m *Monitor) lookForSlope(w Watch, p *place) {
	for o := range Decay {
		t := &p.track[o]
		s := m.samples(o, maxBins, 0)
		if w.Matters[o] == 0 || !t.begun || len(s) < fewestValues {
			continue
		}
		l, err := FitLine(s)
		matters := w.Matters[o] * scaleOf(o, t.origin.Mean)
		t.ringing = err == nil && (math.Abs(l.Change) >= matters && l.Sure(runsAway) || t.ringing && math.Abs(m.shift(o)) >= matters/2)
		p.runs = p.runs || t.ringing
	}
}

// judge charts the newest means.
func (m *Monitor) judge(w Watch, p *place, x Means) {
	for o := range Decay {
		t := &p.track[o]
		if !t.charted || x.Count[o] == 0 {
			continue
		}
		t.chart.Add(Sample{x.At, x.Value[o]})
		if !t.chart.Last().Alarm {
			t.ringing = false
			continue
		}
		matters := w.Matters[o] * scaleOf(o, t.chart.Quiet().Mean)
		shift, sigma, _ := m.shifted(o)
		switch away := math.Abs(shift); {
		case away >= math.Max(matters, sureShift*sigma):
			t.ringing = true
		case away < matters/2 && t.ringing:
			t.ringing = false
			t.chart.Restart()
		}
	}
}

// scaleOf is what a relative amount of the observable counts from.
func scaleOf(o Observable, mean float64) float64 {
	switch o {
	case Strength, Width, Metered:
		return math.Abs(mean)
	}
	return 1
}

// ringing returns what rings most, and since when.
func (m *Monitor) ringing(w Watch) (by Observable, since time.Duration, any bool) {
	if m.count == 0 {
		return 0, 0, false
	}
	p, most := &m.places[0], 0.0
	for o := range Decay {
		t := &p.track[o]
		if !t.ringing {
			continue
		}
		from := p.began
		if t.charted {
			from = changed(m.samples(o, maxBins, 0), t.chart.Quiet().Mean)
			if sums := t.chart.Last().Changed; from == m.bins[0].At && sums < from {
				from = sums // it began before what is kept
			}
		}
		if !any || from < since {
			since = from
		}
		if weight := math.Abs(m.shift(o)) / (w.Matters[o] * scaleOf(o, m.quiet(o).Mean)); !any || weight > most {
			by, most = o, weight
		}
		any = true
	}
	if m.leaks && !any {
		return Decay, m.decay[0].At, true
	}
	return by, since, any
}

// watchDecay follows the pressure of a volume whose valves are shut.
func (m *Monitor) watchDecay(w Watch, x Means) {
	if x.Count[Decay] == 0 || w.Matters[Decay] == 0 {
		m.shut, m.line = 0, Line{}
		return
	}
	k := m.shut - decayAfter
	if m.shut++; k < 0 {
		return
	}
	if k >= maxBins {
		copy(m.decay[:], m.decay[maxBins/2:])
		k -= maxBins / 2
		m.shut -= maxBins / 2
	}
	m.decay[k] = Sample{x.At, x.Value[Decay]}
	if k+1 < decayFewest {
		return
	}
	if l, err := FitLine(m.decay[:k+1]); err == nil {
		m.line = l
		m.leaks = math.Abs(l.Slope) >= w.Matters[Decay] && l.Sure(leakSure) && steady(m.decay[:k+1], w.Matters[Decay]/2) ||
			m.leaks && math.Abs(l.Slope) >= w.Matters[Decay]/2
	}
}

// steady reports whether both halves of a stretch run the same way, each by at
// least slope a second: a leak does, a thermometer that wanders seldom.
func steady(samples []Sample, slope float64) bool {
	half := len(samples) / 2
	a, errA := FitLine(samples[:half])
	b, errB := FitLine(samples[half:])
	return errA == nil && errB == nil && a.Slope*b.Slope > 0 && math.Min(math.Abs(a.Slope), math.Abs(b.Slope)) >= slope
}
