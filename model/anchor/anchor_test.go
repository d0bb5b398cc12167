package anchor

import (
	"math"
	"math/rand/v2"
	"testing"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/pulse"
	"barline/model/unit"
)

// low and high are argon at 7 and 12 bar, in mol/m³.
const low, high = 286.0, 493.0

// span is what the tests anchor.
var span = Range{low, high}

// bench is a single-ring fibre in argon.
func bench(t testing.TB) *Bench {
	t.Helper()
	b, err := New(Spec{
		Gas: gas.Spec{Composition: "argon"},
		Fibre: fibre.Spec{Kind: fibre.Antiresonant, CoreDiameter: 34 * unit.Micrometre, Wall: 180 * unit.Nanometre,
			Length: 0.3, Loss: fibre.Loss{Constant: 1}},
		Pulse: pulse.Pulse{Wavelength: 1030 * unit.Nanometre, Duration: 35 * unit.Femtosecond, Energy: 1.3 * unit.Microjoule},
	})
	if err != nil {
		t.Fatal(err)
	}
	return b
}

// made is a bench whose runs are replaced by a law for κ on two branches, with
// the shape that full-field runs show: a cubic in density, a parabola in energy.
type made struct {
	*Bench
	t testing.TB
}

func (b made) kappa(branch int, density float64, energy unit.Joule) float64 {
	x := (density - low) / (high - low)
	y := float64(energy/b.spec.Pulse.Energy) - 1
	k := 80 + 900*x - 250*x*x + 60*x*x*x - 700*y*(1-x) + 300*y*y
	if branch == 1 {
		k += 500 // some 10 nm to shorter wavelength
	}
	return k
}

// node carries out a task by the law.
func (b made) node(k Task, branches ...int) Node {
	n := Node{Density: k.Density, Energy: k.Energy, Moved: k.Moved}
	for _, i := range branches {
		omega, ok := Solve(b.Guide(k.Density), b.omega, b.kappa(i, k.Density, k.Energy), fibre.Frequency(255*unit.Nanometre))
		if !ok {
			b.t.Fatalf("no root at %g mol/m³ on branch %d", k.Density, i)
		}
		n.Lobes = append(n.Lobes, Lobe{Centroid: fibre.Wavelength(omega), Conversion: 0.08 / float64(1+i)})
	}
	return n
}

func (b made) all(tasks []Task) (list []Node) {
	for _, k := range tasks {
		if k.Moved == Nothing {
			list = append(list, b.node(k, 0))
		}
	}
	return list
}

func (b made) nodes(count int, branches ...int) (list []Node) {
	for _, k := range b.Plan(nil, span)[:count] {
		if k.Moved == Nothing {
			list = append(list, b.node(k, branches...))
		}
	}
	return list
}

