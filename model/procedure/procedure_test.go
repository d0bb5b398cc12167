package procedure

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"barline/model/flow"
	"barline/model/form"
	"barline/model/limit"
	"barline/model/live"
	"barline/model/unit"
)

func testBench() Bench {
	return Bench{
		Limits: limit.Limits{
			Ratings:  []limit.Rating{{Part: "cells", Max: 16 * unit.Bar}},
			RiseRate: 0.2e5, FallRate: 0.4e5, PumpBelow: 1.2 * unit.Bar,
		},
		Ambient: 1.013 * unit.Bar,
		PressureFor: func(emission unit.Metre) (unit.Pascal, error) {
			if emission < 200*unit.Nanometre {
				return 0, errors.New("no pressure emits there")
			}
			return unit.Pascal(emission.Nanometres()-180) / 8 * unit.Bar, nil
		},
	}
}

func compile(t *testing.T, steps string) *live.Program {
	t.Helper()
	p, err := Parse([]byte("[procedure]\nname = \"test\"\n"+steps), "test.toml", 1.013*unit.Bar)
	if err != nil {
		t.Fatal(err)
	}
	program, err := p.Compile(testBench())
	if err != nil {
		t.Fatal(err)
	}
	return program
}

func targets(p *live.Program) (bar []float64) {
	for _, ph := range p.Phases {
		bar = append(bar, math.Round(ph.Target.Bar()*1e6)/1e6)
	}
	return bar
}

func equal(a, b []float64) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

func TestTagsCanBeRead(t *testing.T) {
	if err := form.CheckTags(new(Procedure)); err != nil {
		t.Error(err)
	}
}

func TestEveryVerbBecomesPhases(t *testing.T) {
	p := compile(t, `
[[step]]
do = "evacuate"
to = "1 mbar"
[[step]]
do = "purge"
cycles = 2
low = "5 mbar"
high = "3 bar"
hold = "30 s"
[[step]]
do = "fill"
to = "9 bar"
rate = "0.1 bar/s"
[[step]]
do = "leak test"
for = "10 min"
max_rise = "1 Pa/min"
[[step]]
do = "hold"
for = "1 h"
[[step]]
do = "vent"
`)
	if got, want := targets(p), []float64{0.001, 0.005, 3, 0.005, 3, 9, 0, 0, 1.013}; !equal(got, want) {
		t.Errorf("targets %v bar, want %v", got, want)
	}
	if ph := p.Phases[1]; ph.Dwell != 30*time.Second || ph.Label != "purge 1 of 2, down" {
		t.Errorf("purge phase %+v", ph)
	}
	if ph := p.Phases[6]; ph.Action != live.Isolate || ph.Dwell != 10*time.Minute || math.Abs(float64(ph.MaxRise)-1.0/60) > 1e-12 {
		t.Errorf("leak test %+v", ph)
	}
	if ph := p.Phases[7]; ph.Action != live.Stay || ph.Dwell != time.Hour {
		t.Errorf("hold %+v", ph)
	}
}

func TestScanOrders(t *testing.T) {
	for order, want := range map[string][]float64{
		"up":          {7, 7.5, 8},
		"down":        {8, 7.5, 7},
		"up and down": {7, 7.5, 8, 7.5, 7},
	} {
		p := compile(t, "[[step]]\ndo = \"scan\"\nfrom = \"7 bar\"\nto = \"8 bar\"\nby = \"0.5 bar\"\ndwell = \"5 s\"\norder = \""+order+"\"\n")
		if got := targets(p); !equal(got, want) {
			t.Errorf("%s: %v, want %v", order, got, want)
		}
		for _, ph := range p.Phases {
			if !ph.Row || ph.Dwell != 5*time.Second {
				t.Errorf("%s: a phase of a scan writes no row: %+v", order, ph)
			}
		}
	}
	random := "[[step]]\ndo = \"scan\"\nfrom = \"7 bar\"\nto = \"11 bar\"\nby = \"0.1 bar\"\ndwell = \"5 s\"\norder = \"random\"\nseed = 3\n"
	a, b := targets(compile(t, random)), targets(compile(t, random))
	if len(a) != 41 || !equal(a, b) || a[0] == 7 && a[1] == 7.1 {
		t.Errorf("random order %v", a)
	}
}

