package fourier

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
	"pgregory.net/rapid"
)

// paths returns whether to use vectors, for every way this machine offers.
func paths() []bool {
	if vectors() {
		return []bool{false, true}
	}
	return []bool{false}
}

func pathName(vectors bool) string {
	if vectors {
		return "vector"
	}
	return "plain"
}

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

// Lengths up to the longest that a grid of package pulse may have.
const longest = 1 << 17

func TestRealAgreesWithGonum(t *testing.T) {
	for _, vectors := range paths() {
		for n := 8; n <= longest; n *= 2 {
			plan, err := newReal(n, vectors)
			if err != nil {
				t.Fatal(err)
			}
			x := noise(n)
			want := fourier.NewFFT(n).Coefficients(nil, x)
			got := make([]complex128, n/2+1)
			plan.Forward(got, x)
			if d := distance(got, want); !(d <= 1e-15*math.Log2(float64(n))) {
				t.Errorf("%s forward transform of %d samples differs by %.1e", pathName(vectors), n, d)
			}
			back := make([]float64, n)
			plan.Inverse(back, got)
			for i := range back {
				if !(math.Abs(back[i]/float64(n)-x[i]) <= 2e-14) {
					t.Fatalf("%s inverse of %d samples: sample %d is %v, was %v", pathName(vectors), n, i, back[i]/float64(n), x[i])
				}
			}
		}
	}
}

func TestComplexAgreesWithGonum(t *testing.T) {
	for _, vectors := range paths() {
		for n := 4; n <= longest; n *= 2 {
			plan, err := newComplex(n, vectors)
			if err != nil {
				t.Fatal(err)
			}
			x := pairs(noise(2 * n))
			ref := fourier.NewCmplxFFT(n)
			got := slices.Clone(x)
			plan.Forward(got)
			if d := distance(got, ref.Coefficients(nil, x)); !(d <= 1e-15*math.Log2(float64(n))) {
				t.Errorf("%s forward transform of %d samples differs by %.1e", pathName(vectors), n, d)
			}
			copy(got, x)
			plan.Inverse(got)
			if d := distance(got, ref.Sequence(nil, x)); !(d <= 1e-15*math.Log2(float64(n))) {
				t.Errorf("%s inverse transform of %d samples differs by %.1e", pathName(vectors), n, d)
			}
		}
	}
}

// Where gonum's test might pass by averaging: no single bin may be far off.
func TestPathsAgreeInEveryBin(t *testing.T) {
	if !vectors() {
		t.Skip("this processor or build has one path only")
	}
	for n := 8; n <= longest; n *= 2 {
		plain, vector := plans(t, n)
		x := noise(n)
		a, b := make([]complex128, n/2+1), make([]complex128, n/2+1)
		plain.Forward(a, x)
		vector.Forward(b, x)
		allowed := 2e-15 * math.Log2(float64(n)) * math.Sqrt(float64(n))
		for k := range a {
			if !(cmplx.Abs(a[k]-b[k]) <= allowed) {
				t.Fatalf("bin %d of %d samples: plain %v, vector %v", k, n, a[k], b[k])
			}
		}
		y, z := make([]float64, n), make([]float64, n)
		plain.Inverse(y, a)
		vector.Inverse(z, a)
		for j := range y {
			if !(math.Abs(y[j]-z[j]) <= 1e-14*float64(n)) {
				t.Fatalf("sample %d of %d: plain %v, vector %v", j, n, y[j], z[j])
			}
		}
	}
}

func plans(t testing.TB, n int) (plain, vector *Real) {
	t.Helper()
	plain, err := NewPlainReal(n)
	if err != nil {
		t.Fatal(err)
	}
	if vector, err = NewReal(n); err != nil {
		t.Fatal(err)
	}
	return plain, vector
}

// The passes know no bounds: nothing outside what they were given may change.
func TestNothingElseIsWritten(t *testing.T) {
	const mark, room = 12345.5, 16
	for _, vectors := range paths() {
		for n := 8; n <= 1<<13; n *= 2 {
			plan, err := newReal(n, vectors)
			if err != nil {
				t.Fatal(err)
			}
			samples := make([]float64, n+2*room)
			bins := make([]complex128, n/2+1+2*room)
			for i := range samples {
				samples[i] = mark
			}
			for i := range bins {
				bins[i] = mark
			}
			x, spectrum := samples[room:][:n], bins[room:][:n/2+1]
			copy(x, noise(n))
			plan.Forward(spectrum, x)
			if !slices.Equal(x, noise(n)) {
				t.Errorf("%s: the forward transform of %d samples changed them", pathName(vectors), n)
			}
			before := slices.Clone(spectrum)
			plan.Inverse(x, spectrum)
			if !slices.Equal(spectrum, before) {
				t.Errorf("%s: the inverse transform of %d samples changed the bins", pathName(vectors), n)
			}
			for i := range room {
				if samples[i] != mark || samples[room+n+i] != mark || bins[i] != mark || bins[room+n/2+1+i] != mark {
					t.Fatalf("%s: transforms of %d samples wrote outside", pathName(vectors), n)
				}
			}
		}
	}
}