// A cubic in density and a parabola in energy are what the interpolation takes
// exactly, its slopes included: by the theory of Lagrange interpolation.
func TestInterpolationIsExactForItsOrder(t *testing.T) {
	b := made{bench(t), t}
	m := b.Build(b.nodes(len(b.Plan(nil, span)), 0, 1))
	if len(m.branches) != 2 {
		t.Fatalf("%d branches, want 2", len(m.branches))
	}
	rng := rand.New(rand.NewPCG(7, 7))
	for range 200 {
		density := low + (high-low)*rng.Float64()
		energy := b.energy(-2) + (b.energy(2)-b.energy(-2))*unit.Joule(rng.Float64())
		var dst [MaxBranches]Point
		var omega [MaxBranches]float64
		if n := m.Emission(b.Guide(density), energy, &dst, &omega); n != 2 {
			t.Fatalf("%d branches at %g mol/m³ and %g J, want 2", n, density, float64(energy))
		}
		for i := range 2 {
			want := b.kappa(i, density, energy)
			if math.Abs(dst[i].Kappa-want) > 1e-5 {
				t.Errorf("κ on branch %d is %.8g, want %.8g", i, dst[i].Kappa, want)
			}
			exact, _ := Solve(b.Guide(density), b.omega, want, omega[i])
			if apart(exact, omega[i]) > 1e-6*unit.Nanometre {
				t.Errorf("emission on branch %d is %v, want %v", i, fibre.Wavelength(omega[i]), fibre.Wavelength(exact))
			}
			const dr, de = 0.01, 1e-10
			if s := (b.kappa(i, density+dr, energy) - b.kappa(i, density-dr, energy)) / (2 * dr); math.Abs(dst[i].OverDens-s) > 1e-3*math.Abs(s)+1e-3 {
				t.Errorf("κ over density on branch %d is %.6g, want %.6g", i, dst[i].OverDens, s)
			}
			if s := (b.kappa(i, density, energy+de) - b.kappa(i, density, energy-de)) / (2 * de); math.Abs(dst[i].OverEnergy-s) > 1e-3*math.Abs(s)+1e-3/de*1e-6 {
				t.Errorf("κ over energy on branch %d is %.6g, want %.6g", i, dst[i].OverEnergy, s)
			}
		}
	}
	if rms, n := m.LeftOut(); n < 20 || rms > 1e-3*unit.Nanometre {
		t.Errorf("left-out error %.3g nm at %d nodes, want none", rms.Nanometres(), n)
	}
}

func TestCoarseMapAnswersAndSaysSo(t *testing.T) {
	b := made{bench(t), t}
	two := b.Build(b.nodes(2, 0))
	three := b.Build(b.nodes(3, 0))
	if two.Usable() || !three.Usable() || !three.Coarse() {
		t.Errorf("two nodes usable %v, three usable %v and coarse %v", two.Usable(), three.Usable(), three.Coarse())
	}
	var dst [MaxBranches]Point
	if n := three.At(370, b.spec.Pulse.Energy, &dst); n != 1 {
		t.Errorf("%d branches in the middle, want 1", n)
	}
	if full := b.Build(b.nodes(len(b.Plan(nil, span)), 0)); full.Coarse() {
		t.Error("all nodes count as coarse")
	}
}

func TestNoExtrapolation(t *testing.T) {
	b := made{bench(t), t}
	m := b.Build(b.nodes(len(b.Plan(nil, span)), 0))
	edge := b.Plan(nil, span)[0].Density // the lowest node
	first, last := edge, m.nodes[len(m.nodes)-1].Density
	var dst [MaxBranches]Point
	for _, c := range []struct {
		density float64
		energy  unit.Joule
		want    int
	}{
		{first * 0.97, b.spec.Pulse.Energy, 1},
		{first * 0.96, b.spec.Pulse.Energy, 0},
		{last * 1.03, b.spec.Pulse.Energy, 1},
		{last * 1.04, b.spec.Pulse.Energy, 0},
		{last, b.energy(2) * 1.03, 1},
		{last, b.energy(2) * 1.06, 0},
		{last, b.energy(-2) * 0.9, 0},
		{math.NaN(), b.spec.Pulse.Energy, 0},
		{last, unit.Joule(math.NaN()), 0},
	} {
		if n := m.At(c.density, c.energy, &dst); n != c.want || m.Covers(c.density, c.energy) != (c.want > 0) {
			t.Errorf("%d branches at %g mol/m³ and %g uJ, covered %v; want %d", n, c.density, c.energy.Microjoules(), m.Covers(c.density, c.energy), c.want)
		}
	}
}

