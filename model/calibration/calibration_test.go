package calibration

import (
	"encoding/json"
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"barline/model/anchor"
	"barline/model/emission"
	"barline/model/fibre"
	"barline/model/fit"
	"barline/model/gas"
	"barline/model/pulse"
	"barline/model/reading"
	"barline/model/unit"
)

// lawful is a bench whose full-field runs are replaced by a law for κ, so that
// the truth is known: a cubic in density, a parabola in energy, and a slope
// over the core that nodes are given for.
func lawful(t testing.TB) *Model {
	t.Helper()
	b, err := anchor.New(anchor.Spec{
		Gas: gas.Spec{Composition: "argon"},
		Fibre: fibre.Spec{Kind: fibre.Antiresonant, CoreDiameter: 34 * unit.Micrometre, Wall: 180 * unit.Nanometre,
			Length: 0.3, Loss: fibre.Loss{Constant: 1}},
		Pulse: pulse.Pulse{Wavelength: 1030 * unit.Nanometre, Duration: 35 * unit.Femtosecond, Energy: 1.3 * unit.Microjoule},
	})
	if err != nil {
		t.Fatal(err)
	}
	tasks := b.Plan(nil, anchor.Range{From: 286, To: 493}) // 7 to 12 bar
	low, high := math.Inf(1), 0.0
	for _, k := range tasks {
		low, high = math.Min(low, k.Density), math.Max(high, k.Density)
	}
	var nodes []anchor.Node
	for _, k := range tasks {
		if k.Moved != anchor.Nothing {
			continue
		}
		x, y := (k.Density-low)/(high-low), float64(k.Energy)/1.3e-6-1
		kappa := 80 + 900*x - 250*x*x + 60*x*x*x - 700*y*(1-x) + 300*y*y
		omega, ok := anchor.Solve(b.Guide(k.Density), fibre.Frequency(1030*unit.Nanometre), kappa, fibre.Frequency(255*unit.Nanometre))
		if !ok {
			t.Fatalf("no root at %g mol/m³", k.Density)
		}
		nodes = append(nodes, anchor.Node{Density: k.Density, Energy: k.Energy, Lobes: []anchor.Lobe{{Centroid: fibre.Wavelength(omega), Conversion: 0.08}}})
	}
	m, err := NewModel(b.Build(nodes))
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func at(bar, microjoule float64) emission.Input {
	return emission.Input{Pressure: unit.Pascal(bar) * unit.Bar, Temperature: unit.Celsius(22), Energy: unit.Joule(microjoule) * unit.Microjoule}
}

// scan measures the truth at pressures from 7.3 to 11.7 bar, with noise and
// with what the model is off by as a function of bar.
func scan(t testing.TB, m *Model, rng *rand.Rand, truth Corrections, points int, energies []float64, noise float64, off func(bar float64) float64) []Point {
	t.Helper()
	var list []Point
	for _, e := range energies {
		for i := range points {
			bar := 7.3 + 4.4*float64(i)/float64(points-1)
			in := at(bar, e)
			a, err := m.Answer(nil, in, &truth)
			if err != nil {
				t.Fatal(err)
			}
			measured := float64(a[0].Wavelength) + noise*rng.NormFloat64()
			if off != nil {
				measured += off(bar)
			}
			list = append(list, Point{At: time.Unix(int64(1000+60*i), 0), Input: in, Value: unit.Metre(measured), Sigma: unit.Metre(noise), Status: reading.Good})
		}
	}
	return list
}

// Halving a relative change must halve what it does, and each correction must
// do what its name says, against the plain formulas for a perfect gas.
func TestCorrectionsDoWhatTheySay(t *testing.T) {
	m := lawful(t)
	value := func(in emission.Input, c Corrections) float64 {
		a, err := m.Answer(nil, in, &c)
		if err != nil {
			t.Fatal(err)
		}
		return a[0].Wavelength.Nanometres()
	}
	base := value(at(9, 1.3), Corrections{})
	if got := value(at(9, 1.3), Corrections{WavelengthOffset: 0.3e-9}) - base; math.Abs(got-0.3) > 1e-9 {
		t.Errorf("offset of 0.3 nm moves the emission by %v nm", got)
	}
	if got, want := value(at(9, 1.3), Corrections{GaugeZero: 5e3}), value(at(8.95, 1.3), Corrections{}); math.Abs(got-want) > 1e-9 {
		t.Errorf("a gauge 50 mbar high at 9 bar: %v, want what 8.95 bar gives, %v", got, want)
	}
	if got, want := value(at(9, 1.3), Corrections{Energy: 0.04}), value(at(9, 1.352), Corrections{}); math.Abs(got-want) > 1e-9 {
		t.Errorf("4 %% more energy: %v, want %v", got, want)
	}
	// Without Kerr term, n−1 and the square of the core count alike.
	index := value(at(9, 1.3), Corrections{IndexScale: 0.002}) - base
	core := value(at(9, 1.3), Corrections{CoreDiameter: 0.001}) - base
	if math.Abs(core/index-1) > 0.1 || index < 0.1 || index > 0.5 {
		t.Errorf("0.2 %% of index moves by %.3f nm, 0.1 %% of core by %.3f nm; want about the same", index, core)
	}
	if _, err := m.Answer(nil, at(30, 1.3), &Corrections{}); !errors.Is(err, ErrOutside) {
		t.Errorf("30 bar: %v", err)
	}
}

func TestExactPointsGiveTheTruthBack(t *testing.T) {
	m := lawful(t)
	truth := Corrections{IndexScale: 0.006, Energy: -0.03}
	c, err := Fit(m, Request{Points: scan(t, m, rand.New(rand.NewPCG(1, 1)), truth, 9, []float64{1.2, 1.3, 1.4}, 1e-15, nil), Free: []Parameter{IndexScale, Energy}, Discrepancy: 1e-15})
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []float64{0.006, -0.03} {
		if math.Abs(c.Values[i].Value-want) > 1e-4*math.Abs(want) || c.Values[i].Told != 1 {
			t.Errorf("%s is %v, want %v", c.Values[i].Parameter, c.Values[i].Value, want)
		}
	}
	if c.After > 1e-4*c.Before || c.Points != 27 || len(c.SetAside) != 0 {
		t.Errorf("rms %v m before, %v m after, %d points", c.Before, c.After, c.Points)
	}
}

// Benches whose truth nobody tells: corrections and what the model is off by
// are drawn from what is assumed of them. The stated interval must cover the
// truth as often as it says. Then the same with an error of another shape,
// which must not spoil the prediction.
func TestCalibrationCoversTheTruth(t *testing.T) {
	m := lawful(t)
	free := []Parameter{IndexScale, Energy, GaugeZero}
	prior := DefaultPrior()
	const runs = 60
	const wrong = 0.3e-9
	for _, shape := range []string{"as assumed", "a wave"} {
		rng := rand.New(rand.NewPCG(4, 2))
		covered, all, rms, worst, before := 0, 0, 0.0, 0.0, 0.0
		for range runs {
			var truth Corrections
			for _, q := range free {
				truth[q] = prior[q] * rng.NormFloat64()
			}
			truth[Energy] = math.Max(math.Min(truth[Energy], 0.1), -0.1) // within the nodes
			phase := 2 * math.Pi * rng.Float64()
			off := func(bar float64) float64 { return wrong * math.Sqrt2 * math.Sin(1.4*bar+phase) }
			if shape == "as assumed" {
				var b []float64
				for range 4 { // over pressure: all points have one energy
					b = append(b, bendShare*wrong*rng.NormFloat64())
				}
				over := Calibration{PressurePa: [2]float64{7.3e5, 11.7e5}}
				off = func(bar float64) float64 { return over.bent(b, at(bar, 1.3)) }
			}
			points := scan(t, m, rng, truth, 5, []float64{1.3}, 0.05e-9, off)
			c, err := Fit(m, Request{Points: points, Free: free, Prior: prior, Discrepancy: wrong})
			if err != nil {
				t.Fatalf("%v: %v", truth, err)
			}
			for i, q := range free {
				all++
				if math.Abs(c.Values[i].Value-truth[q]) <= c.Values[i].Sigma {
					covered++
				}
			}
			sum := 0.0
			for i := range 12 {
				bar := 7.3 + 0.4*float64(i)
				a, err := m.Answer(nil, at(bar, 1.3), &truth)
				if err != nil {
					t.Fatal(err)
				}
				want := a[0].Wavelength + unit.Metre(off(bar))
				w, sigma, err := c.Predict(m, at(bar, 1.3), want)
				if err != nil || !(sigma > 0) || !c.Covers(at(bar, 1.3)) {
					t.Fatalf("predict: %v ± %v, %v", w, sigma, err)
				}
				d := float64(w - want)
				sum += d * d / 12
			}
			rms += sum / runs
			before += c.Before * c.Before / runs
			worst = math.Max(worst, sum)
		}
		share := float64(covered) / float64(all)
		t.Logf("error %s: the stated interval covers %.1f %% of truths; off by %.2f nm rms before, %.2f nm after five points, at worst %.2f nm",
			shape, 100*share, 1e9*math.Sqrt(before), 1e9*math.Sqrt(rms), 1e9*math.Sqrt(worst))
		if shape == "as assumed" && (share < 0.60 || share > 0.76) {
			t.Errorf("the stated interval covers %.1f %% of truths, want 60 to 76 %%", 100*share)
		}
		if math.Sqrt(rms) > 0.5e-9 {
			t.Errorf("off by %.2f nm rms after five points, want at most 0.5 nm", 1e9*math.Sqrt(rms))
		}
	}
}

func TestWhatCannotBeToldIsSaid(t *testing.T) {
	m := lawful(t)
	points := scan(t, m, rand.New(rand.NewPCG(2, 2)), Corrections{IndexScale: 0.005}, 7, []float64{1.3}, 0.05e-9, nil)
	// Index and core act alike; a prior holds them apart, and it is said.
	c, err := Fit(m, Request{Points: points, Free: []Parameter{IndexScale, CoreDiameter}, Prior: DefaultPrior(), Discrepancy: 0.01 * unit.Nanometre})
	if err != nil {
		t.Fatal(err)
	}
	if len(c.Alike) != 1 || c.Alike[0].Correlation > -0.95 {
		t.Errorf("index and core: %+v", c.Alike)
	}
	same := points[:0:0]
	for range 6 { // all at one pressure
		same = append(same, points[3])
	}
	if _, err := Fit(m, Request{Points: same, Free: []Parameter{IndexScale, GaugeZero}}); !errors.Is(err, fit.ErrUnseen) || !strings.Contains(err.Error(), "gauge-zero") {
		t.Errorf("all at one pressure: %v", err)
	}
}

func TestPointsAreSetAsideAndNamed(t *testing.T) {
	m := lawful(t)
	points := scan(t, m, rand.New(rand.NewPCG(3, 3)), Corrections{}, 8, []float64{1.3}, 0.05e-9, nil)
	points[0].Status = reading.FunctionCheck
	points[1].Value = unit.Metre(math.NaN())
	points[2].Value += 40 * unit.Nanometre
	points[3].Input.Pressure = 30 * unit.Bar
	points[5].Value += 3 * unit.Nanometre // an outlier that Huber's loss is for
	c, err := Fit(m, Request{Points: points, Free: []Parameter{IndexScale}, Prior: DefaultPrior(), Discrepancy: 0.01 * unit.Nanometre})
	if err != nil {
		t.Fatal(err)
	}
	if c.Points != 4 || len(c.SetAside) != 4 || len(c.Doubtful) != 1 {
		t.Errorf("%d points, aside %+v, doubtful %q", c.Points, c.SetAside, c.Doubtful)
	}
	text, err := json.Marshal(c)
	if err != nil || !strings.Contains(string(text), `"rms_after_m"`) {
		t.Errorf("%s, %v", text, err)
	}
	var back Calibration
	if err := json.Unmarshal(text, &back); err != nil || back.Corrections != c.Corrections || back.Values[0] != c.Values[0] {
		t.Errorf("read back as %+v, %v", back, err)
	}
	if _, err := Fit(m, Request{Points: points[:5], Free: []Parameter{IndexScale}, Prior: DefaultPrior()}); !errors.Is(err, ErrPoints) || !strings.Contains(err.Error(), "function check") {
		t.Errorf("one usable point: %v", err)
	}
	if _, err := Fit(m, Request{Points: points, Peaks: true, Free: []Parameter{IndexScale}}); err == nil {
		t.Error("peaks were compared with centroids")
	}
	if _, err := Fit(m, Request{Points: points}); err == nil {
		t.Error("nothing was fitted")
	}
	if c.Covers(at(15, 1.3)) || c.Covers(at(9, 1.5)) || !c.Covers(at(10.5, 1.3)) {
		t.Error("the range is not kept")
	}
}

func TestParametersAreSpelled(t *testing.T) {
	for q := range Parameter(ParameterCount) {
		if back, err := ParseParameter(q.String()); err != nil || back != q {
			t.Errorf("%v is read as %v, %v", q, back, err)
		}
	}
	if _, err := ParseParameter("luck"); err == nil {
		t.Error("luck can be fitted")
	}
	if got := GaugeZero.Format(-1300); got != "-13.0 mbar" {
		t.Errorf("gauge zero written %q", got)
	}
}