func TestScanInEqualStepsOfWavelength(t *testing.T) {
	p := compile(t, "[[step]]\ndo = \"scan\"\nfrom_emission = \"240 nm\"\nto_emission = \"260 nm\"\nemission_by = \"10 nm\"\ndwell = \"5 s\"\n")
	if got, want := targets(p), []float64{7.5, 8.75, 10}; !equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
}

// Whichever way the emission turns with pressure, a scan in equal steps of it
// goes up in pressure.
func TestScanInWavelengthAscendsInPressure(t *testing.T) {
	p, err := Parse([]byte("[procedure]\nname = \"x\"\n[[step]]\ndo = \"scan\"\nfrom_emission = \"240 nm\"\nto_emission = \"260 nm\"\nemission_by = \"10 nm\"\ndwell = \"5 s\"\n"), "f", 0)
	if err != nil {
		t.Fatal(err)
	}
	b := testBench()
	b.PressureFor = func(e unit.Metre) (unit.Pascal, error) { return unit.Pascal(300-e.Nanometres()) / 8 * unit.Bar, nil }
	program, err := p.Compile(b)
	if err != nil {
		t.Fatal(err)
	}
	if got, want := targets(program), []float64{5, 6.25, 7.5}; !equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
}

// At each energy the whole scan is run, behind the setting of the energy.
func TestScanOverEnergies(t *testing.T) {
	p := compile(t, "[[step]]\ndo = \"energy\"\nenergy = \"1 uJ\"\n[[step]]\ndo = \"scan\"\npressures = [\"7 bar\", \"8 bar\"]\nenergies = [\"1.1 uJ\", \"1.3 uJ\"]\ndwell = \"5 s\"\n")
	want := []live.Phase{
		{Label: "pulse energy 1 uJ", Action: live.SetEnergy, Energy: 1e-6},
		{Label: "pulse energy 1.1 uJ", Action: live.SetEnergy, Energy: 1.1e-6},
		{Label: "scan 1 of 4 at 1.1 uJ", Target: 7e5, Dwell: 5 * time.Second, Row: true},
		{Label: "scan 2 of 4 at 1.1 uJ", Target: 8e5, Dwell: 5 * time.Second, Row: true},
		{Label: "pulse energy 1.3 uJ", Action: live.SetEnergy, Energy: 1.3e-6},
		{Label: "scan 3 of 4 at 1.3 uJ", Target: 7e5, Dwell: 5 * time.Second, Row: true},
		{Label: "scan 4 of 4 at 1.3 uJ", Target: 8e5, Dwell: 5 * time.Second, Row: true},
	}
	if len(p.Phases) != len(want) {
		t.Fatalf("%d phases, want %d", len(p.Phases), len(want))
	}
	for i, w := range want {
		got := p.Phases[i]
		if math.Abs(float64(got.Energy-w.Energy)) > 1e-15 {
			t.Errorf("phase %d: energy %v, want %v", i+1, got.Energy, w.Energy)
		}
		got.Energy = w.Energy
		if got != w {
			t.Errorf("phase %d: %+v, want %+v", i+1, got, w)
		}
	}
}

// A pump of speed S takes a volume V down as exp(-St/V): its rate p S/V has
// come down to the floor at floor V/S, whatever the ultimate pressure.
func TestEvacuationToARate(t *testing.T) {
	p := compile(t, "[[step]]\ndo = \"evacuate\"\nuntil_rate = \"10 Pa/s\"\n")
	if ph := p.Phases[0]; ph.Target != 0 || ph.Floor != 10 {
		t.Fatalf("%+v", ph)
	}
	argon, err := flow.Named("argon")
	if err != nil {
		t.Fatal(err)
	}
	site := Site{Panel: flow.Handling{
		Panel:     flow.Panel{Cell: flow.Cell{Gas: argon.Ideal(), Volume: 1e-3, Wall: 293.15}, Pump: flow.Pump{Speed: 1e-4}},
		PumpBelow: 1.2 * unit.Bar, Fall: 1e6,
	}}
	_, sum, err := site.Estimate(p, 1*unit.Bar)
	if err != nil {
		t.Fatal(err)
	}
	// The floor is reached at 100 Pa, ln(1000)·10 s = 69 s; it is noticed within
	// two stretches of a tenth, 2 s.
	if sum.Time < 68*time.Second || sum.Time > 72*time.Second {
		t.Errorf("takes %v, want 69 s to 71 s", sum.Time)
	}
}

