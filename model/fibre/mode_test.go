package fibre

import (
	"math"
	"testing"

	"barline/model/gas"
	"barline/model/unit"
)

// Zeros of J₀ … J₃ to ten digits: M. Abramowitz, I. A. Stegun, Handbook of
// Mathematical Functions (1964), table 9.5; DLMF 10.21.
func TestBesselZeros(t *testing.T) {
	for n, row := range [][]float64{
		{2.4048255577, 5.5200781103, 8.6537279129, 11.7915344390, 14.9309177085},
		{3.8317059702, 7.0155866698, 10.1734681351, 13.3236919363, 16.4706300509},
		{5.1356223018, 8.4172441404, 11.6198411721, 14.7959517824, 17.9598194950},
		{6.3801618959, 9.7610231300, 13.0152007217, 16.2234661603, 19.4094152264},
	} {
		for k, want := range row {
			if got := besselZero(n, k+1); math.Abs(got-want) > 6e-11 {
				t.Errorf("zero %d of J%d is %.12f, want %.10f", k+1, n, got, want)
			}
		}
	}
	if got := besselZero(0, 1); math.Abs(got-2.404825557695773) > 1e-14 {
		t.Errorf("first zero of J0 is %.16f", got)
	}
}

// Which Bessel function each mode takes: E. A. J. Marcatili, R. A. Schmeltzer,
// Bell Syst. Tech. J. 43, 1783 (1964), in today's names.
func TestModes(t *testing.T) {
	for name, want := range map[string]float64{
		"HE11": 2.4048255577, "HE12": 5.5200781103, "HE21": 3.8317059702, "HE22": 7.0155866698, "HE31": 5.1356223018,
		"TE01": 3.8317059702, "TM01": 3.8317059702, "TE02": 7.0155866698, "EH11": 5.1356223018, "EH12": 8.4172441404,
	} {
		m, err := ParseMode(name)
		if err != nil {
			t.Fatal(err)
		}
		if u, err := m.zero(); err != nil || math.Abs(u-want) > 6e-11 {
			t.Errorf("%s: u = %.12f, %v; want %.10f", name, u, err, want)
		}
		if m.String() != name {
			t.Errorf("%s is written %s", name, m)
		}
	}
	for _, bad := range []string{"", "HE", "HE01", "HE10", "TE11", "XX11", "HE1a", "he11", "HE111"} {
		if _, err := ParseMode(bad); err == nil {
			t.Errorf("%q was taken", bad)
		}
	}
}

// A_eff = (∫F²)²/∫F⁴ by a plainer and slower sum, and the closed ∫F² of HE11,
// πa²J₁(u)² (DLMF 10.22.5).
func TestEffectiveArea(t *testing.T) {
	f, err := New(thick)
	if err != nil {
		t.Fatal(err)
	}
	const steps = 200000
	var second, fourth float64
	for i := range steps {
		x := (float64(i) + 0.5) / steps
		j := math.J0(2.404825557695773 * x)
		second += 2 * math.Pi * j * j * x / steps
		fourth += 2 * math.Pi * j * j * j * j * x / steps
	}
	j1 := math.J1(2.404825557695773)
	if math.Abs(second-math.Pi*j1*j1) > 1e-9 {
		t.Errorf("∫F² is %.12f, closed form %.12f", second, math.Pi*j1*j1)
	}
	a2 := f.Radius() * f.Radius()
	if share := f.EffectiveArea() / a2; math.Abs(share-second*second/fourth) > 1e-8 || math.Abs(share-1.49717) > 5e-6 {
		t.Errorf("A_eff/a² is %.9f, summed %.9f", share, second*second/fourth)
	}
	if got := f.PeakFactor(); math.Abs(got-second/fourth) > 1e-8 || math.Abs(got-1.768) > 5e-4 {
		t.Errorf("peak intensity over P/A_eff is %.6f, summed %.6f", got, second/fourth)
	}
	wider := f.WithSizes(2*f.Radius(), 0)
	if math.Abs(wider.EffectiveArea()/f.EffectiveArea()-4) > 1e-14 {
		t.Errorf("twice the radius gives %g times the area", wider.EffectiveArea()/f.EffectiveArea())
	}
}

