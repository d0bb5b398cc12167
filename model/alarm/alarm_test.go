package alarm

import (
	"errors"
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"

	"barline/model/reading"
)

func at(d time.Duration) reading.Stamp {
	return reading.Stamp{UTC: time.Date(2026, 12, 1, 11, 0, 0, 0, time.UTC).Add(d), Mono: d}
}

// TestTransitionsOfTheStandard walks every state and stimulus of the alarm
// state model of ANSI/ISA-18.2-2016 and IEC 62682:2022 (their letters A to F;
// the table is from memory of the standards, not copied from them).
func TestTransitionsOfTheStandard(t *testing.T) {
	const none = stateCount
	A, B, C, D, E, F := Normal, Unacknowledged, Acknowledged, ReturnedUnacknowledged, LatchedUnacknowledged, LatchedAcknowledged
	for _, c := range []struct {
		latching bool
		in       stimulus
		to       [6]State // from A, B, C, D, E, F
	}{
		{false, raised, [6]State{B, none, none, B, B, B}},
		{false, cleared, [6]State{none, D, A, none, none, none}},
		{false, acknowledged, [6]State{none, C, none, A, F, none}},
		{false, reset, [6]State{none, none, none, none, none, A}},
		{true, raised, [6]State{B, none, none, B, B, B}},
		{true, cleared, [6]State{none, E, F, none, none, none}},
		{true, acknowledged, [6]State{none, C, none, A, F, none}},
		{true, reset, [6]State{none, none, none, none, none, A}},
	} {
		for from, want := range c.to {
			to, ok := next(State(from), c.in, c.latching)
			if ok != (want != none) || (ok && to != want) || (!ok && to != State(from)) {
				t.Errorf("latching %v, stimulus %d from %v: %v %v, want %v", c.latching, c.in, State(from), to, ok, want)
			}
		}
	}
}

func list(t testing.TB, d ...Definition) *List {
	t.Helper()
	for i := range d {
		if d[i].Action == "" {
			d[i].Action = "look"
		}
		if d[i].Priority == 0 {
			d[i].Priority = Medium
		}
	}
	l, err := New(d, at(0))
	if err != nil {
		t.Fatal(err)
	}
	return &l
}

func stateOf(l *List, name string) State { _, e, _ := l.Get(name); return e.State }

func TestDelaysStandBetweenConditionAndState(t *testing.T) {
	l := list(t, Definition{Name: "a", OnDelay: 5 * time.Second, OffDelay: 3 * time.Second})
	for _, c := range []struct {
		at   time.Duration
		c    Condition
		want State
	}{
		{0, Present, Normal},
		{4999 * time.Millisecond, Present, Normal},
		{5 * time.Second, Present, Unacknowledged},
		{6 * time.Second, Absent, Unacknowledged},
		{8 * time.Second, Present, Unacknowledged}, // a blip of two seconds
		{9 * time.Second, Absent, Unacknowledged},
		{12 * time.Second, Absent, ReturnedUnacknowledged},
		{13 * time.Second, Present, ReturnedUnacknowledged},
		{17 * time.Second, Unknown, ReturnedUnacknowledged}, // a dead gauge starts the delay anew
		{19 * time.Second, Present, ReturnedUnacknowledged},
		{24 * time.Second, Present, Unacknowledged},
		{30 * time.Second, Unknown, Unacknowledged}, // and proves nothing
		{99 * time.Second, Unknown, Unacknowledged},
	} {
		tr, ok := l.Evaluate("a", c.c, at(c.at))
		if got := stateOf(l, "a"); got != c.want {
			t.Errorf("at %v, condition %d: %v, want %v", c.at, c.c, got, c.want)
		}
		if ok && (tr.Name != "a" || tr.To != c.want || tr.At != at(c.at)) {
			t.Errorf("at %v: transition %+v", c.at, tr)
		}
	}
}

func TestDelaysEndByThemselves(t *testing.T) {
	l := list(t, Definition{Name: "a", OnDelay: 5 * time.Second}, Definition{Name: "b", OnDelay: 5 * time.Second})
	l.Evaluate("a", Present, at(0))
	l.Evaluate("b", Present, at(0))
	if _, ok := l.Tick(at(4 * time.Second)); ok {
		t.Error("raised before the delay ended")
	}
	seen := 0
	for tr, ok := l.Tick(at(5 * time.Second)); ok; tr, ok = l.Tick(at(5 * time.Second)) {
		seen++
		if !tr.Rings() {
			t.Errorf("%v does not ring", tr)
		}
	}
	if seen != 2 {
		t.Errorf("%d transitions, want 2", seen)
	}
}

