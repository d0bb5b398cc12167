package pulse

import (
	"math"
	"testing"

	"barline/model/unit"
)

// glass is a wide-band medium with a propagation constant whose every value
// is positive, strong enough a Kerr response to make a third harmonic, and no
// loss.
func glass(t *testing.T, points int, step unit.Second, shortest, longest unit.Metre) (Grid, Medium) {
	t.Helper()
	g, err := NewGrid(points, step, shortest, longest)
	if err != nil {
		t.Fatal(err)
	}
	m := Medium{Area: 4.3e-10, Chi3: Chi3FromN2(8e-23), Length: 0.1}
	omega0 := 2 * math.Pi * lightSpeed / float64(benchWavelength)
	for _, w := range g.Frequencies() {
		d := w - omega0
		m.Beta[0] = append(m.Beta[0], w/lightSpeed*1.002-0.4e-27*d*d+0.6e-42*d*d*d)
	}
	m.Slowness = 1.002 / lightSpeed
	return g, m
}

func launched(t *testing.T, g Grid, m Medium, energy unit.Joule) []complex128 {
	t.Helper()
	in, err := Launch(g, m, Pulse{Wavelength: benchWavelength, Duration: 35 * unit.Femtosecond, Energy: energy})
	if err != nil {
		t.Fatal(err)
	}
	return in
}

func solve(t *testing.T, g Grid, m Medium, in []complex128, tolerance float64) *Solver {
	t.Helper()
	s, err := NewSolver(g, m, in, tolerance)
	if err != nil {
		t.Fatal(err)
	}
	toEnd(t, s)
	return s
}

// Without loss and plasma the equation conserves Σ (β/ω)|E|²: it is a
// Hamiltonian system whose polarisation is the derivative of a function of the
// field; Kolesik & Moloney, Phys. Rev. E 70, 036604 (2004).
func TestFullFieldConservesEnergy(t *testing.T) {
	g, m := glass(t, 4096, 0.15*unit.Femtosecond, 180*unit.Nanometre, 4*unit.Micrometre)
	m.Length = 0.03
	in := launched(t, g, m, 1.5*unit.Microjoule)
	s := solve(t, g, m, in, 1e-8)
	if r := s.Energy() / m.energy(g, in); math.Abs(r-1) > 1e-6 {
		t.Errorf("energy at the end is %.9f of the input's, want 1", r)
	}
	third := 0.0
	for i, v := range s.Spectrum() {
		if w := g.Omega(g.Lo + i); w > 4.5e15 && w < 6.5e15 {
			third += norm2(v)
		}
	}
	if third == 0 {
		t.Error("no third harmonic at all: the test proves nothing")
	}
}

// Without the third harmonic the equation is the envelope form, which
// conserves photons as well: Σ (β/ω²)|E|².
func TestEnvelopeFormConservesPhotons(t *testing.T) {
	g, m := glass(t, 2048, 0.5*unit.Femtosecond, 640*unit.Nanometre, 1900*unit.Nanometre)
	in := launched(t, g, m, 0.5*unit.Microjoule)
	photons := func(spectrum []complex128) float64 {
		sum := 0.0
		for i, v := range spectrum {
			w := g.Omega(g.Lo + i)
			sum += norm2(v) * m.Beta[0][i] / (w * w)
		}
		return sum
	}
	m.Length = 0.05
	s := solve(t, g, m, in, 1e-9)
	if r := photons(s.Spectrum()) / photons(in); math.Abs(r-1) > 1e-7 {
		t.Errorf("photon number at the end is %.9f of the input's, want 1", r)
	}
	if d := apart(in, s.Spectrum()); d < 0.1 {
		t.Errorf("the pulse changed by %.2g only: the test proves nothing", d)
	}
}

// steep is an ionisation rate that rises like the tunnelling rate does.
func steep(field float64) (electrons, loss float64) {
	w := 4e16 * math.Exp(-2.5e11/field)
	return w, w
}

func withPlasma(t *testing.T, m Medium) Medium {
	t.Helper()
	rate, err := NewRateTable(1e10, 2e11, steep)
	if err != nil {
		t.Fatal(err)
	}
	m.Atoms = []Atoms{{rate, 2.2e26, 15.76 * elementaryCharge}}
	return m
}

