package main

import (
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/live"
)

func keptAs(name string, made time.Time) *calibration.Calibration {
	c := &calibration.Calibration{Name: name, Made: made, PressurePa: [2]float64{7e5, 11e5}, EnergyJ: [2]float64{1.3e-6, 1.3e-6}, Points: 9,
		Values: []calibration.Value{{Parameter: "index-scale", Unit: "1", Value: 0.002, Sigma: 0.001}}}
	for range 1 + 6 { // of the value and of the bend
		c.Covariance = append(c.Covariance, make([]float64, 7))
	}
	c.Corrections[calibration.IndexScale] = 0.002
	return c
}

func TestCalibrationStoreKeepsAndFinds(t *testing.T) {
	s := calibrationsOf(t.TempDir())
	if known, use, err := s.load(); len(known) > 0 || use.Name != "" || err != nil {
		t.Fatalf("an empty folder: %v %v %v", known, use, err)
	}
	day := time.Date(2026, 12, 1, 9, 0, 0, 0, time.UTC)
	for _, c := range []*calibration.Calibration{keptAs("scan of noon", day.Add(time.Hour)), keptAs("scan/of: morning", day)} {
		if err := s.add(c); err != nil {
			t.Fatal(err)
		}
	}
	if err := s.choose(chosen{Name: "scan of noon", Earlier: []string{""}}); err != nil {
		t.Fatal(err)
	}
	known, use, err := s.load()
	if err != nil || len(known) != 2 || known[0].Name != "scan/of: morning" || use.Name != "scan of noon" || len(use.Earlier) != 1 {
		t.Fatalf("%v %+v %v", known, use, err)
	}
	for part, want := range map[string]string{"NOON": "scan of noon", "scan/of: morning": "scan/of: morning", "scan": "2 calibrations", "evening": "expected one of"} {
		c, err := named(known, part)
		if err == nil && c.Name != want || err != nil && !strings.Contains(err.Error(), want) {
			t.Errorf("%q: %v, %v", part, c, err)
		}
	}
	if err := os.WriteFile(filepath.Join(s.folder, "cut.json"), []byte(`{"name":"cut"`), 0o644); err != nil {
		t.Fatal(err)
	}
	if known, _, err := s.load(); err == nil || !strings.Contains(err.Error(), "cut.json") || len(known) != 2 {
		t.Errorf("a file that was cut: %v, %v", len(known), err)
	}
}

// Fit, adopt, list, compare, predict and revert, on a logbook that nobody is
// writing.
func TestCalibrationsAreManaged(t *testing.T) {
	points := scanPoints()
	folder := writeScans(t, lawfulCache(t, points), points)
	file := benchFile(t, string(bench.Sample()))
	predict := []string{"predict", "-b", file, "--pressure", "9 bar", "--temperature", "22 degC", "--logbook", folder, "--calibration"}
	for _, step := range []struct {
		want string
		args []string
	}{
		{"index-scale", []string{"fit", folder, "--scan", "1", "--free", "index-scale", "--name", "first"}},
		{"index-scale", []string{"fit", folder, "--scan", "2", "--free", "index-scale", "--name", "second", "--adopt"}},
		{"in use  second", []string{"fit", "list", folder}},
		{`"name":"second","in_use":true`, []string{"fit", "list", folder, "--json"}},
		{"in use from the next start on: first", []string{"fit", "adopt", folder, "first"}},
		{"9 points from 7.5 bar to 11.5 bar", []string{"fit", "show", folder, "first"}},
		{"as stated", []string{"fit", "compare", folder, "first"}},
		{"nm with second", []string{"fit", "compare", folder, "first", "second", "--scan", "2"}},
		{"(anchored, calibration second)", append(slices.Clone(predict), "second")},
		{"in use from the next start on: second", []string{"fit", "revert", folder}},
		{"without a calibration", []string{"fit", "revert", folder}},
		{"adopted: first", []string{"log", "show", folder}},
	} {
		if code, out, stderr := command(step.args...); code != exitDone || !strings.Contains(out, step.want) {
			t.Errorf("%q: exit %d, %q, %q; want %q", step.args, code, out, stderr, step.want)
		}
	}
	predict[4] = "7.05 bar"
	for want, args := range map[string][]string{
		"none was before":   {"fit", "revert", folder},
		"expected one of":   {"fit", "adopt", folder, "third"},
		"takes the folder":  {"fit", "adopt", folder},
		"another --name":    {"fit", folder, "--free", "index-scale", "--name", "first"},
		"leave --emission":  {"predict", "--calibration", "x", "--emission", "estimate"},
		"does not go with":  {"fit", folder, "--adopt", "--dry-run"},
		"is no calibration": append(slices.Clone(predict), file),
	} {
		if code, out, stderr := command(args...); code == exitDone || !strings.Contains(stderr, want) {
			t.Errorf("%q: exit %d, %q, %q; want %q", args, code, out, stderr, want)
		}
	}
	if code, out, stderr := command(append(predict, "second")...); code != exitDone || !strings.Contains(out, "beyond its data") {
		t.Errorf("7.05 bar from data above 7.5 bar: exit %d, %q, %q", code, out, stderr)
	}
}

