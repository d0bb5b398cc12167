package drift

import (
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"barline/model/unit"
)

// slopes and state of a bench of about Heron's size near 265 nm. They are
// round numbers: what is tested is the reasoning, not the optics.
var (
	testSlopes = Slopes{
		Pressure: 133e-9 / 9e5, Temperature: -0.45e-9, Energy: -8e-9, Duration: 5e-9, Core: 266e-9, Air: -6e-9,
		StrengthEnergy: 3, StrengthDuration: -3, WidthEnergy: 0.6, WidthDuration: 0.3,
	}
	testState = State{Pressure: 9 * unit.Bar, TwoGauges: true}
	testSigma = [ObservableCount]float64{Wavelength: 0.03e-9, Strength: 0.01, Width: 0.01, Disagreement: 200, Metered: 0.005, Warmth: 0.05, Decay: 0.2}
)

// The evidence must be that of integrating over every amount, done here the
// slow way.
func TestEvidenceIsTheIntegralOverAmounts(t *testing.T) {
	o := Observation{Sigma: testSigma}
	o.Shift[Wavelength], o.Shift[Strength], o.Shift[Disagreement] = 0.4e-9, -0.02, -3000
	causes := Causes(testSlopes, testState)
	for i := range causes {
		causes[i].Doubt = [ObservableCount]float64{} // its own test below
	}
	slow := func(c Cause) float64 {
		sum, step := 0.0, c.Size/4000
		for a := -8 * c.Size; a <= 8*c.Size; a += step {
			l := -a * a / (2 * c.Size * c.Size)
			for k, s := range o.Sigma {
				r := (o.Shift[k] - c.Effect[k]*a) / s
				l -= r * r / 2
			}
			sum += math.Exp(l) * step / c.Size
		}
		return math.Log(sum)
	}
	findings, err := Attribute(causes, o)
	if err != nil {
		t.Fatal(err)
	}
	total := 0.0
	for i, f := range findings {
		total += f.Probability
		if i > 0 && f.Probability > findings[i-1].Probability {
			t.Error("not in the order of probability")
		}
	}
	if math.Abs(total-1) > 1e-12 {
		t.Errorf("probabilities sum to %v", total)
	}
	compared := 0
	for i, a := range findings {
		for _, b := range findings[i+1:] {
			if a.Cause.Name == elseName || b.Cause.Name == elseName || b.Probability < 1e-60 {
				continue
			}
			want := slow(a.Cause) - slow(b.Cause) + math.Log(a.Cause.Odds/b.Cause.Odds)
			if got := math.Log(a.Probability / b.Probability); math.Abs(got-want) > 1e-4*math.Max(1, math.Abs(want)) {
				t.Errorf("%s against %s: %v, by integration %v", a.Cause.Name, b.Cause.Name, got, want)
			}
			compared++
		}
	}
	if compared < 3 {
		t.Errorf("only %d pairs compared", compared)
	}
}

// draw makes a cause happen, with effects as badly known as they are said to
// be, and returns what is seen of it.
func draw(rng *rand.Rand, c Cause, sigma [ObservableCount]float64) (Observation, float64) {
	amount := c.Size * rng.NormFloat64()
	o := Observation{Sigma: sigma}
	for k, s := range sigma {
		if s > 0 {
			o.Shift[k] = (c.Effect[k]+c.Doubt[k]*rng.NormFloat64())*amount + s*rng.NormFloat64()
		}
	}
	return o, amount
}

