package calibration

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"barline/model/emission"
	"barline/model/unit"
)

func fitted(t testing.TB, m *Model, seed uint64) *Calibration {
	t.Helper()
	rng := rand.New(rand.NewPCG(seed, 3))
	truth := Corrections{IndexScale: 0.004, Energy: -0.03, WavelengthOffset: 0.1e-9}
	points := scan(t, m, rng, truth, 9, []float64{1.3}, 0.05e-9, nil)
	c, err := Fit(m, Request{Points: points, Free: []Parameter{IndexScale, Energy, WavelengthOffset}, Prior: DefaultPrior()})
	if err != nil {
		t.Fatal(err)
	}
	c.Name = "scan of today"
	return c
}

// A corrected prediction is where the truth is, with an honest uncertainty;
// beyond the data it is marked and widens.
func TestCorrectorBringsPredictionsToTheData(t *testing.T) {
	m := lawful(t)
	c := fitted(t, m, 1)
	k, err := NewCorrector(c, m.Nodes())
	if err != nil {
		t.Fatal(err)
	}
	truth := Corrections{IndexScale: 0.004, Energy: -0.03, WavelengthOffset: 0.1e-9}
	predict := func(bar float64) (p emission.Prediction, want float64) {
		in := at(bar, 1.3)
		plain, err := m.Answer(nil, in, new(Corrections))
		if err != nil {
			t.Fatal(err)
		}
		real, err := m.Answer(nil, in, &truth)
		if err != nil {
			t.Fatal(err)
		}
		p = emission.Prediction{Input: in, Valid: true, Answer: emission.Anchored, Emission: plain[0].Wavelength, Sigma: 8e-9, Peak: plain[0].Wavelength - 1e-9, BranchCount: 1}
		p.Branches[0].Emission = p.Emission
		return p, float64(real[0].Wavelength)
	}
	for _, bar := range []float64{7.5, 9, 11.4} {
		p, want := predict(bar)
		k.Correct(&p)
		if off := math.Abs(float64(p.Emission) - want); off > 0.4e-9 || off > 4*float64(p.Sigma) {
			t.Errorf("%v bar: %.2f ± %.2f nm, the truth is %.2f nm", bar, p.Emission.Nanometres(), p.Sigma.Nanometres(), want*1e9)
		}
		if p.Calibration != "scan of today" || p.Beyond || p.Branches[0].Emission != p.Emission || math.Abs(float64(p.Emission-p.Peak)-1e-9) > 1e-15 {
			t.Errorf("%v bar: %q, beyond %v, branch %v, peak %v", bar, p.Calibration, p.Beyond, p.Branches[0].Emission, p.Peak)
		}
		if _, sigma, err := c.Predict(m, p.Input, p.Emission); err != nil || math.Abs(float64(sigma/p.Sigma)-1) > 0.05 {
			t.Errorf("%v bar: ± %v, worked out anew ± %v, %v", bar, p.Sigma, sigma, err)
		}
		if p.Sigma > 1*unit.Nanometre {
			t.Errorf("%v bar: it is known to %v only", bar, p.Sigma)
		}
	}
	inside, _ := predict(11.4)
	beyond, _ := predict(12.4)
	k.Correct(&inside)
	k.Correct(&beyond)
	if !beyond.Beyond || beyond.Sigma < 2*inside.Sigma || beyond.Calibration == "" {
		t.Errorf("12.4 bar, data to 11.7 bar: beyond %v, ± %v, inside ± %v", beyond.Beyond, beyond.Sigma, inside.Sigma)
	}
}

// The estimate is never calibrated, and what has no answer keeps none.
func TestCorrectorLeavesOtherAnswersAlone(t *testing.T) {
	m := lawful(t)
	k, err := NewCorrector(fitted(t, m, 2), m.Nodes())
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range []emission.Prediction{
		{Input: at(9, 1.3), Valid: true, Answer: emission.Estimate, Emission: 260e-9, Sigma: 10e-9},
		{Input: at(9, 1.3), Valid: true, Answer: emission.Anchored},
		{Input: at(300, 1.3), Valid: true, Answer: emission.Anchored, Emission: 260e-9},
	} {
		was := p
		if k.Correct(&p); p != was {
			t.Errorf("%v became %v %q", was.Emission, p.Emission, p.Calibration)
		}
	}
}

