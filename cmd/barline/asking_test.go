package main

import (
	"testing"
	"time"

	"barline/cmd/barline/fullfield"
	"barline/model/bench"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/unit"
)

func heronAsking(t *testing.T) *asking {
	t.Helper()
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	setup, err := emission.SetupFromBench(b)
	if err != nil {
		t.Fatal(err)
	}
	p, err := emission.NewPredictor(setup)
	if err != nil {
		t.Fatal(err)
	}
	a, err := newAsking(p)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// standing is a bench whose gas stands at a pressure.
func standing(bar float64, energy unit.Joule) *live.Snapshot {
	s := &live.Snapshot{Core: unit.Pascal(bar * 1e5), CoreKnown: true}
	s.Prediction.Input = emission.Input{Pressure: s.Core, Temperature: 295.15, Energy: energy}
	for range 32 {
		s.Profile = append(s.Profile, s.Core)
	}
	return s
}

func TestAskingFollowsTheGas(t *testing.T) {
	const energy = 1.3 * unit.Microjoule
	start := time.Date(2026, 12, 1, 12, 0, 0, 0, time.UTC)
	at := func(seconds float64) time.Time { return start.Add(time.Duration(seconds * 1e9)) }
	type moment struct {
		what    string
		seconds float64
		bar     float64
		energy  unit.Joule
		answers bool // the question under way is answered just before
		asks    bool
	}
	for name, story := range map[string][]moment{
		"a gas that stands is asked for once": {
			{"at first", 0, 9, energy, false, true}, {"while it runs", 0.5, 9, energy, false, false},
			{"when it is answered", 0.8, 9.001, energy, true, false}, {"much later", 60, 9.004, energy, false, false},
			{"moved by a tenth of a nanometre", 61, 9.02, energy, false, true},
		},
		"a gas that moves is asked for after a rest": {
			{"at first", 0, 9, energy, false, true}, {"while it runs", 0.5, 9.2, energy, false, false},
			{"at once after the answer", 0.8, 9.3, energy, true, false}, {"rested as long as it ran", 1.61, 9.4, energy, false, true},
			{"while it runs", 1.7, 9.5, energy, false, false},
		},
		"what nobody needs any more is dropped, once": {
			{"at first", 0, 3, energy, false, true}, {"far away", 0.3, 4.2, energy, false, true},
			{"far away again", 0.6, 6, energy, false, false}, {"answered", 1, 6.1, energy, true, false},
			{"rested", 2, 6.2, energy, false, true},
			{"far away after an answer", 2.3, 9.5, energy, false, true},
		},
		"energy counts too": {
			{"at first", 0, 9, energy, false, true}, {"noise", 1, 9, 1.003 * energy, true, false},
			{"sagged", 6, 9, 0.99 * energy, false, true},
		},
	} {
		t.Run(name, func(t *testing.T) {
			a := heronAsking(t)
			for _, m := range story {
				if m.answers {
					if p, ok := a.answered(at(m.seconds), fullfield.Answered{Question: a.question, Err: errTest}); !ok || p.Err == "" {
						t.Fatalf("%s: the answer was not taken", m.what)
					}
				}
				setup, asks, err := a.next(at(m.seconds), standing(m.bar, m.energy))
				if err != nil || asks != m.asks {
					t.Fatalf("%s: asks %v, %v; want %v", m.what, asks, err, m.asks)
				}
				if asks && (setup.Pulse.Energy != m.energy || setup.Gas.Pressure != unit.Pascal(m.bar*1e5) || setup.Density != nil) {
					t.Errorf("%s: asks for %v, %v, profile %v", m.what, setup.Gas.Pressure, setup.Pulse.Energy, setup.Density)
				}
			}
		})
	}
}

var errTest = errTold("told to")

type errTold string

func (e errTold) Error() string { return string(e) }

// While gas flows through the core the run has its profile; the answer to a
// question that was dropped is not shown as that of another.
func TestAskingKnowsTheProfile(t *testing.T) {
	a := heronAsking(t)
	s := standing(9, 1.3*unit.Microjoule)
	for i := range s.Profile {
		s.Profile[i] = unit.Pascal(9.2e5 - 0.4e5*float64(i)/31)
	}
	now := time.Date(2026, 12, 1, 12, 0, 0, 0, time.UTC)
	setup, ok, err := a.next(now, s)
	if err != nil || !ok || setup.Density == nil {
		t.Fatalf("%v %v, profile %v", ok, err, setup.Density)
	}
	if first, last := setup.Density.At(0), setup.Density.At(0.3); first < 1.02 || first > 1.025 || last < 0.975 || last > 0.98 {
		t.Errorf("relative density %v at cell A, %v at cell B; want 9.2 and 8.8 over 9", first, last)
	}
	old := setup
	if _, ok, _ := a.next(now, standing(5, 1.3*unit.Microjoule)); !ok {
		t.Fatal("far away, and not asked anew")
	}
	if _, ok := a.answered(now, fullfield.Answered{Question: old, Err: errTest}); ok {
		t.Error("the answer to the dropped question was taken")
	}
	for _, s := range []*live.Snapshot{{}, standing(0, 1), standing(9, 0), {CoreKnown: true}} {
		if _, ok, err := heronAsking(t).next(now, s); ok || err != nil {
			t.Errorf("%+v is asked for: %v", s.Prediction.Input, err)
		}
	}
}