// Of all the causes said to be 70 % probable, 70 % must be the true ones. The
// true causes are drawn with the odds that the attribution assumes.
func TestProbabilitiesAreAsOftenRightAsTheySay(t *testing.T) {
	causes := Causes(testSlopes, testState)
	odds := 0.0
	for _, c := range causes {
		odds += c.Odds
	}
	rng := rand.New(rand.NewPCG(3, 9))
	var said, right, count [10]float64
	for range 20000 {
		var truth Cause
		for pick := rng.Float64() * odds; pick > 0; {
			for _, c := range causes {
				if pick -= c.Odds; pick <= 0 {
					truth = c
					break
				}
			}
		}
		o, _ := draw(rng, truth, testSigma)
		findings, err := Attribute(causes, o)
		if err != nil {
			t.Fatal(err)
		}
		known := 1.0
		for _, f := range findings {
			if f.Cause.Name == elseName {
				known -= f.Probability // never drawn here
			}
		}
		for _, f := range findings {
			if f.Cause.Name == elseName || known <= 0 {
				continue
			}
			p := f.Probability / known
			b := min(int(p*10), 9)
			said[b], count[b] = said[b]+p, count[b]+1
			if f.Cause.Name == truth.Name {
				right[b]++
			}
		}
	}
	for b := range count {
		if count[b] < 100 {
			continue
		}
		s, r := said[b]/count[b], right[b]/count[b]
		t.Logf("said %.1f %%, right %.1f %% of %.0f", 100*s, 100*r, count[b])
		if tolerance := 4 * math.Sqrt(s*(1-s)/count[b]); math.Abs(s-r) > tolerance {
			t.Errorf("said %.1f %%, right %.1f %%, four standard deviations are %.1f %%", 100*s, 100*r, 100*tolerance)
		}
	}
}

func TestAmountIsFound(t *testing.T) {
	causes := Causes(testSlopes, testState)
	rng := rand.New(rand.NewPCG(5, 5))
	inside, n := 0, 0
	for range 300 {
		for _, c := range causes {
			o, amount := draw(rng, c, testSigma)
			findings, err := Attribute([]Cause{c}, o)
			if err != nil {
				t.Fatal(err)
			}
			for _, f := range findings {
				if f.Cause.Name == c.Name {
					n++
					if math.Abs(f.Amount-amount) <= f.AmountSigma {
						inside++
					}
				}
			}
		}
	}
	if share := float64(inside) / float64(n); math.Abs(share-0.6827) > 4*math.Sqrt(0.6827*0.3173/float64(n)) {
		t.Errorf("the true amount is within one sigma in %.1f %%, want 68.3 %%", 100*share)
	}
}

func TestGaugeZeroIsNamedAndSaid(t *testing.T) {
	o := Observation{Sigma: testSigma}
	o.Shift[Wavelength], o.Shift[Disagreement] = 0.96e-9, -13000
	findings, err := Attribute(Causes(testSlopes, testState), o)
	if err != nil {
		t.Fatal(err)
	}
	since := time.Date(2026, 12, 1, 14, 2, 0, 0, time.UTC)
	text := Sentence(0.96e-9, since, findings, Alike(findings, o, 0.99))
	t.Log(text)
	if f := findings[0]; f.Cause.Name != "cell A gauge zero" || math.Abs(f.Amount+13000) > 2*f.AmountSigma {
		t.Errorf("found %s %v ± %v", f.Cause.Name, f.Amount, f.AmountSigma)
	}
	if want := "+1.0 nm since 14:02; 95 %: cell A gauge zero, moved by -0.130 bar"; text != want {
		t.Errorf("said %q, want %q", text, want)
	}
	// A smaller one the span may have done as well, and at one pressure
	// nothing tells the two apart.
	o.Shift[Wavelength], o.Shift[Disagreement] = 0.3e-9, -4000
	if findings, err = Attribute(Causes(testSlopes, testState), o); err != nil {
		t.Fatal(err)
	}
	text = Sentence(0.3e-9, since, findings, Alike(findings, o, 0.99))
	t.Log(text)
	if !strings.Contains(text, "cell A gauge zero and cell A gauge span cannot be told apart from here") {
		t.Errorf("said %q", text)
	}
}

func TestWhatNobodyThoughtOfIsAdmitted(t *testing.T) {
	o := Observation{Sigma: testSigma}
	// Warmth, energy and a leak at once: no single cause does that.
	o.Shift[Warmth], o.Shift[Metered], o.Shift[Decay] = 1, -0.06, -4
	findings, err := Attribute(Causes(testSlopes, testState), o)
	if err != nil || findings[0].Cause.Name != elseName {
		t.Errorf("%+v, %v", findings[0], err)
	}
}

