package main

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"barline/model/bench"
)

// sampleBench writes the sample bench file into a folder of its own.
func sampleBench(t *testing.T) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "bench.toml")
	if err := os.WriteFile(path, bench.Sample(), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func TestPlanPrintsItsKeys(t *testing.T) {
	path := sampleBench(t)
	plot := filepath.Join(t.TempDir(), "map.svg")
	code, out, stderr := command("plan", "-b", path, "--target", "265nm", "--gas", "argon, helium", "--json", "--plot", plot)
	if code != exitDone || stderr != "" {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var got plannedObject
	d := json.NewDecoder(strings.NewReader(out))
	d.DisallowUnknownFields()
	if err := d.Decode(&got); err != nil {
		t.Fatal(err)
	}
	if len(got.Choices) != 1 || got.Choices[0].Gas != "argon" || len(got.Refusals) != 1 || got.Refusals[0].Gas != "helium" || got.Refusals[0].Why == "" {
		t.Fatalf("got %s", out)
	}
	c := got.Choices[0]
	// What the plan says, predict says too.
	code, out, stderr = command("predict", "-b", path, "--pressure", digits(float64(c.Pressure), 8)+"bar", "--energy", digits(float64(c.Energy), 8)+"uJ", "--json")
	if code != exitDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var there struct {
		Emission float64 `json:"emission_nm"`
	}
	if err := json.Unmarshal([]byte(out), &there); err != nil || math.Abs(there.Emission-265) > 0.1 {
		t.Errorf("predict says %g nm there (%v), expected 265 nm", there.Emission, err)
	}
	if c.Answer != "estimate" || c.PerEnergy != nil || c.SteadyPressure == nil || c.Fill == nil || c.Fill.Purge <= 0 || c.Propagated != nil {
		t.Errorf("choice %+v", c)
	}
	if svg, err := os.ReadFile(plot); err != nil || !strings.Contains(string(svg), "target 265 nm") || !strings.Contains(string(svg), "absolute pressure (bar)") {
		t.Errorf("plot: %v", err)
	}
}

func TestPlanSaysItInWords(t *testing.T) {
	path := sampleBench(t)
	code, out, stderr := command("plan", "-b", path, "--target", "240nm:280nm", "--tolerance", "0.5 nm")
	if code != exitDone || stderr != "" {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	for _, want := range []string{"Target 240 to 280 nm", "krypton", "narrowest margin", "within 0.5 nm", "cycles", "Does not reach it", "helium", "estimate", "bar", "uJ"} {
		if !strings.Contains(out, want) {
			t.Errorf("no %q in\n%s", want, out)
		}
	}
	if strings.Contains(out, "NaN") || strings.Contains(out, "Inf") {
		t.Errorf("not a number in\n%s", out)
	}
	// Without a bench there is no panel to estimate with.
	code, out, _ = command("plan", "--target", "220nm", "--core-diameter", "34 um", "--length", "30 cm", "--wavelength", "1030 nm", "--duration", "35 fs", "--energy", "1.5 uJ", "--gas", "argon")
	if code != exitDone || !strings.Contains(out, "needs a bench file") {
		t.Errorf("exit %d\n%s", code, out)
	}
}

func TestPlanSaysWhatIsWrong(t *testing.T) {
	path := sampleBench(t)
	for _, c := range []struct {
		args []string
		code int
		want string
	}{
		{[]string{"-b", path}, exitUsage, "--target"},
		{[]string{"-b", path, "--target", "265"}, exitUsage, "unit"},
		{[]string{"-b", path, "--target", "5nm"}, exitUsage, "100 nm"},
		{[]string{"-b", path, "--target", "2um"}, exitUsage, "below the pump"},
		{[]string{"-b", path, "--target", "265nm", "--pressure", "9 bar"}, exitUsage, "--pressures"},
		{[]string{"-b", path, "--target", "265nm", "--pressures", "9bar"}, exitUsage, "FROM:TO"},
		{[]string{"-b", path, "--target", "265nm", "--energies", "2uJ:1uJ"}, exitUsage, "rising"},
		{[]string{"-b", path, "--target", "265nm", "--tolerance", "0 nm"}, exitUsage, "above zero"},
		{[]string{"-b", path, "--target", "265nm", "--best", "0"}, exitUsage, "1 to 10"},
		{[]string{"-b", path, "--target", "265nm", "--plot", "map.pdf"}, exitUsage, ".svg"},
		{[]string{"-b", path, "--target", "265nm", "--gas", "phlogiston"}, exitUsage, "phlogiston"},
		{[]string{"-b", path, "--target", "265nm", "--gas", "argon, argon"}, exitUsage, "differ"},
		{[]string{"-b", path, "--target", "265nm", "--gas", ","}, exitUsage, "differ"},
		{[]string{"--target", "265nm"}, exitUsage, "--core-diameter"},
		// Physics refuses: the bound that gives way first, and by how much.
		{[]string{"-b", path, "--target", "265nm", "--gas", "argon", "--pressures", "1bar:5bar"}, exitFailed, "pressures to be tried gives way first"},
		{[]string{"-b", path, "--target", "150nm"}, exitFailed, "the nearest is"},
		{[]string{"-b", path, "--target", "265nm", "--gas", "argon", "--temperature", "200 degC"}, exitFailed, "temperature"},
	} {
		code, _, stderr := command(append([]string{"plan"}, c.args...)...)
		if code != c.code || !strings.Contains(stderr, c.want) {
			t.Errorf("plan %v: exit %d, %s; expected %d and %q", c.args, code, stderr, c.code, c.want)
		}
	}
}

// One choice is propagated for real.
func TestPlanConfirms(t *testing.T) {
	if testing.Short() {
		t.Skip("propagates")
	}
	code, out, stderr := command("plan", "-b", sampleBench(t), "--target", "265nm", "--gas", "argon", "--full", "--best", "1", "--json")
	if code != exitDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var got plannedObject
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	p := got.Choices[0].Propagated
	if p == nil || p.Emission == nil || p.First == nil {
		t.Fatalf("nothing propagated: %s", out)
	}
	if math.Abs(float64(*p.Emission)-265) > 2 || p.PerPressure == nil || *p.PerPressure < 0.002 || *p.PerPressure > 0.03 || !p.Reliable {
		t.Errorf("propagation: %s", out)
	}
}

// The anchored answer knows the slope over energy, and meets propagation.
func TestPlanAnchors(t *testing.T) {
	if os.Getenv("BARLINE_LONG") == "" {
		t.Skip("some twenty full-field runs: BARLINE_LONG=1")
	}
	t.Setenv("XDG_CACHE_HOME", t.TempDir())
	code, out, stderr := command("plan", "-b", sampleBench(t), "--target", "265nm", "--gas", "argon", "--emission", "anchored", "--full", "--best", "1", "--json")
	if code != exitDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var got plannedObject
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	c := got.Choices[0]
	if c.Answer != "anchored" || c.PerEnergy == nil || c.Propagated == nil || c.Propagated.First == nil || math.Abs(float64(*c.Propagated.First)-265) > 1.5 {
		t.Errorf("expected the anchored pressure to emit within 1.5 nm of 265 nm: %s", out)
	}
}
