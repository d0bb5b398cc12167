package pulse

import (
	"math"
	"math/cmplx"
	"testing"

	"barline/model/pulse/fourier"
	"barline/model/unit"
)

// bench is a plain medium in which the real field obeys the nonlinear
// Schrödinger equation: the band leaves out the third harmonic, the
// propagation constant is a parabola, the coupling that of the centre.
type bench struct {
	grid   Grid
	medium Medium
	omega0 float64 // rad/s
	beta2  float64 // s²/m
	gamma  float64 // 1/(W m)
}

const benchWavelength = 1030 * unit.Nanometre

func newBench(t *testing.T, points int, beta2, gamma float64) *bench {
	t.Helper()
	g, err := NewGrid(points, 0.5*unit.Femtosecond, 640*unit.Nanometre, 1900*unit.Nanometre)
	if err != nil {
		t.Fatal(err)
	}
	b := &bench{grid: g, omega0: 2 * math.Pi * lightSpeed / float64(benchWavelength), beta2: beta2, gamma: gamma}
	const area = 4e-10
	n2 := gamma * lightSpeed * area / b.omega0
	b.medium = Medium{Area: area, Chi3: Chi3FromN2(n2), Slowness: 1 / lightSpeed, Length: 1}
	for _, w := range g.Frequencies() {
		d := w - b.omega0
		b.medium.Beta[0] = append(b.medium.Beta[0], w/lightSpeed+beta2/2*d*d)
		b.medium.Coupling = append(b.medium.Coupling, b.omega0/(2*vacuumPermit*lightSpeed))
	}
	return b
}

// launch returns a pulse of the given duration and peak power at the input.
func (b *bench) launch(t *testing.T, shape Shape, fwhm unit.Second, peak float64) []complex128 {
	t.Helper()
	p := Pulse{Wavelength: benchWavelength, Duration: fwhm, Shape: shape, Energy: 1}
	spectrum, err := Launch(b.grid, b.medium, p)
	if err != nil {
		t.Fatal(err)
	}
	f := complex(math.Sqrt(peak/peakOf(b.power(t, spectrum))), 0)
	for i := range spectrum {
		spectrum[i] *= f
	}
	return spectrum
}

// power returns the power in W of the envelope over the instants of the grid.
func (b *bench) power(t *testing.T, spectrum []complex128) []float64 {
	t.Helper()
	plan, err := fourier.NewComplex(b.grid.Points)
	if err != nil {
		t.Fatal(err)
	}
	all := make([]complex128, b.grid.Points)
	copy(all[b.grid.Lo:], spectrum)
	plan.Inverse(all)
	power := make([]float64, len(all))
	for i, a := range all {
		power[i] = 2 * vacuumPermit * lightSpeed * b.medium.Area * norm2(a)
	}
	return power
}

func peakOf(x []float64) float64 {
	m := 0.0
	for _, v := range x {
		m = max(m, v)
	}
	return m
}

func (b *bench) run(t *testing.T, spectrum []complex128, length, tolerance float64) *Solver {
	t.Helper()
	b.medium.Length = length
	s, err := NewSolver(b.grid, b.medium, spectrum, tolerance)
	if err != nil {
		t.Fatal(err)
	}
	toEnd(t, s)
	return s
}

func toEnd(t *testing.T, s *Solver) {
	t.Helper()
	for done := false; !done; {
		var err error
		if done, err = s.Advance(); err != nil {
			t.Fatal(err)
		}
	}
}

// apart returns the distance of two spectra relative to the first, whatever
// their common phase.
func apart(a, b []complex128) float64 {
	var overlap complex128
	var na, nb float64
	for i := range a {
		overlap += cmplx.Conj(a[i]) * b[i]
		na += norm2(a[i])
		nb += norm2(b[i])
	}
	return math.Sqrt(math.Abs(na+nb-2*cmplx.Abs(overlap)) / na)
}

const (
	sechWidth = 1.7627471740390859 // full width at half maximum of sech² over T₀: 2 arcosh √2
	t0        = 20e-15             // s
)

// soliton returns a bench on which a sech² pulse of T₀ = t0 has order n, with
// the dispersion length in m and the pulse. A high order wants a long pulse,
// lest the bench's narrow band cut its spectrum.
func soliton(t *testing.T, points int, n, t0 float64) (b *bench, length float64, spectrum []complex128) {
	const beta2, gamma = -1e-27, 1e-6 // s²/m, 1/(W m)
	b = newBench(t, points, beta2, gamma)
	peak := n * n * math.Abs(beta2) / (gamma * t0 * t0)
	return b, t0 * t0 / math.Abs(beta2), b.launch(t, Sech2, unit.Second(sechWidth*t0), peak)
}

// Closed forms of the nonlinear Schrödinger equation: Agrawal, Nonlinear Fiber
// Optics, 5th ed. (2013), sections 3.2, 4.1, 4.4 and 5.2; Satsuma & Yajima,
// Prog. Theor. Phys. Suppl. 55, 284 (1974).

func TestFundamentalSolitonStays(t *testing.T) {
	b, dispersion, in := soliton(t, 2048, 1, t0)
	s := b.run(t, in, 5*math.Pi/2*dispersion, 1e-8)
	if d := apart(in, s.Spectrum()); d > 1e-6 {
		t.Errorf("after five periods the soliton differs by %.2g, want 1e-6", d)
	}
}