func TestAttributeRefuses(t *testing.T) {
	good := Causes(testSlopes, testState)
	if _, err := Attribute(good, Observation{}); !errors.Is(err, ErrNoEvidence) {
		t.Errorf("nothing seen: %v", err)
	}
	if _, err := Attribute(nil, Observation{Sigma: testSigma}); err == nil {
		t.Error("no causes")
	}
	for _, change := range []func(*Cause){func(c *Cause) { c.Size = 0 }, func(c *Cause) { c.Odds = -1 }, func(c *Cause) { c.Effect[0] = math.NaN() }} {
		bad := append([]Cause(nil), good...)
		change(&bad[0])
		if _, err := Attribute(bad, Observation{Sigma: testSigma}); err == nil {
			t.Error("accepted a cause that is none")
		}
	}
}

// For two causes and one observed value the expected information is an
// integral that can be done the plain way.
func TestExpectedInformationIsTheIntegral(t *testing.T) {
	findings := []Finding{
		{Cause: Cause{Name: "a"}, Probability: 0.6, Amount: 1, AmountSigma: 0.5},
		{Cause: Cause{Name: "b"}, Probability: 0.3, Amount: -1, AmountSigma: 0.2},
		{Cause: Cause{Name: elseName}, Probability: 0.1},
	}
	step := Step{Name: "look", Cost: time.Hour, Effect: map[string][]float64{"a": {1}, "b": {0.3}}, Sigma: []float64{0.6}}
	normal := func(z, mean, sd float64) float64 {
		return math.Exp(-(z-mean)*(z-mean)/(2*sd*sd)) / (sd * math.Sqrt(2*math.Pi))
	}
	want := 0.0
	for z := -10.0; z < 10; z += 1e-3 {
		pa, pb := 2.0/3*normal(z, 1, math.Hypot(0.5, 0.6)), 1.0/3*normal(z, -0.3, math.Hypot(0.06, 0.6))
		want += 1e-3 * (pa*math.Log2(pa/(pa+pb)/(2.0/3)) + pb*math.Log2(pb/(pa+pb)/(1.0/3)))
	}
	got, err := Best(findings, []Step{step, {Name: "wait", Cost: time.Minute, Effect: nil, Sigma: []float64{1}}})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(got[0].Bits-want) > 0.03 || got[0].Step.Name != "look" {
		t.Errorf("%s promises %.4f bit, by integration %.4f", got[0].Step.Name, got[0].Bits, want)
	}
	if got[1].Bits > 1e-9 || math.Abs(got[1].Certain-2.0/3) > 1e-9 {
		t.Errorf("waiting promises %+v", got[1])
	}
	if _, err := Best(nil, nil); !errors.Is(err, ErrNoEvidence) {
		t.Errorf("no findings: %v", err)
	}
	for _, bad := range []Step{{Sigma: []float64{0}}, {Sigma: []float64{1}, Effect: map[string][]float64{"a": {1, 2}}}} {
		if _, err := Best(findings, []Step{bad}); err == nil {
			t.Errorf("accepted %+v", bad)
		}
	}
}

