package ionise

import (
	"math"
	"testing"
)

// Dawson's integral: M. Abramowitz, I. A. Stegun, Handbook of Mathematical
// Functions (1964), table 7.5 and the maximum of section 7.1.
func TestDawson(t *testing.T) {
	for _, test := range []struct{ x, want, within float64 }{
		{0, 0, 0}, {0.02, 0.019994667, 5e-9}, {0.5, 0.4244363835, 1e-10}, {1, 0.5380795069, 1e-10}, {2, 0.3013403889, 1e-10},
		{0.9241388730, 0.5410442246, 1e-10}, {10, 0.05025384719, 1e-10}, {25, 0.02001603, 1e-8},
	} {
		if got := dawson(test.x); math.Abs(got-test.want) > test.within {
			t.Errorf("D(%g) = %.12g, want %.10g", test.x, got, test.want)
		}
	}
	// The pieces meet, and D' = 1 − 2xD.
	for _, x := range []float64{0.03, 0.3, 0.77, 5.1, 20} {
		const h = 1e-4
		slope := (dawson(x+h) - dawson(x-h)) / (2 * h)
		if want := 1 - 2*x*dawson(x); math.Abs(slope-want) > 1e-7 {
			t.Errorf("D'(%g) = %g, want %g", x, slope, want)
		}
	}
}

var atoms = []struct {
	name string
	ip   float64
	l    int
	c2   float64 // C²(n*, l*) with l* = n*−1
	bsi  float64 // barrier-suppression intensity, W/cm²
}{
	{"helium", 24.58738901, 0, 4.25575, 1.46e15}, {"neon", 21.564541, 1, 4.24355, 8.65e14},
	{"argon", 15.7596119, 1, 4.11563, 2.47e14}, {"krypton", 13.9996055, 1, 4.02547, 1.54e14}, {"xenon", 12.1298437, 1, 3.88235, 8.66e13},
}

