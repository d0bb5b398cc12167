package gas

import "math"

// excessSecondVirial returns δ₁₂ = B₁₂ − (B₁ + B₂)/2 in m³/mol at t.
//
// The molar volume of a mixture is taken as Σ xᵢvᵢ(p,T) + Σ_{i<j} 2xᵢxⱼδᵢⱼ:
// each gas by its own equation of state, and what the second virial of the
// mixture, B = Σ xᵢxⱼBᵢⱼ, adds to that. B of like and unlike pairs comes from
// corresponding states of simple fluids here, so that the rule vanishes for a
// pair of the same gas: C. Tsonopoulos, AIChE J. 20, 263 (1974) with acentric
// factor zero; T₁₂ = √(T₁T₂)·8√(V₁V₂)/(V₁^⅓+V₂^⅓)³ (Hudson–McCoubrey volumes),
// V₁₂ = ((V₁^⅓+V₂^⅓)/2)³, critical compressibility 0.291. From memory.
func excessSecondVirial(a, b *Species, t float64) float64 {
	ca, cb := a.critical, b.critical
	root := math.Cbrt(ca.volume) + math.Cbrt(cb.volume)
	v := root * root * root / 8
	mixed := critical{
		temperature: math.Sqrt(ca.temperature*cb.temperature) * math.Sqrt(ca.volume*cb.volume) / v,
		volume:      v,
	}
	return mixed.secondVirial(t) - 0.5*(ca.secondVirial(t)+cb.secondVirial(t))
}

// secondVirial returns B in m³/mol of a simple fluid: Tsonopoulos's f⁽⁰⁾ times
// RT_c/p_c = V_c/Z_c.
func (c critical) secondVirial(t float64) float64 {
	const compressibility = 0.291 // of simple fluids at the critical point
	r := c.temperature / t
	r2 := r * r
	f := 0.1445 - 0.330*r - 0.1385*r2 - 0.0121*r2*r - 0.000607*r2*r2*r2*r2
	return f * c.volume / compressibility
}