// The rows of the last scan since the start become a calibration, and those of
// an earlier one do not count.
func TestRowsOfTheLastScanAreFitted(t *testing.T) {
	points := scanPoints()
	m := lawfulCache(t, points)
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	s, err := newSession(b, bench.Sample())
	if err != nil {
		t.Fatal(err)
	}
	var rows []live.StepData
	for _, truth := range []float64{0.02, 0.004} {
		measure(t, m, points, calibration.Corrections{calibration.IndexScale: truth})
		for i, p := range points {
			v := float64(p.Value)
			rows = append(rows, live.StepData{Program: "scan", Step: i + 1, CorePa: float64(p.Input.Pressure), TemperatureK: float64(p.Input.Temperature),
				EnergyJ: float64(p.Input.Energy), MeasuredM: &v, Samples: 9, ScatterM: 0.05e-9, Status: "good"})
		}
	}
	now := time.Date(2026, 12, 1, 12, 0, 0, 0, time.UTC)
	g := &guided{estimate: s.predictor, anchored: cachedNodes(s.predictor)}
	c, err := s.fitRows(g, rows, now)
	if err != nil {
		t.Fatal(err)
	}
	if c.Points != len(points) || c.Name != "scan of 2026-12-01 12:00" || c.After > 0.05e-9 || c.Before < 0.3e-9 {
		t.Errorf("%d points, %q, %v before, %v after", c.Points, c.Name, c.Before, c.After)
	}
	laid, err := g.Calibrated(c)
	if err != nil {
		t.Fatal(err)
	}
	if p := laid.Predict(points[4].Input, nil); p.Calibration != c.Name || math.Abs(float64(p.Emission-points[4].Value)) > 0.1e-9 {
		t.Errorf("%q puts %v to %.2f nm, measured %.2f nm", p.Calibration, points[4].Input.Pressure, p.Emission.Nanometres(), points[4].Value.Nanometres())
	}
	for want, try := range map[string]func() (*calibration.Calibration, error){
		"do not stand yet":       func() (*calibration.Calibration, error) { return s.fitRows(&guided{estimate: s.predictor}, rows, now) },
		"no scan has been taken": func() (*calibration.Calibration, error) { return s.fitRows(g, nil, now) },
		"at least two pressures": func() (*calibration.Calibration, error) {
			return s.fitRows(g, append(rows[:1:1], rows[0], rows[0]), now)
		},
		"0 of 9 points": func() (*calibration.Calibration, error) {
			bad := append([]live.StepData(nil), rows[:9]...)
			for i := range bad {
				bad[i].Status = "function check"
			}
			return s.fitRows(g, bad, now)
		},
	} {
		if _, err := try(); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%v; want %q", err, want)
		}
	}
}