func TestMistakesAreNamed(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"[[step]]\ndo = \"fill\"\n", `f:3:3: step.to is missing; "fill" needs it`},
		{"[[step]]\ndo = \"fil\"\nto = \"9 bar\"\n", `did you mean "fill"?`},
		{"[[step]]\ndo = \"fill\"\nto = \"9\"\n", "it has no unit"},
		{"[[step]]\ndo = \"fill\"\nto = \"9 bar\"\ncycles = 3\n", `step.cycles does not go with "fill"`},
		{"[[step]]\ndo = \"purge\"\ncycles = 3\nlow = \"4 bar\"\nhigh = \"3 bar\"\n", "it is not below high"},
		{"[[step]]\ndo = \"scan\"\nfrom = \"7 bar\"\ndwell = \"1 s\"\n", "needs all of from, to, by"},
		{"[[step]]\ndo = \"scan\"\ndwell = \"1 s\"\n", "a scan says where it goes in one way"},
		{"[[step]]\ndo = \"scan\"\npressures = [\"7 bar\", \"8\"]\ndwell = \"1 s\"\n", "it has no unit"},
		{"[[step]]\ndo = \"evacuate\"\n", "an evacuation ends at a pressure"},
		{"[[step]]\ndo = \"energy\"\n", `step.energy is missing; "energy" needs it`},
		{"[[step]]\ndo = \"scan\"\npressures = [\"7 bar\"]\nenergies = [\"1\"]\ndwell = \"1 s\"\n", "it has no unit"},
		{"[[step]]\ndo = \"scan\"\npressures = [\"7 bar\"]\nenergies = [\"-1 uJ\"]\ndwell = \"1 s\"\n", "expected more than 0 uJ"},
		{"", "there is nothing to do"},
	} {
		_, err := Parse([]byte("[procedure]\nname = \"x\"\n"+c.text), "f", 0)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: got %v, want %s", c.text, err, c.want)
		}
	}
}

func TestNothingBeyondTheLimitsCompiles(t *testing.T) {
	for _, steps := range []string{
		"[[step]]\ndo = \"fill\"\nto = \"17 bar\"\n",
		"[[step]]\ndo = \"scan\"\nfrom = \"7 bar\"\nto = \"17 bar\"\nby = \"0.5 bar\"\ndwell = \"1 s\"\n",
		"[[step]]\ndo = \"purge\"\ncycles = 1\nlow = \"5 mbar\"\nhigh = \"20 bar\"\n",
	} {
		p, err := Parse([]byte("[procedure]\nname = \"x\"\n"+steps), "f", 0)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := p.Compile(testBench()); !errors.Is(err, limit.ErrLimit) {
			t.Errorf("%q compiled: %v", steps, err)
		}
	}
}

func TestEstimate(t *testing.T) {
	p := compile(t, "[[step]]\ndo = \"fill\"\nto = \"9 bar\"\n[[step]]\ndo = \"hold\"\nfor = \"1 min\"\n[[step]]\ndo = \"vent\"\n")
	argon, err := flow.Named("argon")
	if err != nil {
		t.Fatal(err)
	}
	site := Site{Settle: 3 * time.Second, Panel: flow.Handling{
		Panel: flow.Panel{Cell: flow.Cell{Gas: argon.Ideal(), Volume: 120e-6, Wall: 293.15}, Ambient: 1.013 * unit.Bar},
		Rise:  0.2e5, Fall: 0.4e5,
	}}
	each, sum, err := site.Estimate(p, 1*unit.Bar)
	if err != nil {
		t.Fatal(err)
	}
	// 8 bar at 0.2 bar/s, a minute, 7.987 bar at 0.4 bar/s, 3 s to settle twice.
	if want := 40*time.Second + 60*time.Second + 19967500*time.Microsecond + 6*time.Second; (sum.Time-want).Abs() > time.Millisecond || len(each) != 3 {
		t.Errorf("takes %v %v, want %v", sum.Time, each, want)
	}
	// Ideal gas: Δp V / (R T), R = 8.314462618 J/(mol K) (CODATA 2018, exact).
	if want := 8e5 * 120e-6 / (8.314462618 * 293.15); math.Abs(sum.Gas/want-1) > 1e-5 || each[2].Gas != 0 {
		t.Errorf("takes %v mol, venting %v mol; want %v and none", sum.Gas, each[2].Gas, want)
	}
}