// Span and zero of a gauge look the same at one pressure. Going elsewhere is
// what tells them, and Best must say so rather than offer a longer look.
func TestTheStepThatTellsIsOffered(t *testing.T) {
	o := Observation{Sigma: testSigma}
	o.Shift[Wavelength], o.Shift[Disagreement] = 0.3e-9, -4000
	findings, err := Attribute(Causes(testSlopes, testState), o)
	if err != nil {
		t.Fatal(err)
	}
	low := testState
	low.Pressure = 1 * unit.Bar
	shut := [ObservableCount]float64{Decay: 0.02}
	worths, err := Best(findings, []Step{
		Elsewhere("stay for ten minutes", 10*time.Minute, testSlopes, testState, testSigma),
		Elsewhere("go to 1 bar", 10*time.Minute, testSlopes, low, [ObservableCount]float64{Disagreement: 200}),
		Elsewhere("shut all valves", 10*time.Minute, testSlopes, testState, shut),
	})
	if err != nil {
		t.Fatal(err)
	}
	for _, w := range worths {
		t.Logf("%s: %.2f bit, then %.0f %% certain", w.Step.Name, w.Bits, 100*w.Certain)
	}
	if worths[0].Step.Name != "go to 1 bar" || worths[0].Certain < 0.95 {
		t.Errorf("offered %s", worths[0].Step.Name)
	}
}

// Looking at one half of the observables and then, as a step, at the other must
// say the same as looking at all of them at once.
func TestToldAfterwardsIsToldAtOnce(t *testing.T) {
	causes := Causes(testSlopes, testState)
	for i := range causes {
		causes[i].Doubt = [ObservableCount]float64{}
	}
	all := Observation{Sigma: testSigma}
	all.Shift[Wavelength], all.Shift[Strength], all.Shift[Disagreement], all.Shift[Decay] = 0.4e-9, -0.02, -3000, 0.1
	first, later := all, [ObservableCount]float64{}
	var seen []float64
	for _, k := range []Observable{Strength, Disagreement, Decay} {
		first.Sigma[k], later[k] = 0, testSigma[k]
		seen = append(seen, all.Shift[k])
	}
	want, err := Attribute(causes, all)
	if err != nil {
		t.Fatal(err)
	}
	before, err := Attribute(causes, first)
	if err != nil {
		t.Fatal(err)
	}
	step := Elsewhere("look again", time.Minute, testSlopes, testState, later)
	step.Doubt = nil
	got, err := step.Told(before, seen)
	if err != nil {
		t.Fatal(err)
	}
	moved := false
	for i, w := range want {
		g := got[i]
		if g.Cause.Name != w.Cause.Name || math.Abs(g.Probability-w.Probability) > 1e-9 ||
			math.Abs(g.Amount-w.Amount) > 1e-9*w.Cause.Size || math.Abs(g.AmountSigma-w.AmountSigma) > 1e-9*w.Cause.Size {
			t.Errorf("afterwards %s %v %v ± %v, at once %s %v %v ± %v", g.Cause.Name, g.Probability, g.Amount, g.AmountSigma,
				w.Cause.Name, w.Probability, w.Amount, w.AmountSigma)
		}
		moved = moved || math.Abs(before[i].Probability-w.Probability) > 0.1
	}
	if !moved {
		t.Error("the step told nothing")
	}
	if _, err := step.Told(before, seen[1:]); err == nil {
		t.Error("a value short is accepted")
	}
	if _, err := step.Told(nil, seen); !errors.Is(err, ErrNoEvidence) {
		t.Errorf("no findings: %v", err)
	}
}

// An effect that is known to a fifth explains a shift that is a fifth off, and
// not one that has the other sign.
func TestDoubtForgivesSizeNotSign(t *testing.T) {
	o := Observation{Sigma: testSigma}
	coupling := func(strength float64) Finding {
		o.Shift[Wavelength], o.Shift[Strength], o.Shift[Width] = 0.48e-9, strength, -0.036
		findings, err := Attribute(Causes(testSlopes, testState), o)
		if err != nil {
			t.Fatal(err)
		}
		for _, f := range findings {
			if f.Cause.Name == "coupling into the fibre" {
				return f
			}
		}
		t.Fatal("coupling is not among the findings")
		return Finding{}
	}
	if f := coupling(-0.18 * 1.2); f.Left > 1.5 || f.Probability < 0.5 {
		t.Errorf("a fifth more is %.1f standard deviations off, %.0f %%", f.Left, 100*f.Probability)
	}
	if f := coupling(0.18); f.Left < 4 {
		t.Errorf("the other sign is %.1f standard deviations off", f.Left)
	}
}