// Theorems of the transform, whatever the signal: it is linear, it keeps the
// energy (Parseval), and a circular delay turns the phases.
func TestTheorems(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := 1 << rapid.IntRange(3, 11).Draw(t, "log2 n")
		vectors := rapid.SampledFrom(paths()).Draw(t, "vectors")
		delay := rapid.IntRange(0, n-1).Draw(t, "delay")
		weight := rapid.Float64Range(-2, 2).Draw(t, "weight")
		seed := rapid.Uint64().Draw(t, "seed")
		plan, err := newReal(n, vectors)
		if err != nil {
			t.Fatal(err)
		}
		rng := rand.New(rand.NewPCG(seed, 7))
		x, y, sum, late := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
		energy := 0.0
		for j := range x {
			x[j], y[j] = rng.NormFloat64(), rng.NormFloat64()
			sum[j] = x[j] + weight*y[j]
			energy += x[j] * x[j]
		}
		for j := range x {
			late[(j+delay)%n] = x[j]
		}
		transform := func(x []float64) []complex128 {
			dst := make([]complex128, n/2+1)
			plan.Forward(dst, x)
			return dst
		}
		fx, fy, fsum, flate := transform(x), transform(y), transform(sum), transform(late)
		allowed := 1e-14 * float64(n)
		total := 0.0
		for k, v := range fx {
			if d := cmplx.Abs(v + complex(weight, 0)*fy[k] - fsum[k]); !(d <= allowed) {
				t.Fatalf("bin %d is off by %.1e from the sum of its parts", k, d)
			}
			if d := cmplx.Abs(v*root(k*delay%n, n) - flate[k]); !(d <= allowed) {
				t.Fatalf("bin %d of the delayed signal is off by %.1e", k, d)
			}
			share := 2.0
			if k == 0 || k == n/2 {
				share = 1
			}
			total += share * (real(v)*real(v) + imag(v)*imag(v))
		}
		if !(math.Abs(total/float64(n)-energy) <= 1e-13*energy) {
			t.Fatalf("energy %v in time, %v in frequency", energy, total/float64(n))
		}
	})
}

func FuzzPathsAgree(f *testing.F) {
	f.Add([]byte{1, 0, 255, 128}, uint8(4))
	f.Add([]byte("vector"), uint8(9))
	f.Fuzz(func(t *testing.T, text []byte, log2 uint8) {
		n := 1 << (3 + log2%10)
		plain, vector := plans(t, n)
		x := make([]float64, n)
		size := 0.0
		for j, c := range text {
			x[(j*37+int(c))%n] += float64(int8(c))
		}
		for _, v := range x {
			size += math.Abs(v)
		}
		a, b := make([]complex128, n/2+1), make([]complex128, n/2+1)
		plain.Forward(a, x)
		vector.Forward(b, x)
		y := make([]float64, n)
		vector.Inverse(y, b)
		for k := range a {
			if !(cmplx.Abs(a[k]-b[k]) <= 1e-14*size) {
				t.Fatalf("bin %d of %d samples: plain %v, vector %v", k, n, a[k], b[k])
			}
		}
		for j := range y {
			if !(math.Abs(y[j]/float64(n)-x[j]) <= 1e-14*size) {
				t.Fatalf("sample %d of %d came back as %v, was %v", j, n, y[j]/float64(n), x[j])
			}
		}
	})
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
	for _, vectors := range paths() {
		plan, err := newReal(4096, vectors)
		if err != nil {
			t.Fatal(err)
		}
		x, spectrum := noise(4096), make([]complex128, 2049)
		if n := testing.AllocsPerRun(10, func() { plan.Forward(spectrum, x); plan.Inverse(x, spectrum) }); n != 0 {
			t.Errorf("a pair of %s transforms made %v allocations", pathName(vectors), n)
		}
	}
}

// BenchmarkReal times one real transform beside gonum's in the same run; the
// metric x-gonum says how many times faster than gonum's this one is.
func BenchmarkReal(b *testing.B) {
	for _, n := range []int{1 << 12, 1 << 13, 1 << 14} {
		for _, vectors := range paths() {
			b.Run(fmt.Sprintf("%d/%s", n, pathName(vectors)), func(b *testing.B) {
				plan, err := newReal(n, vectors)
				if err != nil {
					b.Fatal(err)
				}
				ref := fourier.NewFFT(n)
				x, spectrum := noise(n), make([]complex128, n/2+1)
				t := best(
					func() { ref.Coefficients(spectrum, x) },
					func() { plan.Forward(spectrum, x) },
					func() { plan.Inverse(x, spectrum) },
				)
				for b.Loop() {
					plan.Forward(spectrum, x)
				}
				b.ReportMetric(t[0]/t[1], "x-gonum")
				b.ReportMetric(t[0]*1e6, "gonum-µs")
				b.ReportMetric(t[1]*1e6, "forward-µs")
				b.ReportMetric(t[2]*1e6, "inverse-µs")
			})
		}
	}
}
