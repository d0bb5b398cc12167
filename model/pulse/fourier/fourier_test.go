package fourier

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

func noise(n int) []float64 {
	rng := rand.New(rand.NewPCG(1, uint64(n)))
	x := make([]float64, n)
	for i := range x {
		x[i] = rng.NormFloat64()
	}
	return x
}

// distance returns |a−b|/|b| in the Euclidean norm.
func distance(a, b []complex128) float64 {
	var num, den float64
	for i := range a {
		num += real((a[i] - b[i]) * cmplx.Conj(a[i]-b[i]))
		den += real(b[i] * cmplx.Conj(b[i]))
	}
	return math.Sqrt(num / den)
}

func TestRealAgreesWithGonum(t *testing.T) {
	for n := 8; n <= 1<<15; n *= 2 {
		plan, err := NewReal(n)
		if err != nil {
			t.Fatal(err)
		}
		x := noise(n)
		want := fourier.NewFFT(n).Coefficients(nil, x)
		got := make([]complex128, n/2+1)
		plan.Forward(got, x)
		if d := distance(got, want); d > 1e-15*math.Log2(float64(n)) {
			t.Errorf("forward transform of %d samples differs by %.1e", n, d)
		}
		back := make([]float64, n)
		plan.Inverse(back, got)
		for i := range back {
			if math.Abs(back[i]/float64(n)-x[i]) > 2e-14 {
				t.Fatalf("inverse of %d samples: sample %d is %v, was %v", n, i, back[i]/float64(n), x[i])
			}
		}
	}
}

func TestComplexAgreesWithGonum(t *testing.T) {
	for n := 4; n <= 1<<14; n *= 2 {
		plan, err := NewComplex(n)
		if err != nil {
			t.Fatal(err)
		}
		parts := noise(2 * n)
		x := make([]complex128, n)
		for i := range x {
			x[i] = complex(parts[i], parts[n+i])
		}
		ref := fourier.NewCmplxFFT(n)
		got := append([]complex128(nil), x...)
		plan.Forward(got)
		if d := distance(got, ref.Coefficients(nil, x)); d > 1e-15*math.Log2(float64(n)) {
			t.Errorf("forward transform of %d samples differs by %.1e", n, d)
		}
		got = append(got[:0], x...)
		plan.Inverse(got)
		if d := distance(got, ref.Sequence(nil, x)); d > 1e-15*math.Log2(float64(n)) {
			t.Errorf("inverse transform of %d samples differs by %.1e", n, d)
		}
	}
}

// A single oscillation has its energy in one bin, by definition of the
// transform.
func TestOneOscillation(t *testing.T) {
	const n, bin = 64, 5
	plan, err := NewReal(n)
	if err != nil {
		t.Fatal(err)
	}
	x := make([]float64, n)
	for j := range x {
		x[j] = math.Cos(2*math.Pi*bin*float64(j)/n - 0.3)
	}
	got := make([]complex128, n/2+1)
	plan.Forward(got, x)
	for k, v := range got {
		want := complex128(0)
		if k == bin {
			want = cmplx.Rect(n/2, -0.3)
		}
		if cmplx.Abs(v-want) > 1e-13*n {
			t.Errorf("bin %d holds %v, want %v", k, v, want)
		}
	}
}

func TestLengthsRefused(t *testing.T) {
	for _, n := range []int{-8, 0, 1, 2, 3, 12, 1000} {
		if _, err := NewReal(n); err == nil {
			t.Errorf("%d samples were accepted as real", n)
		}
		if _, err := NewComplex(n); err == nil {
			t.Errorf("%d samples were accepted as complex", n)
		}
	}
}

func TestTransformsAllocateNothing(t *testing.T) {
	plan, err := NewReal(4096)
	if err != nil {
		t.Fatal(err)
	}
	x, spectrum := noise(4096), make([]complex128, 2049)
	if n := testing.AllocsPerRun(10, func() { plan.Forward(spectrum, x); plan.Inverse(x, spectrum) }); n != 0 {
		t.Errorf("a pair of transforms made %v allocations", n)
	}
}

// BenchmarkReal times one real transform beside gonum's in the same run; the
// metric x-gonum says how many times faster than gonum's this one is.
func BenchmarkReal(b *testing.B) {
	for _, n := range []int{1 << 12, 1 << 13, 1 << 14} {
		b.Run(strconv.Itoa(n), func(b *testing.B) {
			plan, err := NewReal(n)
			if err != nil {
				b.Fatal(err)
			}
			ref := fourier.NewFFT(n)
			x, spectrum := noise(n), make([]complex128, n/2+1)
			theirs := best(func() { ref.Coefficients(spectrum, x) })
			ours := best(func() { plan.Forward(spectrum, x) })
			inverse := best(func() { plan.Inverse(x, spectrum) })
			for b.Loop() {
				plan.Forward(spectrum, x)
			}
			b.ReportMetric(theirs/ours, "x-gonum")
			b.ReportMetric(ours*1e6, "forward-µs")
			b.ReportMetric(inverse*1e6, "inverse-µs")
		})
	}
}