// I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965): indices of his table at
// 20 °C, and β₂ of fused silica worked out independently.
func TestGlass(t *testing.T) {
	for lambda, want := range map[float64]float64{
		0.213856: 1.53430, 0.302150: 1.48719 + 0.00004, 0.404656: 1.46961, 0.589262: 1.45841, 1.01398: 1.45024, 1.52952: 1.44427, 2.0581: 1.43722 + 0.00002,
	} {
		if got := glassIndex(lambda * 1e-6); math.Abs(got-want) > 1.2e-4 {
			t.Errorf("index at %g µm is %.6f, want %.5f", lambda, got, want)
		}
	}
	for lambda, want := range map[float64]struct{ n, beta2 float64 }{
		260: {1.502388, 207.54}, 400: {1.470116, 97.57}, 800: {1.453317, 36.16}, 1030: {1.450044, 18.97}, 1550: {1.444024, -27.95},
	} {
		v := 1e3 / lambda
		n := glass(v * v).SqrtMinusOne()
		omega := Frequency(unit.Metre(lambda * 1e-9))
		beta2 := 2 * (n.C1 + n.C2) / (c * omega) * 1e27 // fs²/mm
		if math.Abs(1+n.C0-want.n) > 6e-7 || math.Abs(beta2-want.beta2) > 6e-3 {
			t.Errorf("%g nm: n = %.7f, β₂ = %.3f fs²/mm; want %.6f, %.2f", lambda, 1+n.C0, beta2, want.n, want.beta2)
		}
	}
}

// Leak of a bore in thick glass, dB/m, at 260 and 800 nm, argon: independent
// evaluation of the formula of Marcatili and Schmeltzer.
func TestBore(t *testing.T) {
	for _, test := range []struct {
		mode      string
		radius    float64
		bar       float64
		b260, b80 float64
	}{
		{"HE11", 15, 10, 37.06, 356.5}, {"HE12", 15, 10, 195.3, 1877}, {"HE21", 15, 10, 94.08, 904.9},
		{"TE01", 15, 10, 57.99, 583.1}, {"TM01", 15, 10, 130.2, 1227},
		{"HE11", 125, 1, 0.06397, 0.6153}, {"TM01", 125, 1, 0.2251, 2.12},
	} {
		mode, err := ParseMode(test.mode)
		if err != nil {
			t.Fatal(err)
		}
		g := guide(t, Spec{Kind: Capillary, CoreDiameter: unit.Metre(2e-6 * test.radius), Length: 1, Mode: mode},
			gas.Spec{Composition: "argon"}, unit.Pascal(test.bar*1e5), 293.15)
		for lambda, want := range map[unit.Metre]float64{260e-9: test.b260, 800e-9: test.b80} {
			if got := g.Bore(Frequency(lambda)) / neperPerDecibel; math.Abs(got/want-1) > 1.5e-3 {
				t.Errorf("%s, %g µm at %v: %.5g dB/m, want %.4g", test.mode, test.radius, lambda, got, want)
			}
		}
	}
}

// One thin wall of a 34 µm core leaks 18.7 dB/m at 1030 nm (independent
// evaluation of the antiresonant form); TE leaks less than TM, HE between.
func TestLeakOfOneWall(t *testing.T) {
	var leak, index []float64
	for _, name := range []string{"TE01", "HE21", "TM01"} {
		s := thin
		var err error
		if s.Mode, err = ParseMode(name); err != nil {
			t.Fatal(err)
		}
		g := guide(t, s, gas.Spec{Composition: "argon"}, 9e5, 293.15)
		leak = append(leak, g.Leakage(Frequency(1030e-9)))
		n, _ := g.IndexMinusOne(Frequency(300e-9))
		index = append(index, n.C0)
	}
	if !(leak[0] < leak[1] && leak[1] < leak[2]) || math.Abs(leak[1]-0.5*(leak[0]+leak[2])) > 1e-9*leak[1] {
		t.Errorf("TE, HE, TM leak %g", leak)
	}
	// One zero serves all three, so that HE stands halfway in the index too.
	if math.Abs(index[1]-0.5*(index[0]+index[2])) > 1e-13 || index[0] == index[2] {
		t.Errorf("TE, HE, TM have n−1 = %.9g", index)
	}
	g := guide(t, thin, gas.Spec{Composition: "argon"}, 9e5, 293.15)
	if got := g.Leakage(Frequency(1030e-9)) / neperPerDecibel; math.Abs(got-18.7) > 0.1 {
		t.Errorf("leak at 1030 nm is %.2f dB/m, want 18.7", got)
	}
}