func TestCorrectorRefuses(t *testing.T) {
	m := lawful(t)
	good := fitted(t, m, 3)
	for want, change := range map[string]func(*Calibration){
		"another gas":          func(c *Calibration) { c.Digest = "0123" },
		"covariance":           func(c *Calibration) { c.Covariance = c.Covariance[:2] },
		"without a name":       func(c *Calibration) { c.Name = "" },
		"expected a range":     func(c *Calibration) { c.PressurePa[1] = c.PressurePa[0] },
		"correction \"speed\"": func(c *Calibration) { c.Values = append([]Value{{Parameter: "speed"}}, c.Values[1:]...) },
	} {
		bad := *good
		change(&bad)
		if _, err := NewCorrector(&bad, m.Nodes()); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("wanted a complaint with %q, got %v", want, err)
		}
	}
	if _, err := NewCorrector(good, nil); err == nil {
		t.Error("no nodes")
	}
}

// What is kept in a file corrects as the original did.
func TestCalibrationSurvivesAFile(t *testing.T) {
	m := lawful(t)
	c := fitted(t, m, 4)
	text, err := json.Marshal(c)
	if err != nil {
		t.Fatal(err)
	}
	back := new(Calibration)
	if err := json.Unmarshal(text, back); err != nil {
		t.Fatal(err)
	}
	a, sa, errA := c.Predict(m, at(9.3, 1.3), 260e-9)
	b, sb, errB := back.Predict(m, at(9.3, 1.3), 260e-9)
	if errA != nil || errB != nil || a != b || sa != sb {
		t.Errorf("%v ± %v before, %v ± %v after; %v %v", a, sa, b, sb, errA, errB)
	}
}

func TestCompareSaysHowFarApart(t *testing.T) {
	m := lawful(t)
	a, b := fitted(t, m, 5), fitted(t, m, 6)
	if list := Compare(a, a); len(list) != 3 || list[0].Sigmas != 0 {
		t.Errorf("with itself: %+v", list)
	}
	for _, d := range Compare(a, b) {
		if math.Abs(d.Sigmas) > 3 || d.OneSigma == 0 || d.OtherSigma == 0 {
			t.Errorf("two scans of one truth: %v %v, %v: %.1f sigma", d.Parameter, d.One, d.Other, d.Sigmas)
		}
	}
	for _, d := range Compare(nil, a) {
		if d.One != 0 || d.OneSigma != 0 || d.Other == 0 {
			t.Errorf("with the bench file: %+v", d)
		}
	}
	rng := rand.New(rand.NewPCG(5, 3))
	points := scan(t, m, rng, Corrections{IndexScale: 0.004, Energy: -0.03, WavelengthOffset: 0.1e-9}, 9, []float64{1.3}, 0.05e-9, nil)
	if with, without := rms(a.Residuals(m, points)), rms((*Calibration)(nil).Residuals(m, points)); !(with < without/3) {
		t.Errorf("%.3g nm rms with, %.3g nm without", with*1e9, without*1e9)
	}
}

func rms(list []float64) float64 {
	sum := 0.0
	for _, v := range list {
		sum += v * v
	}
	return math.Sqrt(sum / float64(max(len(list), 1)))
}

func BenchmarkCorrect(b *testing.B) {
	m := lawful(b)
	k, err := NewCorrector(fitted(b, m, 7), m.Nodes())
	if err != nil {
		b.Fatal(err)
	}
	plain, err := m.Answer(nil, at(9, 1.3), new(Corrections))
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		p := emission.Prediction{Input: at(9, 1.3), Valid: true, Answer: emission.Anchored, Emission: plain[0].Wavelength, Sigma: 8e-9}
		k.Correct(&p)
	}
}