func rate(t testing.TB, ip float64, l int, lambda float64) Rate {
	t.Helper()
	r, err := NewRate(ip, l, 2*math.Pi*299792458/lambda)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// At low frequency the rate is the quasi-static tunnelling rate, with the
// ionisation energies of the NIST Atomic Spectra Database:
// C² f I_p (2F₀/F)^{2n*−1} e^{−2F₀/3F} (M. V. Ammosov, N. B. Delone,
// V. P. Krainov, Sov. Phys. JETP 64, 1191 (1986), m = 0, before averaging over
// a cycle).
func TestTunnellingLimit(t *testing.T) {
	for _, a := range atoms {
		r := rate(t, a.ip, a.l, 100e-6)
		ip := a.ip / hartreeEV
		f0 := math.Pow(2*ip, 1.5)
		n := 1 / math.Sqrt(2*ip)
		for _, x := range []float64{0.04, 0.06, 0.1} {
			f := x * f0
			want := a.c2 * float64(2*a.l+1) * ip * math.Pow(2*f0/f, 2*n-1) * math.Exp(-2*f0/(3*f)) / atomicTime
			got := r.At(f * atomicField)
			if ratio := got / want; !(ratio > 0.985 && ratio < 1.015) {
				t.Errorf("%s at %g κ³: %g of the tunnelling rate", a.name, x, ratio)
			}
		}
	}
}

// In weak fields of high frequency the rate goes with the intensity to the
// power of the number of photons that the ionisation energy takes, less the n*
// of the Coulomb factor (2κ³/F)^2n*, which this form keeps at all frequencies.
func TestMultiphotonSlope(t *testing.T) {
	for _, a := range atoms {
		r := rate(t, a.ip, a.l, 400e-9)
		k3 := math.Pow(r.kappa, 3)
		f := 0.004 * k3
		g := r.omega * r.kappa / f
		nu := r.ip / r.omega * (1 + 1/(2*g*g))
		photons := math.Ceil(nu)
		slope := (r.logarithm(f*1.001) - r.logarithm(f/1.001)) / (4 * math.Log(1.001))
		// The instantaneous form carries the factor F^−½ more.
		if got := slope + 0.25 + r.n; math.Abs(got-photons) > 0.2 {
			t.Errorf("%s at g = %.1f: slope %.2f, %g photons", a.name, g, got, photons)
		}
	}
}

// The sum over photons, summed to the end one by one.
func TestPhotonSum(t *testing.T) {
	r := rate(t, 15.7596119, 1, 1030e-9)
	for _, g := range []float64{0.3, 0.6, 1, 2.5} {
		nu := r.ip / r.omega * (1 + 1/(2*g*g))
		root := math.Sqrt(1 + g*g)
		alpha, beta := 2*(math.Asinh(g)-g/root), 2*g/root
		sum := 0.0
		for x := math.Ceil(nu) - nu; alpha*x < 45; x++ {
			sum += math.Exp(-alpha*x) * dawson(math.Sqrt(beta*x))
		}
		want := 4 / math.Sqrt(3*math.Pi) * g * g / (1 + g*g) * sum
		if got := r.photons(g); math.Abs(got/want-1) > 3e-5 {
			t.Errorf("A₀(%g) = %.9g, summed %.9g", g, got, want)
		}
	}
	if got := r.photons(0.01); math.Abs(got-1) > 0.01 {
		t.Errorf("A₀(0.01) = %g, want 1", got)
	}
}

// Tables against the formula and against plain integration over the mode.
func TestTables(t *testing.T) {
	r := rate(t, 15.7596119, 1, 1030e-9)
	uniform, electrons, losses := NewTable(r, Fundamental, Uniform), NewTable(r, Fundamental, Electrons), NewTable(r, Fundamental, Losses)
	for _, e := range []float64{1.3e10, 2.71e10, 5.03e10, 1.17e11} {
		if got, want := uniform.Rate(-e), r.At(e); math.Abs(got/want-1) > 5e-3 {
			t.Errorf("at %g V/m: table %g, formula %g", e, got, want)
		}
		var i2, i4, j, l float64
		const steps = 3000
		for i := range steps {
			x := (float64(i) + 0.5) / steps
			b := math.J0(Fundamental.Zero * x)
			i2 += b * b * x
			i4 += b * b * b * b * x
		}
		for i := range steps {
			x := (float64(i) + 0.5) / steps
			b := math.J0(Fundamental.Zero * x)
			w := r.At(e * math.Sqrt(i2/i4) * b)
			j += w * b * b * x / i2
			l += w * x / (i2 * i2 / i4)
		}
		if got := electrons.Rate(e); math.Abs(got/j-1) > 5e-3 {
			t.Errorf("at %g V/m: electrons %g, integrated %g", e, got, j)
		}
		if got := losses.Rate(e); math.Abs(got/l-1) > 5e-3 {
			t.Errorf("at %g V/m: losses %g, integrated %g", e, got, l)
		}
	}
	// Six to eight times more electrons than P/A_eff suggests, in the field
	// of a compressed pulse (argon, 1030 nm).
	if ratio := electrons.Rate(2.6e10) / uniform.Rate(2.6e10); !(ratio > 4 && ratio < 12) {
		t.Errorf("averaging over the mode changes the rate by %g", ratio)
	}
	if uniform.Rate(0) != 0 || electrons.Rate(0.99*electrons.Threshold()) != 0 {
		t.Error("the rate is not zero below its threshold")
	}
	if a, b := uniform.Rate(1e13), uniform.Rate(2e13); !(a > 0) || a != b {
		t.Errorf("beyond the table: %g and %g", a, b)
	}
	last := 0.0
	for e := electrons.Threshold(); e < 2.4e11; e *= 1.003 {
		v := electrons.Rate(e)
		if !(v > last) {
			t.Fatalf("rate falls at %g V/m", e)
		}
		last = v
	}
}

func TestRefusals(t *testing.T) {
	for _, test := range []struct {
		ip    float64
		l     int
		omega float64
	}{{0, 1, 2e15}, {math.NaN(), 0, 2e15}, {15, -1, 2e15}, {15, 1, 0}, {15, 1, math.NaN()}} {
		if _, err := NewRate(test.ip, test.l, test.omega); err == nil {
			t.Errorf("%+v was taken", test)
		}
	}
}

func BenchmarkTable(b *testing.B) {
	r := rate(b, 15.7596119, 1, 1030e-9)
	b.Run("make", func(b *testing.B) {
		for b.Loop() {
			NewTable(r, Fundamental, Electrons)
		}
	})
	table := NewTable(r, Fundamental, Electrons)
	field, dst := make([]float64, 4096), make([]float64, 4096)
	for i := range field {
		field[i] = 3e10 * math.Sin(float64(i)*0.3) * math.Exp(-math.Pow(float64(i-2048)/200, 2))
	}
	b.Run("4096 fields", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			table.Over(dst, field)
		}
	})
}