func TestDeadbandKeepsAFlickeringValueQuiet(t *testing.T) {
	l := list(t, Definition{Name: "high", Deadband: 2}, Definition{Name: "low", Deadband: 2})
	for i, c := range []struct {
		value     float64
		high, low bool
	}{
		{100, false, false}, {100.1, true, false}, {99, true, false}, {98.1, true, false}, {98, false, false},
		{99.9, false, false}, {50, false, false}, {49.9, false, true}, {51.9, false, true}, {52, false, false},
		{49, false, true}, {math.NaN(), false, true}, {200, true, false}, {math.Inf(1), true, false}, {math.NaN(), true, false},
	} {
		now := at(time.Duration(i) * time.Second)
		l.High("high", c.value, 100, now)
		l.Low("low", c.value, 50, now)
		_, high, _ := l.Get("high")
		_, low, _ := l.Get("low")
		if high.Active != c.high || low.Active != c.low {
			t.Errorf("%d: %v: high %v low %v, want %v %v", i, c.value, high.Active, low.Active, c.high, c.low)
		}
	}
}

func TestLatchedNeedsAcknowledgementAndReset(t *testing.T) {
	l := list(t, Definition{Name: "a", Latching: true})
	do := func(want State, wantErr error, f func() error) {
		t.Helper()
		if err := f(); !errors.Is(err, wantErr) {
			t.Errorf("error %v, want %v", err, wantErr)
		}
		if got := stateOf(l, "a"); got != want {
			t.Errorf("%v, want %v", got, want)
		}
	}
	ack := func() error { _, err := l.Acknowledge("a", at(0)); return err }
	clear := func() error { _, err := l.Reset("a", at(0)); return err }
	is := func(c Condition) func() error { return func() error { l.Evaluate("a", c, at(0)); return nil } }
	do(Normal, ErrRefused, ack)
	do(Unacknowledged, nil, is(Present))
	do(Unacknowledged, ErrRefused, clear)
	do(LatchedUnacknowledged, nil, is(Absent))
	do(LatchedUnacknowledged, ErrRefused, clear)
	do(Unacknowledged, nil, is(Present))
	do(Acknowledged, nil, ack)
	do(Acknowledged, ErrRefused, clear) // the condition still holds
	do(LatchedAcknowledged, nil, is(Absent))
	if _, ok := l.Suppress("a", true, at(0)); ok {
		t.Error("a latch was hidden and so lost")
	}
	do(Normal, nil, clear)
	if _, err := l.Acknowledge("z", at(0)); !errors.Is(err, ErrUnknown) {
		t.Errorf("no such alarm: %v", err)
	}
}

func TestShelvedComesBackAsTheProcessIs(t *testing.T) {
	l := list(t, Definition{Name: "a", ShelveAtMost: time.Hour}, Definition{Name: "never"})
	for _, d := range []time.Duration{0, -time.Second, time.Hour + 1} {
		if _, err := l.Shelve("a", d, at(0)); !errors.Is(err, ErrRefused) {
			t.Errorf("shelved for %v: %v", d, err)
		}
	}
	if _, err := l.Shelve("never", time.Second, at(0)); !errors.Is(err, ErrRefused) {
		t.Errorf("shelved what may not be: %v", err)
	}
	for _, from := range []State{Normal, Unacknowledged, Acknowledged, ReturnedUnacknowledged} {
		for _, process := range []Condition{Absent, Present} {
			l.entries[0] = Entry{}
			if from != Normal {
				l.Evaluate("a", Present, at(0))
			}
			if from == Acknowledged {
				l.Acknowledge("a", at(0))
			}
			if from == ReturnedUnacknowledged {
				l.Evaluate("a", Absent, at(0))
			}
			if got := stateOf(l, "a"); got != from {
				t.Fatalf("could not bring about %v, got %v", from, got)
			}
			if tr, err := l.Shelve("a", time.Minute, at(0)); err != nil || tr.To != Shelved || tr.Until != time.Minute {
				t.Errorf("shelving from %v: %+v, %v", from, tr, err)
			}
			_, before, _ := l.Get("a")
			tr, ok := l.Evaluate("a", process, at(30*time.Second))
			if changed := before.Active != (process == Present); ok != changed || (ok && (tr.To != Shelved || tr.Rings())) {
				t.Errorf("while shelved from %v: %+v %v", from, tr, ok)
			}
			if _, err := l.Acknowledge("a", at(31*time.Second)); !errors.Is(err, ErrRefused) {
				t.Errorf("acknowledged while shelved: %v", err)
			}
			tr, ok = l.Tick(at(time.Minute))
			if want := map[Condition]State{Absent: Normal, Present: Unacknowledged}[process]; !ok || tr.From != Shelved || tr.To != want {
				t.Errorf("back from shelving: %+v %v, want %v", tr, ok, want)
			}
		}
	}
}