// What the field loses is the work ∫E·J that it does on the plasma. The fine
// grid makes the sum over instants as good as the integral.
func TestEnergyLostIsTheWorkDone(t *testing.T) {
	g, m := glass(t, 8192, 0.05*unit.Femtosecond, 180*unit.Nanometre, 3*unit.Micrometre)
	m = withPlasma(t, m)
	harder, err := NewRateTable(1.2e10, 2e11, func(field float64) (electrons, loss float64) { return steep(field / 1.2) })
	if err != nil {
		t.Fatal(err)
	}
	m.Atoms = append(m.Atoms, Atoms{harder, 0.8e26, 21.6 * elementaryCharge})
	m.Length = 0.01
	in := launched(t, g, m, 9*unit.Microjoule)
	s := solve(t, g, m, in, 1e-6)
	before := m.energy(g, in)
	lost := before - s.Energy()
	if lost < 0.05*before {
		t.Fatalf("only %.2g of the energy was lost: the test proves nothing", lost/before)
	}
	if d := math.Abs(lost - s.absorbed); d > 1e-6*before {
		t.Errorf("field lost %.8g J, plasma took %.8g J: apart by %.2g of the input", lost, s.absorbed, d/before)
	}
}

// distance returns |a−b|/|a| in the Euclidean norm.
func distance(a, b []complex128) float64 {
	var off, size float64
	for i := range a {
		off += norm2(a[i] - b[i])
		size += norm2(a[i])
	}
	return math.Sqrt(off / size)
}

// Halving the step divides the error by 2⁵ at least; the pair's leading error
// is small enough that the next order still shows.
func TestErrorFallsAtFifthOrder(t *testing.T) {
	b, dispersion, in := soliton(t, 2048, 2.5, 3*t0)
	for i, w := range b.grid.Frequencies() {
		b.medium.Coupling[i] *= w / b.omega0
	}
	fixed := func(steps int) []complex128 {
		b.medium.Length = dispersion
		s, err := NewSolver(b.grid, b.medium, in, 0.1)
		if err != nil {
			t.Fatal(err)
		}
		h := dispersion / float64(steps)
		for range steps {
			s.prepare(h)
			for k := 1; k < stages; k++ {
				s.stage(k, h)
			}
			s.accept(h)
		}
		return append([]complex128(nil), s.Spectrum()...)
	}
	exact := fixed(640)
	last := 0.0
	for _, n := range []int{40, 80, 160} {
		e := distance(exact, fixed(n))
		if order := math.Log2(last / e); last > 0 && (order < 4.7 || order > 6.1) {
			t.Errorf("from %d to %d steps the error fell at order %.2f, want 5 to 6", n/2, n, order)
		}
		last = e
	}
}

func TestStepAllocatesNothing(t *testing.T) {
	g, m := glass(t, 4096, 0.15*unit.Femtosecond, 180*unit.Nanometre, 4*unit.Micrometre)
	m = withPlasma(t, m)
	s, err := NewSolver(g, m, launched(t, g, m, unit.Microjoule), 1e-6)
	if err != nil {
		t.Fatal(err)
	}
	if n := testing.AllocsPerRun(5, func() { _, err = s.Advance() }); n != 0 || err != nil {
		t.Errorf("a step made %v allocations (%v)", n, err)
	}
}

// A density that changes along the fibre is the sum of its parts: the linear
// phase of a ramp is that of its mean.
func TestRampOfDensityTurnsAsItsMean(t *testing.T) {
	b := newBench(t, 1024, -1e-27, 1e-30)
	in := b.launch(t, Sech2, 35*unit.Femtosecond, 1)
	ramp, err := NewProfile([]float64{0, 0.2, 1}, []float64{0.5, 1.5, 0.5})
	if err != nil {
		t.Fatal(err)
	}
	linear := make([]float64, b.grid.Bins())
	for i, w := range b.grid.Frequencies() {
		linear[i] = 0.003 * w / lightSpeed
	}
	b.medium.Beta[1] = linear
	b.medium.Density = ramp
	ramped := b.run(t, in, 1, 1e-6)
	b.medium.Density = nil
	uniform := b.run(t, in, 1, 1e-6)
	for i := range in {
		if d := ramped.Spectrum()[i] - uniform.Spectrum()[i]; norm2(d) > 1e-18*norm2(uniform.Spectrum()[b.grid.Bins()/2]) && norm2(d) > 1e-16*norm2(in[i]) {
			t.Fatalf("bin %d differs by %.2g", i, math.Sqrt(norm2(d)/norm2(in[i])))
		}
	}
	if math.Abs(ramp.At(0.1)-1) > 1e-15 || ramp.At(-1) != 0.5 || ramp.At(2) != 0.5 {
		t.Errorf("ramp is %v at 0.1, %v at -1, %v at 2", ramp.At(0.1), ramp.At(-1), ramp.At(2))
	}
}
