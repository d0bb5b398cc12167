package main

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"strings"
	"testing"

	"barline/model/bench"
)

// bore is the reference case of a bare capillary, as flags.
func bore(more ...string) []string {
	return append([]string{
		"predict", "--gas", "argon", "--temperature", "293.15 K", "--fibre", "capillary", "--core-diameter", "34 um", "--length", "30 cm",
		"--wavelength", "1030 nm", "--duration", "35 fs", "--shape", "sech2", "--energy", "1.5 uJ",
		"--density", "ideal", "--index", "borzsonyi-2008", "--n2", "9.11e-24 m2/W",
	}, more...)
}

func TestPredictPrintsItsKeys(t *testing.T) {
	code, out, stderr := command(bore("--pressure", "9 bar", "--json")...)
	if code != exitDone || stderr != "" {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var got map[string]any
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	for _, key := range strings.Fields(`gas pressure_bar temperature_K molar_density_mol_m3 index_minus_one effective_index_minus_one
		beta1_s_m beta2_fs2_m beta3_fs3_m zero_dispersion_nm effective_area_um2 n2_m2_W gamma_1_W_m peak_power_W soliton_order
		dispersion_length_m fission_length_m emission_nm emission_sigma_nm branches sources limits`) {
		if _, ok := got[key]; !ok {
			t.Errorf("no %s in %s", key, out)
		}
		delete(got, key)
	}
	if len(got) > 0 {
		t.Errorf("more keys than promised: %v", got)
	}
}

// The numbers of an independent calculation reach the output whole.
func TestPredictMeetsTheReference(t *testing.T) {
	code, out, stderr := command(bore("--pressure", "900 kPa", "--json")...)
	if code != exitDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var got struct {
		Zero  []float64 `json:"zero_dispersion_nm"`
		Beta2 float64   `json:"beta2_fs2_m"`
		Gamma float64   `json:"gamma_1_W_m"`
		N     float64   `json:"soliton_order"`
	}
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	if len(got.Zero) != 1 || math.Abs(got.Zero[0]-622.740) > 6e-4 || math.Abs(got.Beta2+854.2) > 0.051 || math.Abs(got.Gamma-1.063e-6) > 6e-10 || math.Abs(got.N-4.3048) > 6e-5 {
		t.Errorf("got %+v", got)
	}
}

func TestPredictSweeps(t *testing.T) {
	code, out, stderr := command(bore("--sweep", "pressure=7bar:11bar:0.5bar", "--csv")...)
	if code != exitDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	rows, err := csv.NewReader(strings.NewReader(out)).ReadAll()
	if err != nil || len(rows) != 10 || rows[9][0] != "11" {
		t.Fatalf("%d rows, %v:\n%s", len(rows), err, out)
	}
	_, lines, _ := command(bore("--sweep", "pressure=7bar:11bar:0.5bar", "--json")...)
	for i, line := range strings.Split(strings.TrimSpace(lines), "\n") {
		var o predictedObject
		if err := json.Unmarshal([]byte(line), &o); err != nil {
			t.Fatalf("line %d: %v in %s", i+1, err, line)
		}
	}
	_, table, _ := command(bore("--sweep", "energy=0uJ:1uJ:0.5uJ", "--pressure", "9 bar")...)
	if !strings.Contains(table, "no pulse energy") || strings.Contains(table, "NaN") {
		t.Errorf("the sweep over energy says\n%s", table)
	}
}

func TestPredictFromABenchFile(t *testing.T) {
	path := benchFile(t, string(bench.Sample()))
	code, out, stderr := command("predict", "-b", path, "--pressure", "9 bar", "--explain")
	if code != exitDone || stderr != "" {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	for _, want := range []string{"antiresonant, core 34 um, wall 180 nm", "J. Opt. Soc. Am. 54, 1362 (1964)", "bound 16 bar", "What makes up the uncertainty", "index source", "must stay within"} {
		if !strings.Contains(out, want) {
			t.Errorf("no %q in\n%s", want, out)
		}
	}
	// A single flag stands over the file.
	code, out, stderr = command("predict", "-b", path, "--pressure", "9 bar", "--fibre", "capillary", "--index", "lesiuk-2023")
	if code != exitDone || !strings.Contains(out, "capillary, core 34 um, length") || !strings.Contains(out, "lesiuk-2023") {
		t.Errorf("exit %d, %s%s", code, stderr, out)
	}
}

func TestPredictRefuses(t *testing.T) {
	for _, test := range []struct {
		args []string
		code int
		says string
	}{
		{[]string{"predict", "--gas", "xenon"}, exitUsage, "predict needs --pressure, --core-diameter"},
		{bore("--pressure", "9"), exitUsage, `"9" is not a quantity: it has no unit`},
		{bore("--pressure", "9 bar(g)"), exitUsage, "gauge"},
		{bore("--pressure", "-1 bar"), exitFailed, "below zero"},
		{bore("--pressure", "300 bar"), exitFailed, "above the range"},
		{bore("--pressure", "9 bar", "--core-diameter", "0 um"), exitUsage, "core diameter is 0 m"},
		{bore("--pressure", "9 bar", "--wall", "180 nm"), exitUsage, "a capillary has no thin wall"},
		{bore("--pressure", "9 bar", "--fibre", "antiresonant"), exitUsage, "wall is 0 m"},
		{bore("--pressure", "9 bar", "--duration", "-3 fs"), exitUsage, "duration is -3 fs"},
		{bore("--pressure", "9 bar", "--gas", "argon 80 % + neon 10 %"), exitUsage, "add up to 90 %"},
		{bore("--pressure", "9 bar", "--mode", "HE00"), exitUsage, "HE00"},
		{bore("--sweep", "colour=1bar:2bar:1bar"), exitUsage, "pressure=1bar:10bar:0.25bar"},
		{bore("--sweep", "pressure=1bar:2bar:0bar"), exitUsage, "step above zero"},
		{bore("--pressure", "9 bar", "--csv"), exitUsage, "--csv goes with --sweep"},
	} {
		code, out, stderr := command(test.args...)
		if code != test.code || !strings.Contains(stderr, test.says) || out != "" {
			t.Errorf("%q: exit %d, said %q, printed %q; want exit %d and %q", test.args, code, stderr, out, test.code, test.says)
		}
	}
	code, _, stderr := command("predict", "--gas", "xenon", "--pressure", "50 bar", "--temperature", "0 degC", "--core-diameter", "34 um",
		"--length", "30 cm", "--wavelength", "800 nm", "--duration", "35 fs", "--energy", "1 uJ")
	if code != exitFailed || !strings.Contains(stderr, "liquid") {
		t.Errorf("liquid xenon: exit %d, %s", code, stderr)
	}
	// Normal dispersion is an answer, not a failure.
	code, out, _ := command(bore("--pressure", "90 bar", "--json")...)
	if code != exitDone || !strings.Contains(out, `"emission_nm":null`) || !strings.Contains(out, "normal dispersion") {
		t.Errorf("normal dispersion: exit %d, %s", code, out)
	}
}