// Between two ranges that were anchored apart nothing is known.
func TestGapBetweenRanges(t *testing.T) {
	b := made{bench(t), t}
	var nodes []Node
	for _, r := range []Range{{270, 280}, {800, 900}} {
		for _, k := range b.Plan(nil, r) {
			if k.Moved == Nothing && k.Energy == b.spec.Pulse.Energy {
				nodes = append(nodes, b.node(k, 0))
			}
		}
	}
	m := b.Build(nodes)
	var dst [MaxBranches]Point
	if n := m.At(540, b.spec.Pulse.Energy, &dst); n != 0 || m.Covers(540, b.spec.Pulse.Energy) {
		t.Errorf("%d branches in the gap, covered %v", n, m.Covers(540, b.spec.Pulse.Energy))
	}
	for _, d := range []float64{275, 850} {
		if n := m.At(d, b.spec.Pulse.Energy, &dst); n != 1 || !m.Covers(d, b.spec.Pulse.Energy) {
			t.Errorf("%d branches at %g mol/m³", n, d)
		}
	}
}

// A node without emission ends the branch; on its other side another begins.
func TestDarkNodeEndsTheBranch(t *testing.T) {
	b := made{bench(t), t}
	k0 := int(place(350))
	dark := density(k0)
	var nodes []Node
	for k := k0 - 4; k <= k0+4; k++ {
		task := Task{density(k), b.spec.Pulse.Energy, Nothing}
		if k == k0 {
			nodes = append(nodes, b.node(task))
			continue
		}
		nodes = append(nodes, b.node(task, 0))
	}
	m := b.Build(nodes)
	var dst [MaxBranches]Point
	for x, want := range map[float64]int{dark: 0, dark * 0.97: 0, dark * 0.96: 1, dark * 1.04: 1} {
		if n := m.At(x, b.spec.Pulse.Energy, &dst); n != want || !m.Covers(x, b.spec.Pulse.Energy) {
			t.Errorf("%d branches at %.3f of the dark node, want %d; covered %v", n, x/dark, want, m.Covers(x, b.spec.Pulse.Energy))
		}
	}
}

// Where the stronger lobe changes, the branches stay what they are and only
// their order changes.
func TestStrongerBranchComesFirst(t *testing.T) {
	b := made{bench(t), t}
	var nodes []Node
	k0 := int(place(low))
	for i := range 9 {
		n := b.node(Task{density(k0 + i), b.spec.Pulse.Energy, Nothing}, 0, 1)
		n.Lobes[0].Conversion, n.Lobes[1].Conversion = 0.10-0.01*float64(i), 0.02+0.01*float64(i)
		nodes = append(nodes, n)
	}
	m := b.Build(nodes)
	var at, below [MaxBranches]Point
	if m.At(density(k0), b.spec.Pulse.Energy, &below) != 2 || m.At(density(k0+8), b.spec.Pulse.Energy, &at) != 2 {
		t.Fatal("want two branches at either end")
	}
	if below[0].Branch != at[1].Branch || below[1].Branch != at[0].Branch || at[0].Conversion < at[1].Conversion {
		t.Errorf("branches %d, %d at the low end and %d, %d at the high end; want them exchanged",
			below[0].Branch, below[1].Branch, at[0].Branch, at[1].Branch)
	}
}

func TestSlopeOverAnInput(t *testing.T) {
	b := made{bench(t), t}
	nodes := b.nodes(len(b.Plan(nil, span)), 0)
	k := Task{density(int(place(380))), b.spec.Pulse.Energy, NonlinearIndex}
	moved := b.node(k)
	shifted := b.kappa(0, k.Density, k.Energy) + 50
	omega, ok := Solve(b.Guide(k.Density), b.omega, shifted, fibre.Frequency(255*unit.Nanometre))
	if !ok {
		t.Fatal("no root")
	}
	moved.Lobes = []Lobe{{Centroid: fibre.Wavelength(omega), Conversion: 0.1}}
	m := b.Build(append(nodes, moved))
	if s := m.Slope(NonlinearIndex); !s.Known || math.Abs(s.Kappa-50/0.04) > 1e-3 {
		t.Errorf("κ over the nonlinear index is %+v, want %v", s, 50/0.04)
	}
	if s := m.Slope(Duration); s.Known {
		t.Errorf("κ over the duration is %+v without a run", s)
	}
}

