package main

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"barline/logbook"
	"barline/model/bench"
	"barline/model/live"
	"barline/model/reading"
)

// restingBook is a logbook of an hour and a half at rest at 9 bar: quiet for
// an hour, and then cell A's gauge reads 60 mbar low.
func restingBook(t *testing.T) (dir string, began time.Time) {
	t.Helper()
	dir = filepath.Join(t.TempDir(), "book")
	book, err := logbook.Open(dir, logbook.Options{})
	if err != nil {
		t.Fatal(err)
	}
	began = time.Date(2026, 12, 1, 9, 0, 0, 0, time.UTC)
	add := func(at time.Time, kind live.Kind, data any) {
		if _, err := book.Append(reading.Stamp{UTC: at, Mono: at.Sub(began)}, string(kind), data); err != nil {
			t.Fatal(err)
		}
	}
	add(began, live.KindConfiguration, configurationData{Text: string(bench.Sample())})
	rng := rand.New(rand.NewPCG(1, 4))
	moved := began.Add(time.Hour)
	for i := 1; i <= 540; i++ {
		at := began.Add(time.Duration(i) * 10 * time.Second)
		residual, apart := -1e-9+0.03e-9*rng.NormFloat64(), 500+20*rng.NormFloat64()
		if at.After(moved) {
			residual, apart = residual+0.27e-9, apart-6000
		}
		add(at, live.KindMeans, live.MeansData{
			PressurePa: 9e5 + 30*rng.NormFloat64(), TemperatureK: 295.15, EnergyJ: 1.3e-6, EmissionM: 261e-9 + residual,
			Residual: &live.MeanData{Mean: residual, Readings: 90}, Disagreement: &live.MeanData{Mean: apart, Readings: 90},
			Warmth: &live.MeanData{Mean: 295.15 + 0.01*rng.NormFloat64(), Readings: 90},
		})
		if i == 66 {
			add(at, live.KindDrift, live.DriftData{Verdict: "quiet stretch learnt"})
		}
	}
	since := moved
	add(began.Add(90*time.Minute), live.KindDrift, live.DriftData{
		Verdict: "drift", Text: "cell A less cell B -60 mbar", Since: &since,
		Steps: []live.StepOffer{{Name: "look at a lamp line", ByHand: true}, {Name: "compare at 1 bar", Procedure: "[procedure]\nname = \"compare at 1 bar\"\n"}},
	})
	if err := book.Close(); err != nil {
		t.Fatal(err)
	}
	return dir, began
}

func TestDriftComparesWithTheLastGoodStretch(t *testing.T) {
	t.Setenv("XDG_CACHE_HOME", t.TempDir())
	t.Setenv("HOME", t.TempDir())
	dir, began := restingBook(t)
	code, out, stderr := command("drift", dir, "--json")
	var c comparison
	if err := json.Unmarshal([]byte(out), &c); err != nil || code != exitDone {
		t.Fatalf("exit %d, %v: %s%s", code, err, out, stderr)
	}
	if !c.GoodFrom.Equal(began.Add(time.Minute)) || !c.GoodTo.Equal(began.Add(time.Hour)) || c.Means < 170 || !c.Matters {
		t.Errorf("compares %v to %v with %d means, matters %v", c.GoodFrom, c.GoodTo, c.Means, c.Matters)
	}
	for _, m := range c.Moved {
		want := map[string]float64{"wavelength": 0.27e-9, "gauge disagreement": -6000, "fibre temperature": 0}[m.Quantity]
		if math.Abs(float64(m.Moved)-want) > 5*float64(m.Sigma) {
			t.Errorf("%s moved by %v ± %v, put in %v", m.Quantity, m.Moved, m.Sigma, want)
		}
	}
	if len(c.Findings) == 0 || !strings.HasPrefix(c.Findings[0].Cause, "cell A gauge") {
		t.Errorf("names %+v", c.Findings)
	}
	for _, step := range []struct {
		want string
		args []string
	}{
		{"cell A gauge zero", []string{"drift", dir}},
		{"Nothing moved", []string{"drift", dir, "--good", "2026-12-01T09:00:00Z/2026-12-01T09:30:00Z", "--over", "2026-12-01T09:30:00Z/2026-12-01T10:00:00Z"}},
		{"name = \"compare at 1 bar\"", []string{"drift", dir, "--step"}},
		{"overlapping", []string{"drift", dir, "--allan", "emission"}},
		{`"quantity":"pressure"`, []string{"drift", dir, "--allan", "pressure", "--json"}},
	} {
		if code, out, stderr := command(step.args...); code != exitDone || !strings.Contains(out, step.want) {
			t.Errorf("%q: exit %d, %q, %q; want %q", step.args, code, out, stderr, step.want)
		}
	}
}

// White scatter averages away with the root of the time.
func TestAllanOfWhiteScatter(t *testing.T) {
	dir, _ := restingBook(t)
	code, out, stderr := command("drift", dir, "--allan", "residual", "--over", "2026-12-01T09:00:00Z/2026-12-01T10:00:00Z", "--json")
	var got struct {
		Rows []allanRow `json:"rows"`
	}
	if err := json.Unmarshal([]byte(out), &got); err != nil || code != exitDone || len(got.Rows) < 6 {
		t.Fatalf("exit %d, %v: %s%s", code, err, out, stderr)
	}
	for i, want := range []float64{0.03, 0.03 / math.Sqrt2, 0.015} {
		if r := got.Rows[i]; math.Abs(float64(r.Deviation)/want-1) > 0.2 || float64(r.Over) != 10*math.Pow(2, float64(i)) {
			t.Errorf("over %v s: %v nm, want about %.4f nm", r.Over, r.Deviation, want)
		}
	}
}

func TestDriftWrongUse(t *testing.T) {
	dir, _ := restingBook(t)
	empty := filepath.Join(t.TempDir(), "empty")
	book, err := logbook.Open(empty, logbook.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := book.Append(reading.Stamp{UTC: time.Now()}, "note", live.NoteData{Text: "x"}); err != nil {
		t.Fatal(err)
	}
	if err := book.Close(); err != nil {
		t.Fatal(err)
	}
	for want, args := range map[string][]string{
		"the folder of a logbook":       {"drift"},
		"expected two times":            {"drift", dir, "--good", "yesterday"},
		"expected emission, residual":   {"drift", dir, "--allan", "luck"},
		"nothing was at rest":           {"drift", dir, "--over", "2026-12-02T09:00:00Z/2026-12-02T10:00:00Z"},
		"has nothing at rest near":      {"drift", dir, "--good", "2026-11-02T09:00:00Z/2026-11-02T10:00:00Z"},
		"holds no means":                {"drift", empty},
		"longest run without a gap has": {"drift", dir, "--allan", "pressure", "--over", "2026-12-02T09:00:00Z/2026-12-02T10:00:00Z"},
	} {
		if code, out, stderr := command(args...); code == exitDone || out != "" || !strings.Contains(stderr, want) {
			t.Errorf("%q: exit %d, %q, %q; want %q", args, code, out, stderr, want)
		}
	}
}