func TestSecondOrderSolitonPeaksFourfold(t *testing.T) {
	b, dispersion, in := soliton(t, 4096, 2, 3*t0)
	before := peakOf(b.power(t, in))
	s := b.run(t, in, math.Pi/4*dispersion, 1e-8)
	if r := peakOf(b.power(t, s.Spectrum())) / before; math.Abs(r-4) > 1e-4 {
		t.Errorf("peak at half a period is %.6f of the input's, want 4", r)
	}
}

func TestThirdOrderSolitonRecurs(t *testing.T) {
	b, dispersion, in := soliton(t, 4096, 3, 3*t0)
	period := math.Pi / 2 * dispersion
	before := peakOf(b.power(t, in))
	s := b.run(t, in, 0.24*period, 1e-8)
	if r := peakOf(b.power(t, s.Spectrum())) / before; math.Abs(r-6.170) > 0.003 {
		t.Errorf("peak at 0.24 of the period is %.4f of the input's, want 6.170", r)
	}
	s = b.run(t, in, period, 1e-8)
	if d := apart(in, s.Spectrum()); d > 1e-4 {
		t.Errorf("after one period the third-order soliton differs by %.2g, want 1e-4", d)
	}
}

func TestGaussianBroadensByRootTen(t *testing.T) {
	b := newBench(t, 2048, -1e-27, 1e-30)
	in := b.launch(t, Gauss, unit.Second(2*math.Sqrt(math.Ln2)*t0), 1)
	s := b.run(t, in, 3*t0*t0/1e-27, 1e-8)
	before, after := rmsWidth(b.power(t, in)), rmsWidth(b.power(t, s.Spectrum()))
	if r := after / before; math.Abs(r-math.Sqrt(10)) > 1e-6 {
		t.Errorf("after 3 dispersion lengths the width is %.8f of the input's, want √10", r)
	}
}

// rmsWidth returns the rms width in samples.
func rmsWidth(p []float64) float64 {
	var sum, first, second float64
	for j, v := range p {
		x := float64(j - len(p)/2)
		sum, first, second = sum+v, first+v*x, second+v*x*x
	}
	return math.Sqrt(second/sum - first*first/(sum*sum))
}

func TestSelfPhaseModulation(t *testing.T) {
	const phase = 3.5 * math.Pi
	b := newBench(t, 2048, 0, 1e-6)
	const peak = 1e6
	in := b.launch(t, Gauss, 80*unit.Femtosecond, peak)
	s := b.run(t, in, phase/(b.gamma*peak), 1e-9)
	plan, err := fourier.NewComplex(b.grid.Points)
	if err != nil {
		t.Fatal(err)
	}
	want := make([]complex128, b.grid.Points)
	copy(want[b.grid.Lo:], in)
	plan.Inverse(want)
	for i, p := range b.power(t, in) {
		want[i] *= cmplx.Rect(1/float64(len(want)), -phase*p/peak) // conjugate, as spectra here are
	}
	plan.Forward(want)
	if d := apart(want[b.grid.Lo:b.grid.Hi], s.Spectrum()); d > 1e-6 {
		t.Errorf("spectrum differs from the closed form by %.2g, want 1e-6", d)
	}
}

// Self-steepening delays the peak by 3γPz/ω₀: Agrawal, section 4.4.1, from
// the method of characteristics.
func TestSelfSteepeningDelaysThePeak(t *testing.T) {
	b := newBench(t, 4096, 0, 1e-6)
	for i, w := range b.grid.Frequencies() {
		b.medium.Coupling[i] = w / (2 * vacuumPermit * lightSpeed)
	}
	const peak = 1e6
	in := b.launch(t, Gauss, 150*unit.Femtosecond, peak)
	length := 6 / (b.gamma * peak)
	s := b.run(t, in, length, 1e-9)
	want := 3 * b.gamma * peak * length / b.omega0
	got := (vertex(b.power(t, s.Spectrum())) - vertex(b.power(t, in))) * float64(b.grid.Step)
	if math.Abs(got/want-1) > 2e-3 {
		t.Errorf("peak came %.4g fs late, want %.4g fs", got*1e15, want*1e15)
	}
}

// vertex returns the position of the maximum by a parabola through three samples.
func vertex(p []float64) float64 {
	j := 1
	for i := 1; i < len(p)-1; i++ {
		if p[i] > p[j] {
			j = i
		}
	}
	a, b, c := p[j-1], p[j], p[j+1]
	return float64(j) + (a-c)/(2*(a-2*b+c))
}

func TestLossAlone(t *testing.T) {
	b := newBench(t, 1024, -1e-27, 1e-30)
	b.medium.Loss = make([]float64, b.grid.Bins())
	for i := range b.medium.Loss {
		b.medium.Loss[i] = 0.7
	}
	in := b.launch(t, Sech2, 35*unit.Femtosecond, 1)
	before := b.medium.energy(b.grid, in)
	s := b.run(t, in, 2, 1e-6)
	if r, want := s.Energy()/before, math.Exp(-0.7*2); math.Abs(r/want-1) > 1e-12 {
		t.Errorf("share left after 2 m is %v, want %v", r, want)
	}
}