// Purging between two pressures divides the air by their ratio each time
// (perfect mixing; common practice, no source).
func TestEstimateOfAPurge(t *testing.T) {
	p := compile(t, "[[step]]\ndo = \"purge\"\ncycles = 3\nlow = \"0.5 bar\"\nhigh = \"5 bar\"\n")
	argon, err := flow.Named("argon")
	if err != nil {
		t.Fatal(err)
	}
	site := Site{Air: 1, Panel: flow.Handling{
		Panel: flow.Panel{Cell: flow.Cell{Gas: argon.Ideal(), Volume: 120e-6, Wall: 293.15}, Ambient: 1.013 * unit.Bar},
		Rise:  0.2e5, Fall: 0.4e5,
	}}
	_, sum, err := site.Estimate(p, 1.013*unit.Bar)
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(float64(sum.Air)-1e-3) > 1e-12 {
		t.Errorf("three cycles by ten leave %v of air, want 0.001", float64(sum.Air))
	}
	site.Supply = 1e-5 // of argon 5.0
	if _, sum, err = site.Estimate(p, 1.013*unit.Bar); err != nil || float64(sum.Air) < 1e-3 || float64(sum.Air) > 1e-3+1.1e-5 {
		t.Errorf("with air in the cylinder %v, %v", float64(sum.Air), err)
	}
}

func FuzzParse(f *testing.F) {
	f.Add([]byte("[procedure]\nname = \"x\"\n[[step]]\ndo = \"scan\"\npressures = [\"7 bar\"]\ndwell = \"1 s\"\n"))
	f.Add([]byte("[procedure]\nname = \"x\"\n[[step]]\ndo = \"purge\"\ncycles = 3\nlow = \"5 mbar\"\nhigh = \"3 bar\"\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		p, err := Parse(data, "f", unit.Atmosphere)
		if (p == nil) == (err == nil) {
			t.Fatalf("procedure %v with error %v", p, err)
		}
		if p == nil {
			return
		}
		program, err := p.Compile(testBench())
		if err == nil {
			if err := program.Check(testBench().Limits); err != nil {
				t.Fatalf("compiled, but: %v", err)
			}
		}
	})
}

func TestTypedLine(t *testing.T) {
	for _, c := range []struct {
		text    string
		bar     []float64
		refusal string
	}{
		{"fill to 9 bar", []float64{9}, ""},
		{" purge cycles 2, low 50 mbar, high 3 bar ; fill to 9 bar;", []float64{0.05, 3, 0.05, 3, 9}, ""},
		{"scan from 7 bar, to 8 bar, by 0.5 bar, dwell 20 s, order up and down", []float64{7, 7.5, 8, 7.5, 7}, ""},
		{"scan from emission 244 nm, to emission 260 nm, emission by 8 nm, dwell 5 s", []float64{8, 9, 10}, ""},
		{"leak test for 10 min, max rise 2 Pa/s", []float64{0}, ""},
		{"vent", []float64{1.013}, ""},
		{"fill", nil, "needs it"},
		{"fill 9 bar", nil, `"9 bar": fill takes to, rate, within and patience`},
		{"fill to 9", nil, "no unit"},
		{"fill to 17 bar", nil, "cells allows"},
		{"purge cycles three, low 50 mbar, high 3 bar", nil, "expected a whole number"},
		{"fill to", nil, "a value is missing"},
		{"fly to 9 bar", nil, "expected it to begin with"},
		{"fill to 9 bar, dwell 3 s", nil, "does not go with"},
		{"", nil, "nothing to do"},
		{"scan pressures 7 bar", nil, "needs a procedure file"},
		{"fill to \"9 bar\"\nrate = 1", nil, "expected a pressure"},
	} {
		p, err := ParseLine(c.text, 1.013*unit.Bar)
		var program *live.Program
		if err == nil {
			program, err = p.Compile(testBench())
		}
		if c.refusal != "" {
			if err == nil || !strings.Contains(err.Error(), c.refusal) {
				t.Errorf("%q: error %v, want one with %q", c.text, err, c.refusal)
			}
			continue
		}
		if err != nil {
			t.Errorf("%q: %v", c.text, err)
			continue
		}
		if got := targets(program); !equal(got, c.bar) {
			t.Errorf("%q goes to %v bar, want %v", c.text, got, c.bar)
		}
	}
}