func TestPlanLeavesOutWhatIsThere(t *testing.T) {
	b := made{bench(t), t}
	all := b.Plan(nil, span)
	seen := make(map[Task]bool)
	for _, k := range all {
		if seen[k] {
			t.Errorf("%+v stands twice", k)
		}
		seen[k] = true
	}
	if rest := b.Plan([]Node{b.node(all[0], 0)}, span); len(rest) != len(all)-1 || rest[0] != all[1] {
		t.Errorf("with the first node there, %d of %d tasks remain", len(rest), len(all))
	}
	for _, r := range []Range{{}, {5, 4}, {math.NaN(), 5}, {math.Inf(1), math.Inf(1)}} {
		if tasks := b.Plan(nil, r); len(tasks) != 0 {
			t.Errorf("the range %v needs %d tasks", r, len(tasks))
		}
	}
	quick := b.Quick(nil, span)
	if m := b.Build(b.all(quick)); len(quick) > 32 || !m.Usable() || !m.Covers(low, b.energy(-2)) || !m.Covers(high, b.energy(2)) {
		t.Errorf("the quick plan has %d tasks and does not span the range", len(quick))
	}
	for _, k := range all[:3] {
		if k.Energy != b.spec.Pulse.Energy || k.Moved != Nothing {
			t.Errorf("%+v is among the first: want the energy used most", k)
		}
	}
}

func TestDigest(t *testing.T) {
	s := bench(t).Spec()
	same := s
	same.Pulse.Energy *= 2
	if s.Digest() != same.Digest() {
		t.Error("another energy changes the digest, so that nodes are lost")
	}
	for name, change := range map[string]func(*Spec){
		"gas":      func(s *Spec) { s.Gas.Composition = "neon" },
		"index":    func(s *Spec) { s.Gas.Index = "borzsonyi-2008" },
		"wall":     func(s *Spec) { s.Fibre.Wall *= 1.0001 },
		"duration": func(s *Spec) { s.Pulse.Duration *= 1.0001 },
		"plasma":   func(s *Spec) { s.Plasma = pulse.Averaged },
	} {
		other := s
		change(&other)
		if other.Digest() == s.Digest() {
			t.Errorf("another %s leaves the digest", name)
		}
	}
}

func TestRefusals(t *testing.T) {
	good := bench(t).Spec()
	for name, change := range map[string]func(*Spec){
		"no energy":    func(s *Spec) { s.Pulse.Energy = 0 },
		"no fibre":     func(s *Spec) { s.Fibre.CoreDiameter = 0 },
		"no such gas":  func(s *Spec) { s.Gas.Composition = "phlogiston" },
		"not a number": func(s *Spec) { s.Pulse.Duration = unit.Second(math.NaN()) },
	} {
		s := good
		change(&s)
		if _, err := New(s); err == nil {
			t.Errorf("%s was accepted", name)
		}
	}
}

func TestAnswersAllocateNothing(t *testing.T) {
	b := made{bench(t), t}
	m := b.Build(b.nodes(len(b.Plan(nil, span)), 0, 1))
	g := b.Guide((low + high) / 2)
	var dst [MaxBranches]Point
	var omega [MaxBranches]float64
	if n := testing.AllocsPerRun(20, func() { m.Emission(g, b.spec.Pulse.Energy, &dst, &omega) }); n != 0 {
		t.Errorf("an answer made %v allocations", n)
	}
}

func BenchmarkEmission(b *testing.B) {
	x := made{bench(b), b}
	m := x.Build(x.nodes(len(x.Plan(nil, span)), 0, 1))
	g := x.Guide((low+high)/2 + 1)
	var dst [MaxBranches]Point
	var omega [MaxBranches]float64
	b.ReportAllocs()
	for b.Loop() {
		m.Emission(g, 1.27*unit.Microjoule, &dst, &omega)
	}
}