func TestSuppressedAndOutOfService(t *testing.T) {
	l := list(t, Definition{Name: "a", ShelveAtMost: time.Hour})
	l.Suppress("a", true, at(0))
	if tr, ok := l.Evaluate("a", Present, at(1)); !ok || tr.Rings() || tr.To != Suppressed || !tr.Active {
		t.Errorf("a suppressed alarm: %+v %v", tr, ok)
	}
	if _, ok := l.Suppress("a", true, at(2)); ok {
		t.Error("suppressing twice is a change")
	}
	if tr, ok := l.Suppress("a", false, at(3)); !ok || tr.To != Unacknowledged || !tr.Rings() {
		t.Errorf("back from suppression: %+v", tr)
	}
	if tr, err := l.TakeOut("a", at(4)); err != nil || tr.To != OutOfService {
		t.Error(tr, err)
	}
	if _, ok := l.Suppress("a", false, at(5)); ok || stateOf(l, "a") != OutOfService {
		t.Error("logic put back what a person took out")
	}
	if _, err := l.Shelve("a", time.Second, at(5)); !errors.Is(err, ErrRefused) {
		t.Errorf("shelved out of service: %v", err)
	}
	l.Evaluate("a", Absent, at(6))
	if tr, err := l.PutBack("a", at(7)); err != nil || tr.To != Normal {
		t.Error(tr, err)
	}
	if _, err := l.PutBack("a", at(8)); !errors.Is(err, ErrRefused) {
		t.Error("put back twice")
	}
}

func TestChatterAndFlood(t *testing.T) {
	l := list(t, Definition{Name: "a"}, Definition{Name: "b"})
	raise := func(name string, when time.Duration) {
		l.Evaluate(name, Absent, at(when))
		l.Evaluate(name, Present, at(when))
	}
	raise("a", 0)
	raise("a", 29*time.Second)
	if l.Load(at(29*time.Second)).Chattering != 0 {
		t.Error("two raisings are chatter")
	}
	raise("a", 59*time.Second)
	if l.Load(at(59*time.Second)).Chattering != 1 || l.Load(at(61*time.Second)).Chattering != 0 {
		t.Error("three raisings in a minute are not chatter")
	}
	for i := range 8 {
		raise("b", time.Duration(60+i)*time.Second)
	}
	// Eleven in ten minutes: a flood, until fewer than five in ten minutes.
	if n := l.Load(at(67 * time.Second)); !n.Flood || n.TenMinutes != 11 || n.Floods != 1 || n.Raised != 11 {
		t.Errorf("load %+v", n)
	}
	l.Tick(at(10*time.Minute + 62*time.Second)) // 63 to 67 s are within: five
	if !l.Load(at(10*time.Minute + 62*time.Second)).Flood {
		t.Error("the flood ended at five")
	}
	l.Tick(at(10*time.Minute + 63*time.Second))
	if n := l.Load(at(10*time.Minute + 63*time.Second)); n.Flood || n.TenMinutes != 4 {
		t.Errorf("the flood does not end: %+v", n)
	}
	if n := l.Load(at(24*time.Hour + 2*time.Minute)); n.Stale != 2 || n.Calling != 2 {
		t.Errorf("after a day: %+v", n)
	}
	ten := list(t, Definition{Name: "a"})
	for i := range 10 {
		ten.Evaluate("a", Absent, at(time.Duration(i)*time.Second))
		ten.Evaluate("a", Present, at(time.Duration(i)*time.Second))
	}
	if ten.Load(at(10 * time.Second)).Flood {
		t.Error("ten in ten minutes are a flood")
	}
}

func TestMostUrgentFirst(t *testing.T) {
	l := list(t, Definition{Name: "low", Priority: Low}, Definition{Name: "high, seen", Priority: High}, Definition{Name: "medium"},
		Definition{Name: "high", Priority: High}, Definition{Name: "shelved", Priority: High, ShelveAtMost: time.Hour}, Definition{Name: "normal"}, Definition{Name: "newer"})
	for i := range l.Len() {
		if d, _ := l.At(i); d.Name != "normal" {
			l.Evaluate(d.Name, Present, at(time.Duration(i)*time.Second))
		}
	}
	l.Acknowledge("high, seen", at(9*time.Second))
	l.Shelve("shelved", time.Minute, at(9*time.Second))
	var got []string
	for _, i := range l.Standing(nil) {
		d, _ := l.At(i)
		got = append(got, d.Name)
	}
	want := []string{"high", "newer", "medium", "low", "high, seen", "shelved"}
	for i := range want {
		if i >= len(got) || got[i] != want[i] {
			t.Fatalf("order %q, want %q", got, want)
		}
	}
}

