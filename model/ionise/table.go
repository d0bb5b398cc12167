package ionise

import "math"

// Averaging says over what a table takes the rate.
type Averaging uint8

const (
	// Uniform is the rate at the field of P/A_eff, as published mode-averaged
	// work has it.
	Uniform Averaging = iota
	// Electrons weighs the rate by the light: W_J = ∫W(E(r)) I dA/∫I dA, for
	// the electron density that the mode sees.
	Electrons
	// Losses weighs all electrons alike: W_L = ∫W(E(r)) dA/A_eff, for the
	// energy that freeing them takes.
	Losses
)

// Profile is the radial shape of a mode: the field goes as J_Order(Zero·r/a).
type Profile struct {
	Order int
	Zero  float64
}

// Fundamental is the HE11 mode.
var Fundamental = Profile{0, 2.404825557695773}

const (
	// points are so many because each photon more that the electron must
	// absorb leaves a small kink in the rate.
	points = 4096
	// highest is the top of a table in κ³, far above barrier suppression
	// (near κ³/16). Beyond it the rate stays.
	highest = 0.5
	radii   = 120
)

// Table is a rate over the field E of the mode, |E|² being 2/(ε₀c) times the
// cycle average of P/A_eff. It never changes and may be shared.
type Table struct {
	from, step float64 // V/m
	scale      float64 // 1/step
	value      [points]float64
	slope      [points]float64 // of ln W per step
}

// NewTable tabulates a rate. The profile counts for Electrons and Losses only.
func NewTable(r Rate, p Profile, a Averaging) *Table {
	k3 := r.kappa * r.kappa * r.kappa
	if a == Uniform {
		return fill(threshold*k3, highest*k3, r.logarithm).inSI()
	}
	// Off the axis the field is weaker: the rate is needed below the threshold.
	base := fill(threshold/2*k3, highest*k3, r.logarithm)
	// Radial weights: dA ∝ x dx with x = r/a, Simpson's rule.
	var second, fourth float64
	shape, weight := make([]float64, radii+1), make([]float64, radii+1)
	most := 0.0
	for i := range shape {
		x := float64(i) / radii
		j := math.Jn(p.Order, p.Zero*x)
		w := 2.0
		switch {
		case i == 0 || i == radii:
			w = 1
		case i%2 == 1:
			w = 4
		}
		shape[i], weight[i] = math.Abs(j), w*x
		second += w * x * j * j
		fourth += w * x * j * j * j * j
		most = math.Max(most, shape[i])
	}
	// I(r) = (P/A_eff) · J² · ∫J²dA/∫J⁴dA.
	ratio := math.Sqrt(second / fourth)
	norm := second
	if a == Losses {
		norm = second * second / fourth // A_eff in the same measure
	}
	return fill(threshold*k3/(ratio*most), highest*k3/(ratio*most), func(f float64) float64 {
		top := base.log(f * ratio * most)
		sum := 0.0
		for i, s := range shape {
			local := f * ratio * s
			if local < base.from {
				continue
			}
			w := weight[i]
			if a == Electrons {
				w *= s * s
			}
			sum += w * math.Exp(base.log(local)-top)
		}
		return top + math.Log(sum/norm)
	}).inSI()
}

// fill tabulates ln W over fields in atomic units.
func fill(from, to float64, log func(float64) float64) *Table {
	t := &Table{from: from, step: (to - from) / (points - 1)}
	t.scale = 1 / t.step
	for i := range t.value {
		t.value[i] = log(from + float64(i)*t.step)
	}
	v := &t.value
	for i := 2; i < points-2; i++ { // fourth-order difference
		t.slope[i] = (v[i-2] - 8*v[i-1] + 8*v[i+1] - v[i+2]) / 12
	}
	for _, i := range []int{1, points - 2} {
		t.slope[i] = (v[i+1] - v[i-1]) / 2
	}
	t.slope[0] = (-3*v[0] + 4*v[1] - v[2]) / 2
	t.slope[points-1] = (3*v[points-1] - 4*v[points-2] + v[points-3]) / 2
	return t
}

// inSI turns a table in atomic units into one in V/m and 1/s.
func (t *Table) inSI() *Table {
	t.from *= atomicField
	t.step *= atomicField
	t.scale = 1 / t.step
	for i := range t.value {
		t.value[i] -= math.Log(atomicTime)
	}
	return t
}

// log interpolates ln W by cubic Hermite pieces. f is not below from.
func (t *Table) log(f float64) float64 {
	x := (f - t.from) * t.scale
	i := int(x)
	if i >= points-1 {
		return t.value[points-1]
	}
	x -= float64(i)
	v0, v1, s0, s1 := t.value[i], t.value[i+1], t.slope[i], t.slope[i+1]
	d := v1 - v0
	return v0 + x*(s0+x*(3*d-2*s0-s1+x*(s0+s1-2*d)))
}

// Rate returns the rate in 1/s at the instantaneous field e in V/m, of either
// sign. It is zero below the threshold and stays at its value at the top.
func (t *Table) Rate(e float64) float64 {
	if e < 0 {
		e = -e
	}
	if !(e >= t.from) {
		return 0
	}
	return math.Exp(t.log(e))
}

// Over fills dst with the rates at the fields e. Equal length; no allocation.
func (t *Table) Over(dst, e []float64) {
	for i, v := range e {
		dst[i] = t.Rate(v)
	}
}

// Threshold returns the field in V/m below which the rate is zero.
func (t *Table) Threshold() float64 { return t.from }
