package ionise

import (
	"fmt"
	"math"
)

// Atomic units in SI. Source: CODATA 2018, Rev. Mod. Phys. 93, 025010 (2021).
const (
	hartreeEV   = 27.211386245988
	atomicField = 5.14220674763e11    // V/m
	atomicTime  = 2.4188843265857e-17 // s
)

// Rate is the rate at which an atom loses one electron to a field.
type Rate struct {
	ip    float64 // ionisation energy, hartree
	kappa float64 // √(2 ip)
	n     float64 // effective principal quantum number 1/κ
	lead  float64 // C² f ip √(6/π)
	omega float64 // pump, hartree
}

// NewRate returns the rate for an ionisation energy in electronvolt, the
// angular momentum quantum number l of the electron that leaves, and the
// angular frequency of the pump in rad/s.
func NewRate(energyEV float64, l int, omega float64) (Rate, error) {
	if !(energyEV > 0 && energyEV < 100) || l < 0 || l > 3 {
		return Rate{}, fmt.Errorf("ionise: energy %g eV with l = %d, expected above 0 and below 100 eV and l from 0 to 3", energyEV, l)
	}
	w := omega * atomicTime
	if !(w > 1e-4 && w < 0.3) {
		return Rate{}, fmt.Errorf("ionise: pump frequency %g rad/s, expected a wavelength between 150 nm and 400 um", omega)
	}
	ip := energyEV / hartreeEV
	kappa := math.Sqrt(2 * ip)
	n := 1 / kappa
	c2 := math.Pow(2, 2*n) / (n * math.Gamma(2*n))
	f := float64(2*l + 1)
	return Rate{ip: ip, kappa: kappa, n: n, lead: c2 * f * ip * math.Sqrt(6/math.Pi), omega: w}, nil
}

// threshold is the field below which the rate counts as zero, in κ³.
const threshold = 0.012

// Threshold returns the field in V/m below which the rate is taken as zero.
func (r Rate) Threshold() float64 { return threshold * r.kappa * r.kappa * r.kappa * atomicField }

// Keldysh returns the parameter g = ω₀κ/F at the field in V/m: below 1 the
// electron tunnels, above it absorbs photons.
func (r Rate) Keldysh(field float64) float64 {
	return r.omega * r.kappa / (math.Abs(field) / atomicField)
}

// At returns the rate in 1/s at the instantaneous field in V/m. With F = |E|
// and g = ω₀κ/F, in atomic units, m = 0:
//
//	W = C² f I_p √(6/π) (2κ³/F)^{2n*−3/2} (1+g²)^{3/4} A₀(g) e^{−(2κ³/3F) G(g)} / √(3F/πκ³)
//
// The last divisor turns the rate averaged over a cycle into the one of the
// instant.
//
// Source: A. M. Perelomov, V. S. Popov, M. V. Terent'ev, Sov. Phys. JETP 23,
// 924 (1966), as written in F. A. Ilkov, J. E. Decker, S. L. Chin, J. Phys. B
// 25, 4005 (1992).
func (r Rate) At(field float64) float64 {
	f := math.Abs(field) / atomicField
	k3 := r.kappa * r.kappa * r.kappa
	if !(f >= threshold*k3) {
		return 0
	}
	return math.Exp(r.logarithm(f)) / atomicTime
}

// logarithm returns ln W in atomic units at the field f in atomic units.
func (r Rate) logarithm(f float64) float64 {
	k3 := r.kappa * r.kappa * r.kappa
	g := r.omega * r.kappa / f
	root := math.Sqrt(1 + g*g)
	return math.Log(r.lead) + (2*r.n-1.5)*math.Log(2*k3/f) + 1.5*math.Log(root) + math.Log(r.photons(g)) -
		2*k3/(3*f)*reduction(g) - 0.5*math.Log(3*f/(math.Pi*k3))
}

// reduction returns G(g) = (3/2g)[(1+1/2g²) arsinh g − √(1+g²)/2g], 1 at g = 0.
func reduction(g float64) float64 {
	if g < 0.02 { // the brackets cancel; series 1 − g²/10 + 9g⁴/280
		return 1 - g*g/10 + 9*g*g*g*g/280
	}
	return 3 / (2 * g) * ((1+1/(2*g*g))*math.Asinh(g) - math.Sqrt(1+g*g)/(2*g))
}

// photons returns A₀ = (4/√(3π)) g²/(1+g²) Σ_{k≥ν} e^{−α(k−ν)} D(√(β(k−ν))),
// the sum over the numbers of photons absorbed; 1 at g = 0.
func (r Rate) photons(g float64) float64 {
	nu := r.ip / r.omega * (1 + 1/(2*g*g))
	root := math.Sqrt(1 + g*g)
	alpha := 2 * (math.Asinh(g) - g/root)
	if g < 0.02 {
		alpha = 2 * g * g * g / 3
	}
	beta := 2 * g / root
	term := func(x float64) float64 { return math.Exp(-alpha*x) * dawson(math.Sqrt(beta*x)) }
	x := math.Ceil(nu) - nu
	const direct = 8 // terms summed one by one before the rest is integrated
	sum := 0.0
	for range direct {
		sum += term(x)
		x++
		if alpha*x > 40 {
			return 4 / math.Sqrt(3*math.Pi) * g * g / (1 + g*g) * sum
		}
	}
	// Euler–Maclaurin for what is left, ∫ + f/2 − f'/12. Over all x the
	// integral is √π/(2β√s(1+s)) with s = α/β (by parts, D' = 1 − 2yD).
	s := alpha / beta
	whole := math.SqrtPi / (2 * beta * math.Sqrt(s) * (1 + s))
	slope := term(x+0.5) - term(x-0.5)
	sum += whole - head(s, math.Sqrt(beta*x))/beta + term(x)/2 - slope/12
	return 4 / math.Sqrt(3*math.Pi) * g * g / (1 + g*g) * sum
}

// head returns ∫₀^y 2t e^{−st²} D(t) dt by Simpson's rule.
func head(s, y float64) float64 {
	const steps = 16
	h := y / steps
	sum := 0.0
	for i := 1; i <= steps; i++ {
		t := float64(i) * h
		w := 4.0
		switch {
		case i == steps:
			w = 1
		case i%2 == 0:
			w = 2
		}
		sum += w * 2 * t * math.Exp(-s*t*t) * dawson(t)
	}
	return sum * h / 3
}