func TestDefinitionsAreChecked(t *testing.T) {
	good := Definition{Name: "a", Priority: High, Action: "look"}
	with := func(change func(*Definition)) Definition { d := good; change(&d); return d }
	for _, d := range [][]Definition{
		{with(func(d *Definition) { d.Name = "" })}, {with(func(d *Definition) { d.Priority = 0 })}, {with(func(d *Definition) { d.Priority = 4 })},
		{with(func(d *Definition) { d.Action = "" })}, {with(func(d *Definition) { d.OnDelay = -1 })},
		{with(func(d *Definition) { d.Deadband = math.NaN() })}, {with(func(d *Definition) { d.Latching, d.ShelveAtMost = true, 1 })},
		{good, good}, make([]Definition, Capacity+1),
	} {
		if _, err := New(d, at(0)); err == nil {
			t.Errorf("accepted %+v", d)
		}
	}
}

// TestNothingIsForgotten drives a list at random and holds it to what an
// alarm system promises.
func TestNothingIsForgotten(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		l := list(t, Definition{Name: "a", OnDelay: 2 * time.Second, OffDelay: time.Second, ShelveAtMost: time.Minute}, Definition{Name: "b", Latching: true})
		now := time.Duration(0)
		for range 60 {
			now += time.Duration(rapid.IntRange(0, 3000).Draw(r, "ms")) * time.Millisecond
			i := rapid.IntRange(0, 1).Draw(r, "alarm")
			d, before := l.At(i)
			what := rapid.IntRange(0, 7).Draw(r, "what")
			copied := *l
			switch what {
			case 0, 1, 2:
				l.Evaluate(d.Name, Condition(what), at(now))
			case 3:
				l.Acknowledge(d.Name, at(now))
			case 4:
				l.Reset(d.Name, at(now))
			case 5:
				l.Shelve(d.Name, 10*time.Second, at(now))
			case 6:
				l.Suppress(d.Name, rapid.Bool().Draw(r, "on"), at(now))
			case 7:
				l.Tick(at(now))
			}
			_, after := l.At(i)
			if _, same := copied.At(i); same != before {
				r.Fatalf("a copy changed: %+v, was %+v", same, before)
			}
			switch {
			case before.State == Unacknowledged && after.State == Normal:
				r.Fatalf("an alarm went unseen")
			case d.Latching && after.State == Normal && before.State != Normal && what != 4 && !before.State.Hidden():
				r.Fatalf("a latch opened without a reset, by %d from %v", what, before.State)
			case after.State == Acknowledged && !after.Active, after.State == Unacknowledged && !after.Active:
				r.Fatalf("%v without its condition", after.State)
			case after.Active && (after.State == Normal || after.State == ReturnedUnacknowledged || after.State == LatchedAcknowledged):
				r.Fatalf("%v though the condition holds", after.State)
			}
		}
	})
}

func TestEvaluationDoesNotAllocate(t *testing.T) {
	l := list(t, Definition{Name: "a", Deadband: 1}, Definition{Name: "b", OnDelay: time.Millisecond})
	dst := make([]int, 0, Capacity)
	now := time.Duration(0)
	if n := testing.AllocsPerRun(1000, func() {
		now += time.Millisecond
		l.High("a", float64(now%7), 3, at(now))
		l.Evaluate("b", Condition(now%3), at(now))
		for _, ok := l.Tick(at(now)); ok; _, ok = l.Tick(at(now)) {
		}
		dst = l.Standing(dst[:0])
		_ = l.Load(at(now))
	}); n != 0 {
		t.Errorf("%v allocations a step", n)
	}
}

func BenchmarkStep(b *testing.B) {
	var d []Definition
	for i := range 20 {
		d = append(d, Definition{Name: string(rune('a' + i)), OnDelay: time.Second})
	}
	l := list(b, d...)
	b.ReportAllocs()
	now := time.Duration(0)
	for b.Loop() {
		now += 50 * time.Millisecond
		for i := range d {
			l.Evaluate(d[i].Name, When(now%time.Minute < time.Second), at(now))
		}
		for _, ok := l.Tick(at(now)); ok; _, ok = l.Tick(at(now)) {
		}
	}
}
