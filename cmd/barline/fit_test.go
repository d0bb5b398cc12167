package main

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"barline/cmd/barline/fullfield"
	"barline/logbook"
	"barline/model/anchor"
	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/emission"
	"barline/model/fibre"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// lawfulCache fills the cache with full-field nodes that follow a law, for the
// range of the points, and returns the model that stands on them: the command
// then has nothing to compute.
func lawfulCache(t *testing.T, points []calibration.Point) *calibration.Model {
	t.Helper()
	t.Setenv("XDG_CACHE_HOME", t.TempDir())
	t.Setenv("HOME", t.TempDir()) // where the cache is kept elsewhere
	b, err := bench.Parse(bench.Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	setup, err := emission.SetupFromBench(b)
	if err != nil {
		t.Fatal(err)
	}
	r, err := rangeOf(setup, points)
	if err != nil {
		t.Fatal(err)
	}
	ab, err := setup.AnchorBench()
	if err != nil {
		t.Fatal(err)
	}
	folder, err := cacheFolder()
	if err != nil {
		t.Skip("no cache folder on this system")
	}
	store, err := fullfield.OpenStore(folder, ab.Spec().Digest())
	if err != nil {
		t.Fatal(err)
	}
	var nodes []anchor.Node
	for _, k := range ab.Plan(nil, r) {
		n := anchor.Node{Density: k.Density, Energy: k.Energy, Moved: k.Moved}
		y := float64(k.Energy)/1.3e-6 - 1
		omega, ok := anchor.Solve(ab.Guide(k.Density), fibre.Frequency(setup.Pulse.Wavelength), 2*k.Density-400-300*y, fibre.Frequency(255*unit.Nanometre))
		if !ok {
			t.Fatalf("no root at %v mol/m³", k.Density)
		}
		n.Lobes = []anchor.Lobe{{Centroid: fibre.Wavelength(omega), Conversion: 0.08}}
		if err := store.Add(n); err != nil {
			t.Fatal(err)
		}
		nodes = append(nodes, n)
	}
	m, err := calibration.NewModel(ab.Build(nodes))
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// scanPoints are the pressures of a scan, and after measure their emission.
func scanPoints() (points []calibration.Point) {
	for bar := 7.5; bar < 11.6; bar += 0.5 {
		points = append(points, calibration.Point{Input: emission.Input{
			Pressure: unit.Pascal(bar) * unit.Bar, Temperature: unit.Celsius(22), Energy: 1.3 * unit.Microjoule}, Status: reading.Good})
	}
	return points
}

func measure(t *testing.T, m *calibration.Model, points []calibration.Point, truth calibration.Corrections) {
	t.Helper()
	for i := range points {
		a, err := m.Answer(nil, points[i].Input, &truth)
		if err != nil {
			t.Fatal(err)
		}
		points[i].Value = a[0].Wavelength
	}
}

func TestFitFromTable(t *testing.T) {
	points := scanPoints()
	measure(t, lawfulCache(t, points), points, calibration.Corrections{calibration.IndexScale: 0.008})
	table := "# scan of the second\npressure_bar,emission_nm,temperature_degC,sigma_nm\n"
	for _, p := range points {
		table += fmt.Sprintf("%.4f,%.6f,22,0.05\n", p.Input.Pressure.Bar(), p.Value.Nanometres())
	}
	file := filepath.Join(t.TempDir(), "scan.csv")
	if err := os.WriteFile(file, []byte(table), 0o600); err != nil {
		t.Fatal(err)
	}
	code, out, stderr := command("fit", "--csv", file, "-b", benchFile(t, string(bench.Sample())), "--free", "index-scale", "--discrepancy", "0.01 nm", "--json")
	var c calibration.Calibration
	if err := json.Unmarshal([]byte(out), &c); err != nil || code != exitDone {
		t.Fatalf("exit %d, %v: %s%s", code, err, out, stderr)
	}
	if len(c.Values) != 1 || math.Abs(c.Values[0].Value-0.008) > 3*c.Values[0].Sigma || c.Points != len(points) || c.After > 0.01e-9 {
		t.Errorf("calibration %+v", c)
	}
	code, out, stderr = command("fit", "--csv", file, "-b", benchFile(t, string(bench.Sample())))
	if code != exitDone || !strings.Contains(out, "index-scale") || !strings.Contains(out, "nm rms before") {
		t.Errorf("exit %d: %s%s", code, out, stderr)
	}
}

// writeScans returns a logbook with two scans, of which the second is 0.6 % off
// in index and misses one step.
func writeScans(t *testing.T, m *calibration.Model, points []calibration.Point) string {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "book")
	book, err := logbook.Open(dir, logbook.Options{})
	if err != nil {
		t.Fatal(err)
	}
	add := func(kind live.Kind, data any) {
		if _, err := book.Append(reading.Stamp{UTC: time.Now().UTC()}, string(kind), data); err != nil {
			t.Fatal(err)
		}
	}
	add(live.KindConfiguration, configurationData{Text: string(bench.Sample())})
	for scan, truth := range []float64{0.002, 0.006} {
		measure(t, m, points, calibration.Corrections{calibration.IndexScale: truth})
		for i, p := range points {
			v := float64(p.Value)
			s := live.StepData{Program: "scan", Step: i + 1, CorePa: float64(p.Input.Pressure), TemperatureK: float64(p.Input.Temperature),
				EnergyJ: float64(p.Input.Energy), MeasuredM: &v, Samples: 9, ScatterM: 0.1e-9, Status: "good"}
			if scan == 1 && i == 4 {
				s.Status = "function check"
			}
			add(live.KindStep, s)
		}
	}
	if err := book.Close(); err != nil {
		t.Fatal(err)
	}
	return dir
}

func TestFitFromLogbookIsWritten(t *testing.T) {
	points := scanPoints()
	dir := writeScans(t, lawfulCache(t, points), points)
	code, out, stderr := command("fit", dir, "--free", "index-scale", "--discrepancy", "0.001 nm", "--name", "after cleaving")
	if code != exitDone || !strings.Contains(out, "+0.60 %") || !strings.Contains(out, "set aside: point 5, function check") {
		t.Errorf("exit %d: %s%s", code, out, stderr)
	}
	code, out, _ = command("fit", dir, "--scan", "1", "--dry-run", "--discrepancy", "0.001 nm", "--free", "index-scale")
	if code != exitDone || !strings.Contains(out, "+0.20 %") {
		t.Errorf("exit %d: %s", code, out)
	}
	written := 0
	for r, err := range logbook.Records(dir, logbook.Filter{Kinds: []string{string(live.KindCalibration)}}) {
		var c calibration.Calibration
		if err != nil || r.Decode(&c) != nil || c.Name != "after cleaving" || math.Abs(c.Values[0].Value-0.006) > 1e-4 {
			t.Errorf("record %s, %v", r.Data, err)
		}
		written++
	}
	if written != 1 {
		t.Errorf("%d calibrations written, want 1", written)
	}
	if code, _, stderr := command("fit", dir, "--scan", "3"); code != exitUsage || !strings.Contains(stderr, "holds 2 scans") {
		t.Errorf("exit %d: %s", code, stderr)
	}
}

func TestFitWrongUse(t *testing.T) {
	heron := benchFile(t, string(bench.Sample()))
	file := func(text string) string {
		path := filepath.Join(t.TempDir(), "p.csv")
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	for _, c := range []struct {
		args []string
		code int
		want string
	}{
		{[]string{"fit"}, exitUsage, "the folder of a logbook"},
		{[]string{"fit", "--csv", "x"}, exitUsage, "-b bench.toml"},
		{[]string{"fit", "a", "--free", "luck"}, exitUsage, `"luck"`},
		{[]string{"fit", "a", "--discrepancy", "0.5"}, exitUsage, `such as "0.5 nm"`},
		{[]string{"fit", "--csv", file("pressure_bar\n9\n"), "-b", heron}, exitUsage, "emission_nm is missing"},
		{[]string{"fit", "--csv", file("pressure,emission_nm\n9,260\n"), "-b", heron}, exitUsage, `column "pressure"`},
		{[]string{"fit", "--csv", file("pressure_bar,emission_nm\n9,2a\n"), "-b", heron}, exitUsage, `p.csv:2: emission_nm = "2a"`},
		{[]string{"fit", "--csv", file("pressure_bar,emission_nm\n9,260\n9,261\n"), "-b", heron}, exitFailed, "at least two pressures"},
	} {
		code, out, stderr := command(c.args...)
		if code != c.code || out != "" || !strings.Contains(stderr, c.want) {
			t.Errorf("%q: exit %d, %q, %q; want %d, %q", c.args, code, out, stderr, c.code, c.want)
		}
	}
}
