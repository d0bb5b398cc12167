package main

import (
	"context"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// quick is a run that takes a tenth of a second.
func quick(more ...string) []string {
	args := append(bore("--length", "2 cm", "--tolerance", "1e-3"), more...)
	args[0] = "propagate"
	return args
}

func TestPropagatePrintsItsKeys(t *testing.T) {
	code, out, stderr := command(quick("--pressure", "9 bar", "--json")...)
	if code != exitDone || stderr != "" {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var got map[string]any
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	for _, key := range strings.Fields(`gas pressure_bar temperature_K molar_density_mol_m3 index_minus_one effective_index_minus_one
		beta1_s_m beta2_fs2_m beta3_fs3_m zero_dispersion_nm effective_area_um2 n2_m2_W gamma_1_W_m peak_power_W soliton_order
		dispersion_length_m fission_length_m sources branches energy_in_uJ ultraviolet_uJ notes
		emission_nm emission_peak_nm emission_width_nm conversion_percent energy_out_uJ compression_m compressed_peak_power_W
		ionised_fraction energy_balance edge_energy steps evaluations grid_points tolerance seconds reliable reasons`) {
		if _, ok := got[key]; !ok {
			t.Errorf("no %s in %s", key, out)
		}
		delete(got, key)
	}
	if len(got) > 0 {
		t.Errorf("more keys than promised: %v", got)
	}
}

// The reference case reaches the output whole; model/pulse checks the others.
func TestPropagateMeetsTheReference(t *testing.T) {
	args := bore("--pressure", "900 kPa", "--plasma", "averaged", "--json")
	args[0] = "propagate"
	code, out, stderr := command(args...)
	if code != exitDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var got struct {
		Emission   float64 `json:"emission_nm"`
		Peak       float64 `json:"emission_peak_nm"`
		Conversion float64 `json:"conversion_percent"`
		Out        float64 `json:"energy_out_uJ"`
		Reliable   bool    `json:"reliable"`
	}
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	if math.Abs(got.Emission-257.81) > 1 || math.Abs(got.Peak-259.04) > 1 || math.Abs(got.Conversion-6.67) > 0.4 || math.Abs(got.Out/1.5-0.927) > 0.018 || !got.Reliable {
		t.Errorf("got %+v", got)
	}
}

func TestPropagateInWords(t *testing.T) {
	code, out, stderr := command(quick("--pressure", "9 bar")...)
	if code != exitDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	for _, want := range []string{"No emission", "compression", "1.5 uJ in", "4096 points", "bare bore"} {
		if !strings.Contains(out, want) {
			t.Errorf("does not say %q:\n%s", want, out)
		}
	}
}

func TestPropagatedSpectrum(t *testing.T) {
	code, out, stderr := command(quick("--pressure", "9 bar", "--csv")...)
	if code != exitDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	rows, err := csv.NewReader(strings.NewReader(out)).ReadAll()
	if err != nil || len(rows) < 900 || rows[0][0] != "wavelength_nm" || len(rows[1]) != 3 {
		t.Fatalf("%d rows, %v", len(rows), err)
	}
}

func TestPropagateDraws(t *testing.T) {
	for _, name := range []string{"light.svg", "light.png"} {
		path := filepath.Join(t.TempDir(), name)
		if code, _, stderr := command(quick("--pressure", "9 bar", "--plot", path)...); code != exitDone {
			t.Fatalf("exit %d, %s", code, stderr)
		}
		if info, err := os.Stat(path); err != nil || info.Size() < 1000 {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// A sweep that was stopped goes on: what the file holds is not run again, a
// torn line is.
func TestSweepGoesOn(t *testing.T) {
	path := filepath.Join(t.TempDir(), "scan.jsonl")
	sweep := quick("--sweep", "pressure=8bar:10bar:1bar", "--resume", path, "--json")
	code, first, stderr := command(sweep...)
	if code != exitDone || strings.Count(first, "\n") != 3 {
		t.Fatalf("exit %d, %s: %s", code, stderr, first)
	}
	if code, again, _ := command(sweep...); code != exitDone || again != first {
		t.Errorf("the second time it printed\n%s\nwant\n%s", again, first)
	}
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, text[:len(text)-40], 0o644); err != nil {
		t.Fatal(err)
	}
	code, third, _ := command(sweep...)
	a, b := strings.Split(first, "\n"), strings.Split(third, "\n")
	same := 0
	for i := range a {
		if i < len(b) && a[i] != "" && a[i] == b[i] {
			same++
		}
	}
	if code != exitDone || len(a) != len(b) || same != 2 { // seconds differ in the step that ran again
		t.Errorf("after a torn line %d of 3 steps were kept, want 2", same)
	}
}

func TestSweepTables(t *testing.T) {
	code, out, stderr := command(quick("--sweep", "energy=1uJ:1.5uJ:0.5uJ", "--pressure", "9 bar")...)
	if code != exitDone || !strings.Contains(out, "compression") || strings.Count(out, "\n") != 3 {
		t.Errorf("exit %d, %s:\n%s", code, stderr, out)
	}
	code, out, _ = command(quick("--sweep", "pressure=0bar:9bar:4.5bar", "--csv")...)
	rows, err := csv.NewReader(strings.NewReader(out)).ReadAll()
	if code != exitDone || err != nil || len(rows) != 4 {
		t.Fatalf("exit %d, %d rows, %v", code, len(rows), err)
	}
}

func TestPropagateTakesAMeasuredSpectrum(t *testing.T) {
	path := filepath.Join(t.TempDir(), "pump.csv")
	text := "wavelength_nm,energy,phase_rad\n"
	for nm := 900.0; nm < 1200; nm++ {
		d := (nm - 1030) / 25
		text += fmt.Sprintf("%g,%g,0\n", nm, math.Exp(-d*d/2))
	}
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	code, out, stderr := command(quick("--pressure", "9 bar", "--spectrum", path)...)
	if code != exitDone || !strings.Contains(out, "1.5 uJ in") {
		t.Errorf("exit %d, %s: %s", code, stderr, out)
	}
	if err := os.WriteFile(path, []byte(text[:200]), 0o600); err != nil {
		t.Fatal(err)
	}
	if code, _, stderr = command(quick("--pressure", "9 bar", "--spectrum", path)...); code != exitUsage || !strings.Contains(stderr, "--spectrum") {
		t.Errorf("a short file: exit %d, %s", code, stderr)
	}
}

// Stopped, a command ends at once, says so, and has not failed.
func TestStoppedRuns(t *testing.T) {
	t.Setenv("XDG_CACHE_HOME", t.TempDir())
	t.Setenv("HOME", t.TempDir())
	for _, args := range [][]string{
		quick("--pressure", "9 bar"),
		quick("--sweep", "pressure=8bar:10bar:1bar", "--csv"),
		bore("--pressure", "9 bar", "--emission", "anchored"),
	} {
		ctx, cancel := context.WithCancel(context.Background())
		cancel()
		var out, stderr strings.Builder
		if code := run(ctx, args, strings.NewReader(""), &out, &stderr); code != exitDone || !strings.Contains(stderr.String(), "stopped") {
			t.Errorf("%s: exit %d, %s", args[0], code, stderr.String())
		}
	}
}

func TestPropagateRefuses(t *testing.T) {
	for _, c := range []struct {
		args []string
		code int
		want string
	}{
		{quick("--pressure", "9 bar", "--plot", "light.gif"), exitUsage, ".svg or .png"},
		{quick("--pressure", "9 bar", "--resume", "x"), exitUsage, "--sweep"},
		{quick("--sweep", "pressure=1bar:2bar:1bar", "--plot", "light.svg"), exitUsage, "--plot"},
		{quick("--pressure", "9 bar", "--json", "--csv"), exitUsage, "json"},
		{quick("--pressure", "9 bar", "--tolerance", "2"), exitUsage, "--tolerance"},
		{quick("--pressure", "9"), exitUsage, "unit"},
		{quick("--pressure", "9 bar", "--plasma", "none"), exitUsage, "radial"},
		{quick("--pressure", "9 bar", "--energy", "0 uJ"), exitFailed, "above 0"},
		{quick("--pressure", "9000 bar"), exitFailed, "pressure"},
		{quick("--pressure", "9 bar", "--gdd", "1000000 fs2"), exitFailed, "time window"},
	} {
		code, out, stderr := command(c.args...)
		if code != c.code || !strings.Contains(stderr, c.want) || out != "" {
			t.Errorf("%q: exit %d, %q, want %d and %q", c.args[len(c.args)-2:], code, stderr, c.code, c.want)
		}
	}
}
